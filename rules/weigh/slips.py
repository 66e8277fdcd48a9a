"""Readings that no fault explains: likely slips of pen, unit, decimal point or phase order."""

from __future__ import annotations

import itertools
import math

import numpy as np

from calc.observe import Seen, project
from calc.twin import Floats
from rules.answer import Slip
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


def slips(posterior: Posterior) -> tuple[Slip, ...]:
    """Name readings that are strange under every hypothesis that matters, and what may have happened."""
    s = weighing().slip
    share = posterior.share()
    places = sorted({h.place for h, p in zip(posterior.hypotheses, share, strict=True) if p > s.least_share})
    found = []
    for seen, group in zip(posterior.data.seen, posterior.data.groups, strict=True):
        predicted = posterior.fit.predicted[places][:, group]
        if not len(predicted) or _distance(seen, seen.y, predicted) < s.strange_sigmas:
            continue
        found.append(Slip(about=seen.ask.key, text=_text(seen, predicted, s.mended_sigmas)))
    return tuple(found)


def _distance(seen: Seen, y: Floats, predicted: Floats) -> float:
    """Smallest distance of a reading from what any hypothesis predicts, in sigmas."""
    r = (y - predicted) / seen.sigma
    return float(np.sqrt((r**2).sum(axis=1).min() / len(y)))


def _text(seen: Seen, predicted: Floats, mended: float) -> str:
    name = title(seen.ask.key)
    values = values_of(seen.y, seen.transform)
    trials: list[tuple[str, Floats]] = []
    if seen.transform.kind != "linear" or seen.transform.scale != 1.0:
        trials += [(f"{words} in the number", values * factor) for words, factor in _FACTORS]
    if len(values) == 3:
        trials += [
            ("another order of the three values", values[list(order)])
            for order in itertools.permutations(range(3))
            if order != (0, 1, 2)
        ]
    if not trials:
        return f"{name} fits no fault and no sound machine. Repeat it"
    scored = [
        (_distance(seen, project(trial[None, :], seen.transform)[0], predicted), words)
        for words, trial in trials
    ]
    best, words = min(scored)
    hint = f"; with {words} it would fit" if best < mended else ""
    return f"{name} fits no fault and no sound machine{hint}. Repeat it"
