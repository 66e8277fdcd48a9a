"""Readings that no fault explains: likely slips of pen, unit, decimal point or phase order."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence

import numpy as np

from calc.observe import Seen, project
from calc.twin import Floats
from rules.answer import Slip
from rules.weigh.laplace import without
from rules.weigh.posterior import Posterior
from rules.weigh.settings import weighing
from rules.weigh.wording import title, values_of

# Slips of the pen: a decimal point, a unit prefix, line for phase.
_FACTORS = (
    ("the decimal point one place to the right", 10.0),
    ("the decimal point one place to the left", 0.1),
    ("a unit a thousand times larger", 1000.0),
    ("a unit a thousand times smaller", 0.001),
    ("line instead of phase value", math.sqrt(3.0)),
    ("phase instead of line value", 1.0 / math.sqrt(3.0)),
)


_LINE_OR_PHASE = frozenset({"supply_voltage", "line_current"})


def slips(posterior: Posterior) -> tuple[Slip, ...]:
    """Name readings that are strange under every hypothesis that matters, and what may have happened."""
    s = weighing().slip
    share = posterior.share()
    share = share / share.sum()  # among the faults: a strange reading speaks for "other" against all of them
    places = sorted({h.place for h, p in zip(posterior.hypotheses, share, strict=True) if p > s.least_share})
    found = []
    for seen, group in zip(posterior.data.seen, posterior.data.groups, strict=True):
        outlooks = [_elsewhere(posterior, place, group) for place in places]
        if not outlooks or _distance(seen.y, outlooks) < s.strange_sigmas:
            continue
        found.append(Slip(about=seen.ask.key, text=_text(seen, outlooks, s.mended_sigmas)))
    return tuple(found)


def _elsewhere(posterior: Posterior, place: int, group: slice) -> tuple[Floats, Floats]:
    """What the other readings say of one: its mean and covariance under one mode."""
    fit, data = posterior.fit, posterior.data
    z, covariance = without(fit, data, place, group)
    slope = fit.slope[place, group]
    mean = fit.predicted[place, group] + slope @ (z - fit.z[place])
    return mean, slope @ covariance @ slope.T + np.diag(data.sigma[group] ** 2)


def _distance(y: Floats, outlooks: Sequence[tuple[Floats, Floats]]) -> float:
    """Smallest distance of a reading from what any hypothesis makes of the others, in sigmas."""
    gaps = [float((y - mean) @ np.linalg.solve(spread, y - mean)) / len(y) for mean, spread in outlooks]
    return math.sqrt(max(float(min(gaps)), 0.0))


def _text(seen: Seen, outlooks: Sequence[tuple[Floats, Floats]], mended: float) -> str:
    name = title(seen.ask.key)
    values = values_of(seen.y, seen.transform)
    trials: list[tuple[str, Floats]] = []
    if seen.transform.kind != "linear" or seen.transform.scale != 1.0:
        trials += [
            (words, values * factor)
            for words, factor in _FACTORS
            if factor > 2.0 or factor < 0.5 or seen.ask.measure in _LINE_OR_PHASE
        ]
    if len(values) == 3:
        trials += [
            ("another order of the three values", values[list(order)])
            for order in itertools.permutations(range(3))
            if order != (0, 1, 2)
        ]
    if not trials:
        return f"{name} fits no fault and no sound machine. Repeat it"
    scored = [
        (_distance(project(trial[None, :], seen.transform)[0], outlooks), words) for words, trial in trials
    ]
    best, words = min(scored)
    hint = f"; with {words} it would fit" if best < mended else ""
    return f"{name} fits no fault and no sound machine{hint}. Repeat it"
