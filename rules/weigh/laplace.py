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
HEAT = (9.0, 1.0, 1.0)  # the first round is taken with a wider view
QUICK = (1.0, 1.0)  # for the healthy machine alone, which is well begun after the survey
# Modes further behind the best than this are given up: at the start, after the first, after the second round.
PRUNE_NATS = (100.0, 40.0, 24.0)
REACH = 4.5  # no latent goes further out than this
_STEPS = (1.0, 0.4, 0.12)  # shares of a step that are tried
_LONGEST = 4.0
_COARSE, _FINE = 1.1, 0.12  # differences for slopes
_MATTERS = 0.1  # a latent that moves no reading by more sigmas is left where it is
_OFF_CENTRE = 0.3  # where the latents are surveyed: symmetric effects have no slope in the middle


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
        curvature = (j * w[:, :, None]).transpose(0, 2, 1) @ j
        if dp.shape[1]:
            curvature += (dp * plate_weight[:, :, None]).transpose(0, 2, 1) @ dp
        return j, curvature + np.eye(dy.shape[2])

    def step(self, z: Floats, y: Floats, dy: Floats, plate: Floats, dp: Floats, heat: float) -> Floats:
        """Gauss-Newton step of the active latents ``z``, at most ``_LONGEST`` long: (modes, active)."""
        r = self.residual(y)
        w = self.weights(r / math.sqrt(heat)) / heat
        u = plate_weight(plate)
        j, curvature = self.normal(dy, dp, w, u)
        pull = ((w * r)[:, None, :] @ j - (u * plate)[:, None, :] @ dp)[:, 0] - z
        move = np.linalg.solve(curvature, pull[:, :, None])[:, :, 0]
        length = np.linalg.norm(move, axis=1, keepdims=True)
        return np.asarray(move * np.minimum(1.0, _LONGEST / np.maximum(length, 1e-9)))


@dataclass
class _Search:
    """Where the fits of all modes stand; arrays are modes first."""

    z: Floats
    value: Floats
    """Objective at ``z``, (modes,)."""
    y: Floats
    plate: Floats
    dy: Floats
    """Slopes by the active latents, (modes, m, active); taken at ``z`` where ``fresh``."""
    dp: Floats
    fresh: NDArray[np.bool_]


def fit_modes(
    twin: Twin, modes: Sequence[Mode], data: Frame, keep: int = 0, heat: Sequence[float] = HEAT
) -> Fit:
    """Fit every mode; ``keep`` names a mode (healthy) that is never given up.

    ``heat`` has one entry per round: what multiplies the variance of the readings in it.

    Returns
    -------
    Fit
        One row per mode, in the order given.

    """
    fitter = Fitter(twin, data)
    active, common = _survey(fitter, modes, keep)
    search = _starts(fitter, modes, active, common)
    chosen = _within_reach(search.value, np.arange(len(modes)), keep, PRUNE_NATS[0])
    _refresh(fitter, modes, search, active, chosen, 0.5)
    for turn, wide in enumerate(heat):
        _improve(fitter, modes, search, active, chosen, wide)
        if turn + 1 < len(PRUNE_NATS):
            chosen = _within_reach(search.value, chosen, keep, PRUNE_NATS[turn + 1])
        _refresh(fitter, modes, search, active, chosen, _FINE)
    return _finish(fitter, search, active, chosen)


def _survey(fitter: Fitter, modes: Sequence[Mode], keep: int) -> tuple[NDArray[np.int64], Floats]:
    """The active latents, and the latents of the mode kept (the healthy one) after two steps.

    Active is a latent that changes any reading asked for, or the plate's misfit, in any effect.
    """
    first = {mode.effect: place for place, mode in reversed(list(enumerate(modes)))}
    shown = list(dict.fromkeys([keep, *first.values()]))
    base = np.full((len(shown), fitter.dim), _OFF_CENTRE)
    every = np.arange(fitter.dim)
    y, dy, plate, dp = fitter.slopes([modes[place] for place in shown], base, every, _COARSE)
    moved = _COARSE * np.abs(dy) / fitter.data.sigma[:, None]
    reach = moved.max(axis=(0, 1), initial=0.0)
    reach = np.maximum(reach, _COARSE * np.abs(dp).max(axis=(0, 1), initial=0.0))
    active = np.flatnonzero(reach > _MATTERS)
    one = [modes[keep]]
    start = base[:1, active]
    z = np.zeros((1, fitter.dim))
    z[:, active] = start + fitter.step(start, y[:1], dy[:1][..., active], plate[:1], dp[:1][..., active], 9.0)
    z = np.clip(z, -REACH, REACH)
    y, dy, plate, dp = fitter.slopes(one, z, active, _FINE)
    z[:, active] += fitter.step(z[:, active], y, dy, plate, dp, 1.0)
    return active, np.clip(z, -REACH, REACH)


def _starts(fitter: Fitter, modes: Sequence[Mode], active: NDArray[np.int64], common: Floats) -> _Search:
    """Where each mode's fit begins: at the typical machine, or at the fit of the mode kept (the healthy one).

    Load, supply and plate are much the same under every fault, so the healthy fit is often the better start.
    """
    z = np.zeros((len(modes), 2, fitter.dim))
    z[:, 1] = common
    z[:, :, fitter.dim - 2 :] = START
    y, plate = fitter.predict(modes, z)
    value = fitter.objective(z, y, plate)
    pick = np.argmin(value, axis=1)
    row = np.arange(len(modes))
    y, plate = y[row, pick], plate[row, pick]
    return _Search(
        z=z[row, pick],
        value=value[row, pick],
        y=y,
        plate=plate,
        dy=np.zeros((*y.shape, len(active))),
        dp=np.zeros((*plate.shape, len(active))),
        fresh=np.zeros(len(modes), dtype=bool),
    )


def _refresh(
    fitter: Fitter,
    modes: Sequence[Mode],
    search: _Search,
    active: NDArray[np.int64],
    chosen: NDArray[np.int64],
    step: float,
) -> None:
    """Take the slopes anew where a fit has moved on without them."""
    stale = chosen[~search.fresh[chosen]]
    if not len(stale):
        return
    picked = [modes[int(i)] for i in stale]
    _, search.dy[stale], _, search.dp[stale] = fitter.slopes(picked, search.z[stale], active, step)
    search.fresh[stale] = True


def _improve(
    fitter: Fitter,
    modes: Sequence[Mode],
    search: _Search,
    active: NDArray[np.int64],
    chosen: NDArray[np.int64],
    heat: float,
) -> None:
    """One damped Gauss-Newton step of the chosen modes; ``heat`` multiplies the variance of the readings.

    The slopes at the end of the whole step are taken along, for it is taken nearly always.
    """
    z = search.z[chosen]
    at = search.y[chosen], search.dy[chosen], search.plate[chosen], search.dp[chosen]
    move = fitter.step(z[:, active], *at, heat)
    picked = [modes[int(i)] for i in chosen]
    grid = np.repeat(z[:, None, :], len(_STEPS) + len(active), axis=1)
    for k, share in enumerate(_STEPS):
        grid[:, k, active] = np.clip(z[:, active] + share * move, -REACH, REACH)
    tries = len(_STEPS)
    grid[:, tries:] = grid[:, :1]
    way = np.where(grid[:, 0, active] > 0.0, -_FINE, _FINE)
    grid[:, tries + np.arange(len(active)), active] += way
    y, plate = fitter.predict(picked, grid)
    value = fitter.objective(grid[:, :tries], y[:, :tries], plate[:, :tries])
    pick = np.argmin(value, axis=1)
    row = np.arange(len(chosen))
    better = value[row, pick] < search.value[chosen]
    search.fresh[chosen] = better & (pick == 0)
    whole = chosen[better & (pick == 0)]
    place = row[better & (pick == 0)]
    search.dy[whole] = ((y[place, tries:] - y[place, :1]) / way[place, :, None]).transpose(0, 2, 1)
    search.dp[whole] = ((plate[place, tries:] - plate[place, :1]) / way[place, :, None]).transpose(0, 2, 1)
    moved, place, pick = chosen[better], row[better], pick[better]
    search.z[moved], search.value[moved] = grid[place, pick], value[place, pick]
    search.y[moved], search.plate[moved] = y[place, pick], plate[place, pick]


def _within_reach(value: Floats, chosen: NDArray[np.int64], keep: int, margin: float) -> NDArray[np.int64]:
    """Keep the modes that the best one is not too far ahead of."""
    near = value[chosen] < value[chosen].min() + margin
    near |= chosen == keep
    return np.asarray(chosen[near])


def _finish(fitter: Fitter, search: _Search, active: NDArray[np.int64], rows: NDArray[np.int64]) -> Fit:
    """Evidence, covariance and per-reading densities at the fits; given-up modes keep the bound they had."""
    data, count = fitter.data, len(search.z)
    weights = fitter.weights(fitter.residual(search.y[rows]))
    _, curvature = fitter.normal(search.dy[rows], search.dp[rows], weights, plate_weight(search.plate[rows]))
    taken = 0.5 * np.linalg.slogdet(curvature)[1]
    freedom = np.full(count, taken.max())
    freedom[rows] = taken
    covariance = np.repeat(np.eye(fitter.dim)[None], count, axis=0)
    covariance[rows[:, None, None], active[:, None], active[None, :]] = np.linalg.inv(curvature)
    slope = np.zeros((count, len(data.y), fitter.dim))
    slope[rows[:, None, None], np.arange(len(data.y))[:, None], active] = search.dy[rows]
    constants = np.array([t_constant(g.stop - g.start) - np.log(data.sigma[g]).sum() for g in data.groups])
    return Fit(
        z=search.z,
        evidence=-search.value - freedom + data.constant,
        predicted=search.y,
        slope=slope,
        covariance=covariance,
        log_likelihood=-fitter.reading_cost(fitter.residual(search.y)) + constants,
        stretch=0.5 * (search.z**2).sum(axis=1) + plate_cost(search.plate),
        freedom=freedom,
        alive=np.isin(np.arange(count), rows),
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
