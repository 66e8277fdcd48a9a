"""Fit every mode of every fault to the readings at once, and the evidence of each fit.

Per mode: the most probable latents by damped Gauss-Newton steps on whitened latents, and the
evidence by Laplace's method, log p(y | mode) = -phi(z*) - 1/2 log det(I + J'WJ) + constants
(D. J. C. MacKay, "Information Theory, Inference, and Learning Algorithms", 2003, ch. 27).
Each reading has a multivariate Student t error of NU degrees of freedom, so that one bad reading
cannot decide (K. L. Lange, R. J. A. Little and J. M. G. Taylor, JASA 84 (1989)). Deterministic.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from calc.twin import Floats, Mode, Twin, attribute_rows
from rules.weigh.frame import NU, Frame, t_constant

START = 0.2  # severity latents where a fit begins
ROUNDS = 3
# Modes further behind the best than this are given up: at the start, after the first, after the second round.
PRUNE_NATS = (100.0, 40.0, 24.0)
REACH = 4.5  # no latent goes further out than this
_STEPS = (1.0, 0.4, 0.12)


@dataclass(frozen=True)
class Fit:
    """Fits of all modes; arrays are modes first, components of all readings second."""

    z: Floats
    """Most probable latents, (modes, dim)."""
    evidence: Floats
    """Log evidence of each mode, constants included, (modes,)."""
    predicted: Floats
    """Transformed prediction at the fit, (modes, m)."""
    slope: Floats
    """Derivative of the transformed prediction by the latents, (modes, m, dim)."""
    covariance: Floats
    """Posterior covariance of the latents, (modes, dim, dim)."""
    log_likelihood: Floats
    """Log density of each reading at the fit, (modes, readings)."""
    stretch: Floats
    """Half the squared distance of the latents from typical, plate misfit included, (modes,)."""
    freedom: Floats
    """Half the log determinant: what the data took away from the latents' freedom, (modes,)."""
    alive: NDArray[np.bool_]
    """False where a mode was given up early as hopeless; its evidence is then a bound."""


def plate_cost(misfit: Floats) -> Floats:
    """Cost of plate fields that contradict each other; tails as of readings, for a plate can be wrong too."""
    return np.asarray((0.5 * (NU + 1.0) * np.log1p(misfit**2 / NU)).sum(axis=-1))


def plate_weight(misfit: Floats) -> Floats:
    """Weight of each plate residual in the next step."""
    return np.asarray((NU + 1.0) / (NU + misfit**2))


class Fitter:
    """Fits modes of one twin to one frame of readings."""

    def __init__(self, twin: Twin, data: Frame) -> None:
        self.twin = twin
        self.data = data
        self.dim = twin.dim

    def predict(self, modes: Sequence[Mode], z: Floats) -> tuple[Floats, Floats]:
        """Transformed predictions (modes, k, m) and plate misfits (modes, k, p) for z of (modes, k, dim)."""
        count, per_mode, dim = z.shape
        flat = z.reshape(-1, dim)
        rows = attribute_rows(modes, z, self.twin.defaults)
        answers = self.twin.predict(flat, rows, self.data.asks)
        parts = [one.project(answer) for one, answer in zip(self.data.seen, answers, strict=True)]
        y = np.concatenate(parts, axis=1) if parts else np.zeros((len(flat), 0))
        plate = self.twin.plate_misfit(flat)
        return y.reshape(count, per_mode, -1), plate.reshape(count, per_mode, -1)

    def residual(self, y: Floats) -> Floats:
        """Read minus predicted, over sigma."""
        return np.asarray((self.data.y - y) / self.data.sigma)

    def reading_cost(self, r: Floats) -> Floats:
        """Negative log density of each reading without its constant, (..., readings)."""
        costs = [
            0.5 * (NU + r[..., g].shape[-1]) * np.log1p((r[..., g] ** 2).sum(axis=-1) / NU)
            for g in self.data.groups
        ]
        return np.stack(costs, axis=-1) if costs else np.zeros((*r.shape[:-1], 0))

    def weights(self, r: Floats) -> Floats:
        """Weight of each component in the next step: 1 for an ordinary reading, less for a strange one."""
        w = np.empty_like(r)
        for g in self.data.groups:
            size = g.stop - g.start
            w[..., g] = (NU + size) / (NU + (r[..., g] ** 2).sum(axis=-1, keepdims=True))
        return w

    def active(self, modes: Sequence[Mode]) -> NDArray[np.int64]:
        """Latents that change any reading asked for, or the plate's misfit, in any effect."""
        first = {mode.effect: mode for mode in reversed(modes)}
        last = {mode.effect: mode for mode in modes}
        modes = [*first.values(), *last.values()]
        base = np.full((len(modes), self.dim + 1, self.dim), 0.3)
        base[:, 1:] += 1.1 * np.eye(self.dim)
        y, plate = self.predict(modes, base)
        moved = np.abs(y[:, 1:] - y[:, :1]) / self.data.sigma
        reach = moved.max(axis=(0, 2), initial=0.0)
        if plate.shape[2]:
            reach = np.maximum(reach, np.abs(plate[:, 1:] - plate[:, :1]).max(axis=(0, 2)))
        return np.flatnonzero(reach > 0.02)

    def objective(self, z: Floats, y: Floats, plate: Floats) -> Floats:
        """Half the squared latents and plate misfit, and the cost of all readings: (modes, k)."""
        prior = 0.5 * (z**2).sum(axis=-1) + plate_cost(plate)
        return np.asarray(prior + self.reading_cost(self.residual(y)).sum(axis=-1))

    def slopes(
        self, modes: Sequence[Mode], z: Floats, active: NDArray[np.int64], step: float
    ) -> tuple[Floats, Floats, Floats, Floats]:
        """Prediction, its derivatives by the active latents, plate misfit and its derivatives."""
        grid = np.repeat(z[:, None, :], len(active) + 1, axis=1)
        # Step inwards, so that a bounded severity is not pushed past its end.
        way = np.where(z[:, active] > 0.0, -step, step)
        place = np.arange(len(active))
        grid[:, place + 1, active] += way
        y, plate = self.predict(modes, grid)
        dy = (y[:, 1:] - y[:, :1]) / way[:, :, None]
        dp = (plate[:, 1:] - plate[:, :1]) / way[:, :, None]
        return y[:, 0], dy.transpose(0, 2, 1), plate[:, 0], dp.transpose(0, 2, 1)

    def normal(self, dy: Floats, dp: Floats, w: Floats, plate_weight: Floats) -> tuple[Floats, Floats]:
        """Whitened slopes and the curvature I + J'WJ on the active latents."""
        j = dy / self.data.sigma[None, :, None]
        curvature = np.einsum("mia,mi,mib->mab", j, w, j) + np.einsum("mia,mi,mib->mab", dp, plate_weight, dp)
        return j, curvature + np.eye(dy.shape[2])


def fit_modes(twin: Twin, modes: Sequence[Mode], data: Frame, keep: int = 0) -> Fit:
    """Fit every mode; ``keep`` names a mode (healthy) that is never given up.

    Returns
    -------
    Fit
        One row per mode, in the order given.

    """
    fitter = Fitter(twin, data)
    active = fitter.active(modes)
    z, value = _starts(fitter, modes, active, keep)
    chosen = _within_reach(value, np.arange(len(modes)), keep, PRUNE_NATS[0])
    for turn in range(ROUNDS):
        step, heat = (0.5, 9.0) if turn == 0 else (0.12, 1.0)
        picked = [modes[int(i)] for i in chosen]
        value[chosen], z[chosen] = _improve(fitter, picked, z[chosen], active, step, heat)
        if turn + 1 < len(PRUNE_NATS):
            chosen = _within_reach(value, chosen, keep, PRUNE_NATS[turn + 1])
    return _finish(fitter, modes, z, value, active, chosen)


def _starts(
    fitter: Fitter, modes: Sequence[Mode], active: NDArray[np.int64], keep: int
) -> tuple[Floats, Floats]:
    """Where each mode's fit begins: at the typical machine, or at the fit of the mode kept (the healthy one).

    Load, supply and plate are much the same under every fault, so the healthy fit is often the better start.
    """
    z = np.zeros((len(modes), 2, fitter.dim))
    common = np.zeros((1, fitter.dim))
    for step, heat in ((0.5, 9.0), (0.12, 1.0)):
        _, common = _improve(fitter, modes[keep : keep + 1], common, active, step, heat)
    z[:, 1] = common
    z[:, :, fitter.dim - 2 :] = START
    y, plate = fitter.predict(modes, z)
    value = fitter.objective(z, y, plate)
    pick = np.argmin(value, axis=1)
    row = np.arange(len(modes))
    return z[row, pick], value[row, pick]


def _improve(
    fitter: Fitter, modes: Sequence[Mode], z: Floats, active: NDArray[np.int64], step: float, heat: float
) -> tuple[Floats, Floats]:
    """One damped Gauss-Newton step of all modes; the first is taken with the variance times ``heat``."""
    y, dy, plate, dp = fitter.slopes(modes, z, active, step)
    r = fitter.residual(y)
    w = fitter.weights(r / math.sqrt(heat)) / heat
    u = plate_weight(plate)
    j, curvature = fitter.normal(dy, dp, w, u)
    pull = np.einsum("mia,mi->ma", j, w * r) - np.einsum("mia,mi->ma", dp, u * plate) - z[:, active]
    move = np.linalg.solve(curvature, pull[:, :, None])[:, :, 0]
    length = np.linalg.norm(move, axis=1, keepdims=True)
    move *= np.minimum(1.0, 4.0 / np.maximum(length, 1e-9))
    tries = np.repeat(z[:, None, :], len(_STEPS) + 1, axis=1)
    for k, share in enumerate(_STEPS):
        tries[:, k, active] = np.clip(z[:, active] + share * move, -REACH, REACH)
    y_try, plate_try = fitter.predict(modes, tries)
    value = fitter.objective(tries, y_try, plate_try)
    pick = np.argmin(value, axis=1)
    row = np.arange(len(z))
    return value[row, pick], tries[row, pick]


def _within_reach(value: Floats, chosen: NDArray[np.int64], keep: int, margin: float) -> NDArray[np.int64]:
    """Keep the modes that the best one is not too far ahead of."""
    near = value[chosen] < value[chosen].min() + margin
    near |= chosen == keep
    return np.asarray(chosen[near])


def _finish(
    fitter: Fitter,
    modes: Sequence[Mode],
    z: Floats,
    value: Floats,
    active: NDArray[np.int64],
    chosen: NDArray[np.int64],
) -> Fit:
    """Evidence, covariance and per-reading densities at the fits; given-up modes keep the bound they had."""
    alive = np.isin(np.arange(len(modes)), chosen)
    rows = np.flatnonzero(alive)
    y, dy, plate, dp = fitter.slopes([modes[int(i)] for i in rows], z[rows], active, 0.12)
    _, curvature = fitter.normal(dy, dp, fitter.weights(fitter.residual(y)), plate_weight(plate))
    predicted, misfit = fitter.predict(modes, z[:, None, :])
    taken = 0.5 * np.linalg.slogdet(curvature)[1]
    freedom = np.full(len(modes), taken.max())
    freedom[rows] = taken
    covariance = np.repeat(np.eye(fitter.dim)[None], len(modes), axis=0)
    covariance[rows[:, None, None], active[:, None], active[None, :]] = np.linalg.inv(curvature)
    slope = np.zeros((len(modes), len(fitter.data.y), fitter.dim))
    slope[rows[:, None, None], np.arange(len(fitter.data.y))[:, None], active] = dy
    constants = np.array(
        [t_constant(g.stop - g.start) - np.log(fitter.data.sigma[g]).sum() for g in fitter.data.groups]
    )
    return Fit(
        z=z,
        evidence=-value - freedom + fitter.data.constant,
        predicted=predicted[:, 0],
        slope=slope,
        covariance=covariance,
        log_likelihood=-fitter.reading_cost(fitter.residual(predicted[:, 0])) + constants,
        stretch=0.5 * (z**2).sum(axis=1) + plate_cost(misfit[:, 0]),
        freedom=freedom,
        alive=alive,
    )


def without(fit: Fit, data: Frame, row: int, group: slice) -> tuple[Floats, Floats]:
    """Latents and covariance of one mode with one reading's own information taken out again.

    The rank-m downdate of the Gaussian posterior: H - J'WJ, inverted by Woodbury's identity.
    """
    z, covariance = fit.z[row], fit.covariance[row]
    sigma = data.sigma[group]
    j = fit.slope[row, group] / sigma[:, None]
    r = (data.y[group] - fit.predicted[row, group]) / sigma
    w = (NU + len(r)) / (NU + float(r @ r))
    middle = np.eye(len(r)) / w - j @ covariance @ j.T
    covariance = covariance + covariance @ j.T @ np.linalg.solve(middle, j @ covariance)
    return z - covariance @ (j.T @ (w * r)), covariance


def join_fits(one: Fit, other: Fit) -> Fit:
    """Fits of two sets of modes to the same readings as one."""
    return Fit(
        **{
            name: np.concatenate([getattr(one, name), getattr(other, name)])
            for name in Fit.__dataclass_fields__
        }
    )
