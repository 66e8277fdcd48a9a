"""The named checks that gate lines in ``gates.yaml`` call for.

A check looks at the recorded entries only, never at odds. It says that the line stands
cleared and by which entry, that something is still needed, or that an entry forbids.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Final, Literal

import msgspec

from calc.sheet import CaseSheet, Reading
from rules.amounts import amount
from rules.derived import OPEN_OHM, derived, numbers_of
from rules.findings import Crossing
from rules.gate_record import (
    INSULATION,
    INSULATION_FLOOR_OHM,
    TRIP_OBSERVATIONS,
    below_floor,
    floor_words,
    has_tripped,
    label,
    last,
    typed,
)
from rules.knowledge import GateRule, Knowledge, LimitBand


class Checked(msgspec.Struct, frozen=True):
    """What a check found: the state of the line, and the entry or the reason."""

    status: Literal["needed", "cleared", "forbids"]
    because: str = ""
    wants: tuple[str, ...] = ()
    """What is still asked for, where that is not the first entry that the line names."""
    only: tuple[str, ...] = ()
    """The guarded states that this keeps shut, where it is not all of them."""


class Evidence(msgspec.Struct, frozen=True):
    """What a check may look at."""

    sheet: CaseSheet
    knowledge: Knowledge
    rule: GateRule
    crossed: tuple[Crossing, ...]


Check = Callable[[Evidence], Checked]


def insulation_read(seen: Evidence) -> Checked:
    """Ask for insulation to frame that was read, and that crosses no limit of verdict stop."""
    low = below_floor(seen.sheet)
    if low is not None:
        return Checked("forbids", floor_words(low))
    low = _stopped(seen, "insulation_at_40c", *INSULATION)
    if low is not None:
        return Checked("forbids", f"{label(low)} read {typed(low)}, beyond its limit")
    return _read(seen, lambda number: number >= INSULATION_FLOOR_OHM)


def winding_read(seen: Evidence) -> Checked:
    """Ask for winding resistances that were all read, none open, balanced as far as the meter tells."""
    bad = _stopped(seen, "winding_unbalance", "open_windings", "winding_per_unit", *_measures(seen.rule))
    if bad is not None:
        return Checked("forbids", f"{label(bad)} read {typed(bad)}")
    reading = _newest(seen)
    if reading is None:
        return Checked("needed")
    numbers = numbers_of(reading)
    if len(numbers) < len(reading.values) or not numbers:
        return Checked("needed", f"not every value of {label(reading)} was read")
    if any(not 0.0 <= number < OPEN_OHM for number in numbers):
        return Checked("forbids", f"{label(reading)} read {typed(reading)}")
    if min(numbers) <= 0.0 or _step_hides_unbalance(seen, reading):
        return Checked(
            "needed", f"{typed(reading)}: the meter's step cannot judge it; four-wire or volt-drop"
        )
    return Checked("cleared", f"{label(reading)} read {typed(reading)}")


def _step_hides_unbalance(seen: Evidence, reading: Reading) -> bool:
    """Whether an unbalance of verdict stop could hide in the step of the meter."""
    ends = [
        amount_of
        for limit in seen.knowledge.limits.values()
        if limit.quantity == "winding_unbalance"
        for amount_of in _stop_ends(limit.bands)
    ]
    for one in derived(seen.sheet, "winding_unbalance"):
        if one.reading is reading:
            return any(one.value + one.doubt > end for end in ends)
    return False


def _stop_ends(bands: tuple[LimitBand, ...]) -> Iterator[float]:
    for band in bands:
        if band.verdict == "stop" and band.above is not None:
            yield amount(band.above)


def every_winding_read(seen: Evidence) -> Checked:
    """Ask for every reading that the line names, none open and none zero."""
    missing = [ask for ask in seen.rule.asks if last(seen.sheet, ask) is None]
    for ask in seen.rule.asks:
        reading = last(seen.sheet, ask)
        if reading is None:
            continue
        if any(number >= OPEN_OHM for number in numbers_of(reading)):
            return Checked("forbids", f"{label(reading)} read {typed(reading)}")
        if not numbers_of(reading) or min(numbers_of(reading)) <= 0.0:
            missing.append(ask)
    if missing:
        return Checked("needed", wants=tuple(missing))
    return Checked("cleared", "; ".join(f"{label(r)} {typed(r)}" for r in _asked(seen)))


def field_proved(seen: Evidence) -> Checked:
    """Ask for a field circuit that was read closed, and that no limit of verdict stop speaks against."""
    bad = _stopped(seen, "field_resistance", "field_resistance_over_plate", "field_current_over_plate")
    if bad is not None:
        return Checked("forbids", f"{label(bad)} read {typed(bad)}")
    return every_winding_read(seen)


def answered_yes(seen: Evidence) -> Checked:
    """Ask for a yes to any observation that the line names; a no forbids."""
    answers = {ask: seen.sheet.observations.get(ask) for ask in seen.rule.asks}
    yes = [ask for ask, answer in answers.items() if answer is True]
    if yes:
        return Checked("cleared", f"{_question(seen, yes[0])}: yes")
    no = [ask for ask, answer in answers.items() if answer is not None]
    if no:
        return Checked("forbids", f"{_question(seen, no[0])}: no")
    return Checked("needed")


def trip_explained(seen: Evidence) -> Checked:
    """After a trip, ask what tripped and whether the cause was found."""
    sheet = seen.sheet
    if not has_tripped(sheet, seen.knowledge):
        return Checked("cleared", "no trip on record")
    tripped = [name for name in TRIP_OBSERVATIONS if sheet.observations.get(name) is True]
    if not tripped:
        open_questions = tuple(name for name in seen.rule.asks if name not in sheet.observations)
        return Checked("needed", "what tripped is not on record", wants=open_questions)
    what = f"{_question(seen, tripped[0])}: yes"
    if sheet.observations.get("trip_cause_found") is not True:
        return Checked("needed", f"{what}; why is not on record", wants=("trip_cause_found",))
    return Checked("cleared", f"{what}; the cause was found")


def does_not_stall(seen: Evidence) -> Checked:
    """Forbid another start of a machine that was seen not to turn when energised."""
    stalled = [reading for reading in seen.sheet.readings if reading.state == "stalled"]
    if stalled:
        return Checked("forbids", f"{label(stalled[-1])} was read with the shaft standing still")
    if seen.sheet.complaint == "hums_will_not_turn":
        return Checked("forbids", "it hums and does not turn")
    return Checked("cleared", "no stall on record")


def never(seen: Evidence) -> Checked:
    """Forbid always: the state is never arranged on such a machine."""
    return Checked("forbids", seen.rule.name)


def no_stop_finding(seen: Evidence) -> Checked:
    """Forbid the states that crossed limits of verdict stop name."""
    stops = [one for one in seen.crossed if one.band.verdict == "stop" and one.limit.shuts]
    if not stops:
        return Checked("cleared", "no limit that means stop is crossed")
    because = "; ".join(f"{one.band.says or one.limit.name}: {typed(one.at.reading)}" for one in stops)
    states = {state for one in stops for state in one.limit.shuts}
    return Checked("forbids", because, only=() if "any" in states else tuple(sorted(states)))


def _stopped(seen: Evidence, *quantities: str) -> Reading | None:
    for one in seen.crossed:
        if one.band.verdict == "stop" and one.limit.quantity in quantities:
            return one.at.reading
    return None


def _read(seen: Evidence, holds: Callable[[float], bool]) -> Checked:
    for reading in _asked(seen):
        numbers = numbers_of(reading)
        if numbers and all(map(holds, numbers)):
            return Checked("cleared", f"{label(reading)} read {typed(reading)}")
    return Checked("needed")


def _asked(seen: Evidence) -> Iterator[Reading]:
    for ask in seen.rule.asks:
        if (reading := last(seen.sheet, ask)) is not None:
            yield reading


def _newest(seen: Evidence) -> Reading | None:
    return next(_asked(seen), None)


def _measures(rule: GateRule) -> tuple[str, ...]:
    return tuple(ask.partition("@")[0] for ask in rule.asks)


def _question(seen: Evidence, observation: str) -> str:
    entry = seen.knowledge.observations.get(observation)
    return entry.name if entry else observation.replace("_", " ")


CHECKS: Final[dict[str, Check]] = {
    check.__name__: check
    for check in (
        no_stop_finding,
        insulation_read,
        winding_read,
        every_winding_read,
        field_proved,
        answered_yes,
        trip_explained,
        does_not_stall,
        never,
    )
}
