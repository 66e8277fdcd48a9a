"""Which band of a limit a value falls into."""

from __future__ import annotations

import math
from typing import Final

from calc.sheet import CaseSheet
from rules.amounts import amount
from rules.facts import Facts, facts_of, meets
from rules.knowledge import Knowledge, Limit, LimitBand

NORMAL: Final = LimitBand(verdict="normal")


def band_of(limit: Limit, value: float) -> LimitBand:
    """Return the first band, from the top, that holds a value (in the inner unit).

    ``below`` and ``above`` leave their own boundary out: 5 Mohm is not below 5 Mohm. A
    value that no band holds, or that was not read, is normal.
    """
    if math.isnan(value):
        return NORMAL
    for band in limit.bands:
        under = band.below is None or _beyond(amount(band.below), value)
        over = band.above is None or _beyond(value, amount(band.above))
        if under and over:
            return band
    return NORMAL


def _beyond(high: float, low: float) -> bool:
    """Whether one value lies above another by more than the last bits of a division."""
    return high > low and not math.isclose(high, low, rel_tol=1e-9)


def concerns(limit: Limit, facts: Facts) -> bool:
    """Whether a limit speaks about a machine, a state and a reading at all."""
    if limit.status == "retired":
        return False
    kind, state = facts("kind"), facts("state")
    of_kind = "any" in limit.kinds or kind in limit.kinds
    in_state = "any" in limit.states or state in limit.states
    return of_kind and in_state and meets(limit.where, facts)


def floor_of(sheet: CaseSheet, knowledge: Knowledge, measure: str) -> tuple[float, str] | None:
    """Return the value below which a measure must not fall on this machine, and that value as text.

    Of several limits of verdict stop the highest counts. Insulation to frame is compared at 40 degC.
    Limits that ask for facts of a single reading are left out.
    """
    quantities = {measure, "insulation_at_40c"} if measure == "insulation_resistance" else {measure}
    facts = facts_of(sheet)
    ends = [
        end
        for limit in knowledge.limits.values()
        if limit.quantity in quantities and "any" in limit.states and concerns(limit, facts)
        for band in limit.bands
        if band.verdict == "stop" and (end := band.below) is not None
    ]
    highest = max(ends, key=amount, default=None)
    return None if highest is None else (amount(highest), highest)


def in_unit(limit: Limit, value: float) -> str:
    """Write a value of the inner unit in the unit in which the limit is written."""
    ends = [end for band in limit.bands for end in (band.below, band.above) if end is not None]
    _, _, unit = ends[0].partition(" ") if ends else ("", "", "")
    worth = amount(f"1 {unit}") if unit else 1.0
    return f"{value / worth:.3g} {unit}".strip()
