"""What a new shift may no longer stand on: an old isolation record, and old entries that cleared the gate.

Entries that forbid never grow old. What cleared a line of the gate does: after a shift, or
before a repair, it is asked for again.
"""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from typing import TYPE_CHECKING, Any, Final

import msgspec

from calc.quantities import ENERGISED_STATES
from casebook import bodies
from rules.gate import DECISIVE, SAYS_SHUT, GateState, gate
from tui.picked import item_of

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calc.sheet import CaseSheet
    from casebook.fold import Case, Logged
    from rules.answer import Diagnosis
    from rules.gate import ShutLine
    from rules.knowledge import GateRule, Knowledge

SHIFT: Final = timedelta(hours=12)
"""How long an isolation record and what cleared the gate hold: a long shift; common practice."""

AHEAD: Final = timedelta(minutes=15)
"""By how much two clocks may differ; what is dated further ahead was written before a clock was set back."""

WAS_CLEARED: Final = "was cleared"
AGED: Final = "what cleared this line of the gate is from an earlier shift, or from before a repair"


def age_words(age: timedelta) -> str:
    """Return an age in words."""
    hours = age.total_seconds() / 3600
    return f"{hours:.0f} h" if hours < 48 else f"{hours / 24:.0f} days"


def isolation_lapse(case: Case, now: datetime) -> str:
    """Return why the last isolation record no longer holds; nothing where it holds, or there is none."""
    if not case.isolation or not case.isolation[-1].what.isolated:
        return ""
    record = case.isolation[-1]
    after = False
    for line in case.lines:
        if after and not line.struck:
            match line.body:
                case bodies.ReadingTaken(reading=reading) if reading.state in ENERGISED_STATES:
                    return f"void: a reading '{reading.state.replace('_', ' ')}' was recorded after it"
                case bodies.Repaired():
                    return "void: a repair was recorded after it"
        after = after or line.entry.id == record.entry.id
    age = now - record.time_utc
    if age < -AHEAD:
        return f"void: it is dated {age_words(-age)} ahead of this clock, isolate and prove it anew"
    return f"void: it is {age_words(age)} old, isolate and prove it anew" if age > SHIFT else ""


def recent_sheet(case: Case, now: datetime) -> CaseSheet:
    """Return the sheet of a case without the readings and answers of an earlier shift, or before a repair.

    What comes before a repair is told by the order of the log: clocks are set back.
    """
    place = {line.entry.id: number for number, line in enumerate(case.lines)}
    repaired = max((place.get(repair.entry.id, -1) for repair in case.repairs), default=-1)

    def is_recent(one: Logged[Any]) -> bool:
        return place.get(one.entry.id, -1) > repaired and now - SHIFT <= one.time_utc <= now + AHEAD

    readings = tuple(one.what.reading for one in case.readings if is_recent(one))
    if len(readings) == len(case.readings) and all(map(is_recent, case.observed.values())):
        return case.sheet
    seen = {name: yes for name, yes in case.observations.items() if is_recent(case.observed[name])}
    return msgspec.structs.replace(case.sheet, readings=readings, observations=seen)


def standing_sheet(case: Case, knowledge: Knowledge, now: datetime) -> CaseSheet:
    """Return the recent sheet, without what was answered for an isolation that no longer holds."""
    recent = recent_sheet(case, now)
    holds = bool(case.isolation) and case.isolation[-1].what.isolated and not isolation_lapse(case, now)
    fallen = set() if holds else {ask for rule in before_isolated(case, knowledge) for ask in rule.asks}
    if not fallen & set(recent.observations):
        return recent
    kept = {name: yes for name, yes in recent.observations.items() if name not in fallen or not yes}
    return msgspec.structs.replace(recent, observations=kept)


def before_isolated(case: Case, knowledge: Knowledge) -> tuple[GateRule, ...]:
    """Return the lines of the gate that stand before readings on this isolated machine."""
    kinds = {"any", case.machine.kind}
    return tuple(
        rule for rule in knowledge.gates.values() if "isolated" in rule.guards and kinds & set(rule.kinds)
    )


def gate_now(
    case: Case, knowledge: Knowledge, *, suspects: Mapping[str, float], now: datetime | None = None
) -> GateState:
    """Return the gate of a case, shut again where only old entries cleared a line."""
    now = now or datetime.now(UTC)
    recent = standing_sheet(case, knowledge, now)
    whole = gate(case.sheet, knowledge, suspects=suspects)
    if recent == case.sheet or case.status == "closed":
        return whole
    cleared = {line.id: line.because for line in whole.energise.lines if line.status == "cleared"}
    again = tuple(
        msgspec.structs.replace(
            one, line=msgspec.structs.replace(one.line, because=_was(case, one, cleared[one.line.id], now))
        )
        for one in gate(recent, knowledge, suspects=suspects).shut
        if one.line.id in cleared and one.line.status == "needed"
    )
    return _shut_by(whole, again) if again else whole


def _was(case: Case, shut: ShutLine, because: str, now: datetime) -> str:
    """Return what cleared a line, and how old that is."""
    moments = [one.time_utc for one in case.readings if one.what.reading.key in shut.line.asks]
    moments += [one.time_utc for name, one in case.observed.items() if name in shut.line.asks]
    age = ""
    if moments:
        passed = now - max(moments)
        age = f"; {age_words(passed)} ago" if passed > -AHEAD else "; dated ahead of this clock"
    return f"{WAS_CLEARED}: {because or 'on record'}{age}. A new shift looks again."


def _shut_by(whole: GateState, again: tuple[ShutLine, ...]) -> GateState:
    """Return a gate with some more lines shut."""
    lines = {one.line.id: one.line for one in again}
    deciding = [one for one in again if one.states & DECISIVE]
    energise = msgspec.structs.replace(
        whole.energise,
        lines=tuple(lines.get(line.id, line) for line in whole.energise.lines),
    )
    if deciding:
        wants = [ask.partition("@")[0] for one in deciding for ask in one.wants]
        energise = msgspec.structs.replace(
            energise,
            gate="shut",
            needs=tuple(dict.fromkeys([*energise.needs, *wants])),
            says=SAYS_SHUT,
        )
    return msgspec.structs.replace(whole, energise=energise, shut=(*whole.shut, *again))


def for_this_shift(now: Diagnosis, case: Case, knowledge: Knowledge) -> Diagnosis:
    """Return an answer with the gate as it stands in this shift; what clears it is proposed first.

    Where an entry forbids energising, clearing the other lines is not proposed: it would lead nowhere.
    """
    if standing_sheet(case, knowledge, datetime.now(UTC)) == case.sheet:
        return now
    odds = {fault.id: fault.probability for fault in now.faults}
    state = gate_now(case, knowledge, suspects=odds)
    lapsed = [
        one
        for one in state.shut
        if one.line.because.startswith(WAS_CLEARED) and one.states & ENERGISED_STATES
    ]
    wants = [] if state.energise.because else [ask for one in lapsed for ask in one.wants]
    first = tuple(item_of(ask, case.sheet, knowledge, now.next, why=AGED) for ask in dict.fromkeys(wants))
    asked = {item.key for item in first}
    left = (
        item for item in now.next if item.key not in asked and not state.forbids(item.state or "isolated")
    )
    return msgspec.structs.replace(now, energise=state.energise, next=(*first, *left))
