"""From a reading as typed to numbers that a model's prediction can be compared with.

A reading of three values becomes a level and two orthonormal contrasts, so that a
meter's gain error stays in the level; a current or a resistance enters by its
logarithm. The uncertainty holds the model's error, the meter's accuracy, the worth of
the last digit typed and the leads.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from calc.sheet import Reading, Value
from calc.twin import Ask, Floats, Transform, Twin

# Rows: level, and two contrasts that see no common factor. Orthonormal contrasts.
_THREE = np.array(
    [
        [1 / 3, 1 / 3, 1 / 3],
        [0.0, 1 / math.sqrt(2), -1 / math.sqrt(2)],
        [2 / math.sqrt(6), -1 / math.sqrt(6), -1 / math.sqrt(6)],
    ]
)
_TWO = np.array([[0.5, 0.5], [1 / math.sqrt(2), -1 / math.sqrt(2)]])
_ONE = np.array([[1.0]])


@dataclass(frozen=True)
class InstrumentError:
    """What the usual instrument may be off by, one sigma; shares are of the reading.

    ``floor`` and ``lead_ohm`` are in the inner unit; ``contrast`` holds between values
    of one reading taken with the same meter.
    """

    share: float
    floor: float = 0.0
    contrast: float | None = None
    lead_ohm: float = 0.0


@dataclass(frozen=True)
class Seen:
    """A reading made ready for comparison: ``y`` and ``sigma`` of shape (m,)."""

    ask: Ask
    y: Floats
    sigma: Floats
    transform: Transform
    present: tuple[int, ...]

    def project(self, predicted: Floats) -> Floats:
        """Bring a prediction of shape (rows, arity) into the space of ``y``: (rows, m)."""
        picked = predicted[:, list(self.present)] if predicted.shape[1] > 1 else predicted
        return project(picked, self.transform)


def context(reading: Reading) -> Ask:
    """Return what is asked of the model for a reading, with the context that was noted."""
    return Ask(
        measure=reading.measure,
        state=reading.state,
        temperature_c=_number(reading.temperature),
        speed_rpm=_number(reading.speed),
        at=reading.at,
        links=reading.links,
        method=reading.method,
    )


def _number(value: Value | None) -> float | None:
    return value.number if value is not None and value.is_read else None


def contrasts_matrix(count: int) -> Floats:
    """Rows that make the contrasts of ``count`` values: (count - 1, count)."""
    return _matrix(count)[1:]


def _matrix(count: int) -> Floats:
    return {1: _ONE, 2: _TWO, 3: _THREE}[count]


def project(values: Floats, transform: Transform) -> Floats:
    """Transform values of shape (rows, n) into level and contrasts, shape (rows, n).

    Logarithmic quantities that may vanish on one line (currents) have linear contrasts
    over their own mean, so that a line without current is a contrast and not a minus infinity.
    """
    matrix = _matrix(values.shape[1])
    if transform.kind == "log":
        logs = np.log(np.minimum(np.maximum(values, 0.0) + transform.floor, transform.cap))
        return np.asarray(logs @ matrix.T)
    if transform.kind == "log_mean":
        mean = values.mean(axis=1, keepdims=True)
        floor = max(transform.floor, 1e-12)
        level = np.log(np.maximum(mean, 0.0) + floor)
        contrasts = (values / np.maximum(mean, 4.0 * floor)) @ matrix[1:].T
        return np.concatenate([level, contrasts], axis=1)
    return np.asarray((values / transform.scale) @ matrix.T)


def make_seen(reading: Reading, twin: Twin, instrument: InstrumentError) -> Seen | None:
    """Make a reading ready for comparison, or None where nothing of it was read."""
    present = tuple(i for i, value in enumerate(reading.values) if value.is_read)
    if not present:
        return None
    ask = context(reading)
    transform = twin.transform(reading.measure)
    numbers = np.array([[_finite(reading.values[i], transform) for i in present]])
    y = project(numbers, transform)[0]
    sigma = _sigma(
        reading=reading, present=present, numbers=numbers[0], y=y, twin=twin, instrument=instrument
    )
    return Seen(ask=ask, y=y, sigma=sigma, transform=transform, present=present)


def _finite(value: Value, transform: Transform) -> float:
    """Return a number for any value; an open circuit is 1e9, and the transform's cap does the rest."""
    if math.isinf(value.number):
        return 1e9
    if value.kind == "range" and value.high is not None:
        return 0.5 * (value.number + value.high)
    return value.number


def _sigma(
    *,
    reading: Reading,
    present: Sequence[int],
    numbers: Floats,
    y: Floats,
    twin: Twin,
    instrument: InstrumentError,
) -> Floats:
    """One sigma of level and contrasts in the transformed space."""
    transform = twin.transform(reading.measure)
    model = twin.model_error(context(reading))
    floor = max(transform.floor, 1e-12)
    size = float(np.mean(np.abs(numbers)))
    step = max(reading.values[i].resolution for i in present)
    # A meter that shows finer digits than its usual floor is a finer meter, and its leads were taken off.
    meter_floor = min(instrument.floor, 3.0 * step) if step > 0.0 else instrument.floor
    leads = min(instrument.lead_ohm, 30.0 * step) if step > 0.0 else instrument.lead_ohm
    if reading.method in {"four_wire", "volt_drop"}:
        leads = 0.0
    absolute = math.sqrt(step * step / 12.0 + meter_floor**2 + leads**2)
    between = math.sqrt(step * step / 12.0 + meter_floor**2)
    if transform.kind == "linear":
        worth = 1.0 / transform.scale
        share = instrument.share * size * worth
        level = math.sqrt(model.level**2 + share**2 + (absolute * worth) ** 2)
        gain = (instrument.contrast if instrument.contrast is not None else instrument.share) * size * worth
        contrast_floor = math.sqrt(model.contrast**2 + gain**2 + (between * worth) ** 2)
    else:
        worth = 1.0 / (size + floor)
        level = math.sqrt(model.level**2 + instrument.share**2 + min(absolute * worth, 3.0) ** 2)
        gain = instrument.contrast if instrument.contrast is not None else instrument.share
        contrast_floor = math.sqrt(model.contrast**2 + gain**2 + min(between * worth, 3.0) ** 2)
    contrasts = y[1:]
    grown = np.sqrt(contrast_floor**2 + (model.contrast_share * np.linalg.norm(contrasts)) ** 2)
    return np.concatenate([[level], np.full(len(contrasts), grown)])
