"""The interface of a machine model: what every kind offers to whoever weighs readings.

A twin is the machine as its nameplate describes it. What the plate does not say is
left as latent quantities ``z``, each a standard normal before anything is read:
plate tolerances, split of losses, supply level, load, temperature, and, in the last
two places, the severities of up to two faults. One vectorised forward model gives
every reading in every state for many rows at once; a row is one ``z`` under one
:class:`Mode`, which says in what discrete way the machine differs from a healthy one.

A twin knows no odds, no limits and no advice.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True)
class Ask:
    """One reading that is asked of the model, with the context that changes its value."""

    measure: str
    state: str
    temperature_c: float | None = None
    speed_rpm: float | None = None
    at: str | None = None
    links: str | None = None
    method: str | None = None

    @property
    def key(self) -> str:
        """Measure and state together, such as ``line_current@loaded``."""
        return f"{self.measure}@{self.state}"


@dataclass(frozen=True)
class Severity:
    """One attribute that a severity latent sets: ``low * (high / low) ** Phi(z)``."""

    attribute: str
    low: float
    high: float


@dataclass(frozen=True)
class Mode:
    """One discrete way in which an effect shows: which phase, which place, stalled or not.

    ``fixed`` sets attributes of the kind's model; ``severity`` names those that the
    severity latents set. ``weight`` is the mode's share among the modes of its effect.
    ``cause`` names what is behind it where one effect has several causes.
    """

    effect: str
    variant: str = ""
    weight: float = 1.0
    fixed: Mapping[str, float] = field(default_factory=dict)
    severity: tuple[Severity, ...] = ()
    cause: str = ""


@dataclass(frozen=True)
class ModelError:
    """How far the model itself may be off, one sigma, in the transformed reading.

    ``level`` is for the value (or the mean of three), ``contrast`` for the two
    differences between three values, ``contrast_share`` grows with the contrast read.
    """

    level: float
    contrast: float = 0.0
    contrast_share: float = 0.0


@dataclass(frozen=True)
class Transform:
    """How a reading enters the comparison.

    ``log``: ``ln(x + floor)``, capped at ``cap``; ``linear``: ``x / scale``. Three values
    become a level and two orthonormal contrasts.
    """

    kind: str
    scale: float = 1.0
    floor: float = 0.0
    cap: float = float("inf")


class Twin(Protocol):
    """What the weighing, the bands and the screens ask of a machine model."""

    @property
    def kind(self) -> str:
        """Machine kind, an id of ``calc.quantities.KINDS``."""

    @property
    def dim(self) -> int:
        """Number of latents; the last two are severities."""

    @property
    def defaults(self) -> Mapping[str, float]:
        """Attributes of a healthy machine."""

    @property
    def effects(self) -> tuple[str, ...]:
        """Effects that :meth:`modes` knows."""

    def modes(self, effect: str, severity: tuple[float, float] | None = None) -> tuple[Mode, ...]:
        """Enumerate the discrete ways of an effect on this machine; ``none`` is the healthy one."""

    def covers(self, ask: Ask) -> bool:
        """Whether the model predicts this reading."""

    def chance_of_part(self, ask: Ask) -> float:
        """Chance that the machine has the part that is to be read, where the plate leaves that open."""

    def predict(self, z: Floats, attributes: Mapping[str, Floats], asks: Sequence[Ask]) -> list[Floats]:
        """Predict readings.

        ``z`` has shape (rows, dim), every attribute shape (rows,). Each answer has shape
        (rows, arity), in the inner unit of its dimension; an open circuit is 1e9 ohm.
        """

    def plate_misfit(self, z: Floats) -> Floats:
        """Plate fields that the latents do not meet by construction, in sigmas: (rows, n)."""

    def possible(self, z: Floats, attributes: Mapping[str, Floats]) -> Mapping[str, Floats]:
        """For each state the chance that such a machine can be in it, 0.0 to 1.0: shape (rows,)."""

    def transform(self, measure: str) -> Transform:
        """How a measure enters the comparison on this machine."""

    def model_error(self, ask: Ask) -> ModelError:
        """How far the model may be off for this reading, in transformed units."""


def attribute_rows(modes: Sequence[Mode], z: Floats, defaults: Mapping[str, float]) -> dict[str, Floats]:
    """Spread the attributes of modes over rows.

    Parameters
    ----------
    modes : sequence of Mode
        One per block of rows.
    z : ndarray
        Latents, shape (modes, k, dim): k rows per mode.
    defaults : mapping
        Attributes of a healthy machine.

    Returns
    -------
    dict of ndarray
        Each of shape (modes * k,).

    """
    count, per_mode, dim = z.shape
    columns = {name: place for place, name in enumerate(defaults)}
    plain = np.tile(np.array(list(defaults.values())), (count, 1))
    low, log_ratio = np.ones((count, 1, 2)), np.zeros((count, 1, 2))
    for index, mode in enumerate(modes):
        for name, number in mode.fixed.items():
            plain[index, columns[name]] = number
        for place, severity in enumerate(mode.severity):
            low[index, 0, place] = severity.low
            log_ratio[index, 0, place] = math.log(severity.high / severity.low)
    grid = np.repeat(plain.T, per_mode, axis=1)
    severe = low * np.exp(log_ratio * standard_normal_cdf(z[:, :, dim - 2 :]))
    for index, mode in enumerate(modes):
        rows = slice(index * per_mode, (index + 1) * per_mode)
        for place, severity in enumerate(mode.severity):
            grid[columns[severity.attribute], rows] = severe[index, :, place]
    return dict(zip(columns, grid, strict=True))


def standard_normal_cdf(x: Floats) -> Floats:
    """Distribution function of the standard normal.

    Abramowitz and Stegun, Handbook of Mathematical Functions, 26.2.17; absolute error below 7.5e-8.
    """
    t = 1.0 / (1.0 + 0.2316419 * np.abs(x))
    poly = t * (0.319381530 + t * (-0.356563782 + t * (1.781477937 + t * (-1.821255978 + t * 1.330274429))))
    tail = np.exp(-0.5 * x * x) / np.sqrt(2.0 * np.pi) * poly
    return np.asarray(np.where(x >= 0.0, 1.0 - tail, tail), dtype=np.float64)
