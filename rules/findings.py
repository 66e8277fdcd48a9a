"""Published limits that readings cross. A limit speaks by itself, whatever the odds say."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

import msgspec

from calc.sheet import CaseSheet
from rules.answer import Finding
from rules.derived import Derived, derived
from rules.facts import facts_of
from rules.knowledge import Knowledge, Limit, LimitBand
from rules.limit_bands import band_of, concerns, in_unit
from rules.trips import trip_findings

WEIGHT: Final = {"stop": 0, "watch": 1, "remark": 2, "normal": 3}


class Crossing(msgspec.Struct, frozen=True):
    """A limit, the band that a value falls into, and that value."""

    limit: Limit
    band: LimitBand
    at: Derived


def findings(sheet: CaseSheet, knowledge: Knowledge) -> tuple[Finding, ...]:
    """Return the published limits that the readings of a sheet cross, the gravest first.

    One finding per limit: the worst of its readings. Limits that lack an input are silent.
    Last comes what the trip arithmetic says.
    """
    ordered = sorted(crossings(sheet, knowledge), key=lambda one: WEIGHT[one.band.verdict])
    return (*(_finding(one) for one in ordered), *trip_findings(sheet))


def crossings(sheet: CaseSheet, knowledge: Knowledge) -> Iterator[Crossing]:
    """Yield, for every limit that is crossed, its worst reading."""
    for limit in knowledge.limits.values():
        worst = min(_bands(sheet, limit), key=lambda one: WEIGHT[one.band.verdict], default=None)
        if worst is not None and worst.band.verdict != "normal":
            yield worst


def _bands(sheet: CaseSheet, limit: Limit) -> Iterator[Crossing]:
    for one in derived(sheet, limit.quantity):
        if concerns(limit, facts_of(sheet, one.reading)):
            yield Crossing(limit, _mildest(limit, one), one)


def _mildest(limit: Limit, one: Derived) -> LimitBand:
    """Return the band of a value, given the benefit of the step of its meter."""
    ends = (one.value - one.doubt, one.value, one.value + one.doubt)
    return max((band_of(limit, end) for end in ends), key=lambda band: WEIGHT[band.verdict])


def _finding(one: Crossing) -> Finding:
    limit, band = one.limit, one.band
    return Finding(
        id=band.id or limit.id,
        verdict="remark" if band.verdict == "normal" else band.verdict,
        says=f"{band.says or limit.name} ({_shown(one)})",
        source=_source(limit),
        about=one.at.reading.key,
    )


def _source(limit: Limit) -> str:
    clause = f", {limit.clause}" if limit.clause and limit.clause not in limit.source else ""
    return f"{limit.source}{clause}{'' if limit.looked_up else ' (from memory)'}"


def _shown(one: Crossing) -> str:
    """Say what was read, and what was made of it where the limit judges a derived quantity."""
    reading = one.at.reading
    typed = ", ".join(value.text for value in reading.values)
    if reading.temperature is not None and reading.temperature.is_read:
        typed += f" at {reading.temperature.text}"
    if one.limit.quantity == reading.measure or not math.isfinite(one.at.value):
        return f"read: {typed}"
    return f"{in_unit(one.limit, one.at.value)} from {typed}"
