"""Fit every mode of every fault to the readings at once: damped Gauss-Newton steps on whitened latents.

All modes move together, in few and large calls of the model. Deterministic.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from calc.twin import Floats, Mode, Twin
from rules.weigh.frame import Frame, t_constant
from rules.weigh.laplace import Fit, Fitter, plate_cost, plate_weight

HEAT = (25.0, 1.0, 1.0)  # what multiplies the variance of the readings in each round: first a wide view
QUICK = (1.0, 1.0)  # for the healthy machine alone, which is well begun after the survey
_FIRST_HEAT = 9.0  # of the step that the survey takes for the mode kept
START = 0.2  # severity latents where a fit begins
# Modes further behind the best than this are given up: at the start, after the first, after the second round.
PRUNE_NATS = (100.0, 40.0, 24.0)
REACH = 4.5  # no latent goes further out than this
_STEPS = (1.0, 0.4, 0.12)  # shares of a step that are tried
_COARSE, _MIDDLE, _FINE = 1.1, 0.5, 0.12  # differences for slopes: survey, start, rounds
_MATTERS = 0.25  # a latent that moves no reading by more sigmas is left where it is
_OFF_CENTRE = 0.3  # where the latents are surveyed: symmetric effects have no slope in the middle


@dataclass
class _Search:
    """Where the fits of all modes stand; arrays are modes first."""

    z: Floats
    value: Floats
    """Objective at ``z``, (modes,)."""
    y: Floats
    plate: Floats
    dy: Floats
    """Slopes by the active latents, (modes, m, active); fine ones taken at ``z`` where ``fresh``."""
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
    _refresh(fitter, modes, search, active, chosen, _MIDDLE)
    for turn, wide in enumerate(heat):
        _improve(fitter, modes, search, active, chosen, wide)
        if turn + 1 < len(PRUNE_NATS):
            chosen = _within_reach(search.value, chosen, keep, PRUNE_NATS[turn + 1])
        _refresh(fitter, modes, search, active, chosen, _FINE)
    return _finish(fitter, search, active, chosen)


def _survey(fitter: Fitter, modes: Sequence[Mode], keep: int) -> tuple[NDArray[np.int64], Floats]:
    """The active latents, and the latents of the mode kept (the healthy one) after one step.

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
    start = base[:1, active]
    z = np.zeros((1, fitter.dim))
    z[:, active] = start + fitter.step(
        start, y[:1], dy[:1][..., active], plate[:1], dp[:1][..., active], _FIRST_HEAT
    )
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
    search.fresh[stale] = step == _FINE


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
    search.fresh[chosen[better]] = pick[better] == 0
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
    )
