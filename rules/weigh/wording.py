"""Readings and predictions in words and figures, for reasons and proposals."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from calc.observe import contrasts_matrix
from calc.quantities import MEASURES
from calc.twin import Floats, Transform
from rules.knowledge import Knowledge
from rules.weigh.predict import Outlook, in_usual_unit
from rules.weigh.soft import shape, spread_of

if TYPE_CHECKING:
    from rules.weigh.information import Leading
    from rules.weigh.posterior import Posterior

_OPEN_OHM = 1e9  # a winding above this is shown as open


def values_of(y: Floats, transform: Transform) -> Floats:
    """Bring level and contrasts of one reading back to its values in the inner unit."""
    level, contrasts = y[0], y[1:]
    matrix = contrasts_matrix(len(y))
    spread = contrasts @ matrix if len(contrasts) else np.zeros(1)
    if transform.kind == "linear":
        return np.asarray((level + spread) * transform.scale)
    if transform.kind == "log_mean":
        mean = max(math.exp(level) - transform.floor, 0.0)
        return np.asarray(np.maximum(mean * (1.0 + spread), 0.0))
    return np.asarray(np.maximum(np.exp(level + spread) - transform.floor, 0.0))


def figure(number: float) -> str:
    """Three significant digits, without a power of ten."""
    if not math.isfinite(number):
        return "open"
    if abs(number) < 1e-6:
        return "0"
    digits = max(0, 2 - math.floor(math.log10(abs(number))))
    return f"{number:.{min(digits, 6)}f}"


def amount_text(measure: str, values: Sequence[float], cap: float = math.inf) -> str:
    """Values of a measure in its usual unit, such as ``15.2 15.9 14.8 A``."""
    entry = MEASURES[measure]
    shown = [
        "open" if entry.dimension == "resistance" and value > min(_OPEN_OHM, 0.9 * cap) else
        figure(in_usual_unit(measure, value))
        for value in values
    ]  # fmt: skip
    if "open" in shown:
        unit = "" if set(shown) == {"open"} else f"({entry.usual_unit})"
    else:
        unit = entry.usual_unit
    return f"{' '.join(shown)} {unit}".strip()


def title(key: str) -> str:
    """A reading or observation in words: ``line current, loaded``."""
    measure, _, state = key.rstrip("'").partition("@")
    entry = MEASURES.get(measure)
    if entry is None:
        return key.replace("_", " ")
    return f"{entry.label}, {state.replace('_', ' ')}"


def expect(
    look: Outlook | None,
    pair: tuple[int, int],
    lead: Leading,
    posterior: Posterior,
    knowledge: Knowledge,
    key: str,
) -> str:
    """What each of two hypotheses would show in a reading, named ``measure@state``."""
    names = {f.id: f.name for f in posterior.faults}
    measure, _, state = key.partition("@")
    parts = []
    for row in dict.fromkeys(pair):
        fault = lead.hypotheses[row].fault
        if look is not None:
            values = values_of(look.mean[row], look.transform)
            text = amount_text(measure, [float(v) for v in values], look.transform.cap)
        else:
            text = _spread_text(posterior, knowledge, fault, measure, state)
        parts.append(f"{names[fault]}: {text}")
    return "; ".join(parts)


def _spread_text(posterior: Posterior, knowledge: Knowledge, fault: str, measure: str, state: str) -> str:
    by_id = {f.id: f for f in posterior.faults}
    spread = spread_of(by_id[fault], knowledge.faults.get("healthy"), measure, state)
    if spread is None:
        return "nothing known"
    logarithmic, centre, sigma = shape(spread)
    edges = [centre - 1.645 * sigma, centre + 1.645 * sigma]
    low, high = (math.exp(x) if logarithmic else x for x in edges)
    unit = MEASURES[measure].usual_unit
    return f"{figure(in_usual_unit(measure, low))} to {figure(in_usual_unit(measure, high))} {unit}".strip()


def why(pair: tuple[int, int], lead: Leading, posterior: Posterior) -> str:
    """Which two suspects a proposal does most to tell apart."""
    names = {f.id: f.name for f in posterior.faults}
    one, other = (names[lead.hypotheses[row].fault] for row in pair)
    return f"tells {one} from {other}" if one != other else ""
