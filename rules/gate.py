"""The gate before energised states. It starts shut, and everything asks this one function.

The lines are data (``gates.yaml``), the checks that clear them look at recorded entries
only (``gate_checks.py``). Odds never clear a line; they may shut one. Two conditions hold
beneath all data: a complaint that means stop, and insulation below 1 Mohm.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Final, Literal

import msgspec

from calc.quantities import ENERGISED_STATES, RUNNING_STATES, STATES
from calc.sheet import CaseSheet
from rules.answer import Energise, GateLine
from rules.facts import facts_of, meets
from rules.findings import crossings
from rules.gate_checks import CHECKS, Checked, Evidence
from rules.gate_record import below_floor, floor_words, has_run, has_tripped, is_overload_trip, means_stop
from rules.knowledge import GateRule, Knowledge

NOT_ENERGISED: Final = frozenset(STATES) - ENERGISED_STATES
DECISIVE: Final = frozenset({"standby", "starting", "loaded"})
"""States that a machine passes through when it is put back to work: while one is shut, the gate is."""

GUARDED: Final = ENERGISED_STATES | {"isolated"}
"""What a line may guard. Nothing is shut on the isolated machine; a reading may need a line there."""

NEVER_ARRANGED: Final = frozenset({"stalled"})
"""Lines that guard nothing else are no part of the list that a person works through."""

SAYS_SHUT: Final = "The gate is shut. Site rules and licensed practice decide."
SAYS_NOTHING_FORBIDS: Final = (
    "No recorded finding forbids energising; site rules and licensed practice decide."
)

MOST_SAID: Final = 0.99
"""Odds above this are never written out: nobody knows them."""

DRIVEN: Final = frozenset({"spun"})
"""A machine that is driven from outside makes its own voltage: shut while the supply itself stays shut."""

Situation = Literal["found_running", "ran_until_overload_trip", "overload_trip", "stands"]


class ShutLine(msgspec.Struct, frozen=True):
    """A line that is not cleared, and the states that it keeps shut."""

    line: GateLine
    states: frozenset[str]
    wants: tuple[str, ...] = ()
    """What is still to be read or answered: all of these."""


class GateState(msgspec.Struct, frozen=True):
    """What the gate keeps shut, and why."""

    energise: Energise
    shut: tuple[ShutLine, ...]
    every_state: bool = False
    """Whether nothing energised at all is left: the gate itself could not be judged."""

    def forbids(self, state: str) -> bool:
        """Whether a state stays shut. A state that is not known to be without power stays shut too."""
        if state in NOT_ENERGISED - DRIVEN:
            return False
        if state in DRIVEN:
            return self.every_state or bool(self.lines_for(state))
        return self.every_state or state not in ENERGISED_STATES or any(state in s.states for s in self.shut)

    def lines_for(self, state: str) -> tuple[GateLine, ...]:
        """Return the lines that keep a state shut."""
        guarded = "standby" if state in DRIVEN else state
        return tuple(shut.line for shut in self.shut if guarded in shut.states)


def gate(sheet: CaseSheet, knowledge: Knowledge, *, suspects: Mapping[str, float] | None = None) -> GateState:
    """Judge every line of the gate on what a sheet records.

    Parameters
    ----------
    sheet : CaseSheet
        Any sheet, also a broken one: what cannot be judged stays shut, nothing is raised.
    knowledge : Knowledge
        Its ``gates`` hold the lines. Without any the gate stays shut.
    suspects : mapping of str to float, optional
        Odds of faults, of two at once as ``"one+other"``. They may shut a line, they never clear one.

    Returns
    -------
    GateState
        ``forbids(state)`` for one state, ``energise`` for the whole list.

    """
    lines = [_floor_line(sheet, knowledge)]
    try:
        crossed = tuple(crossings(sheet, knowledge))
        situation = situation_of(sheet, knowledge)
        for rule in knowledge.gates.values():
            seen = Evidence(sheet, knowledge, rule, crossed)
            lines += _through_the_start(_judged(rule, seen, situation, suspects or {}), situation)
    except Exception as error:
        lines.append(_broken(error))
    if len(lines) == 1:
        lines.append(_broken("no gate lines are known"))
    return _state(lines)


def situation_of(sheet: CaseSheet, knowledge: Knowledge) -> Situation:
    """Return how the machine was found: running, tripped by overload, or standing."""
    entry = knowledge.complaints.get(sheet.complaint)
    runs = "unknown" if entry is None else entry.runs
    if has_tripped(sheet, knowledge):
        if not is_overload_trip(sheet):
            return "stands"
        return "ran_until_overload_trip" if has_run(sheet) else "overload_trip"
    if sheet.complaint == "after_repair" or runs == "no":
        return "stands"
    return "found_running" if runs == "yes" or has_run(sheet) else "stands"


def _floor_line(sheet: CaseSheet, knowledge: Knowledge) -> ShutLine:
    """Judge the two conditions that no rule file can lift."""
    needs = "no complaint that means stop, and no insulation below 1 Mohm on record"
    checked = Checked("cleared")
    try:
        low = below_floor(sheet)
        if means_stop(sheet, knowledge):
            entry = knowledge.complaints.get(sheet.complaint)
            named = entry.name if entry is not None else sheet.complaint
            checked = Checked("forbids", f"the complaint means stop: {named}")
        elif low is not None:
            checked = Checked("forbids", floor_words(low))
        elif sheet.complaint not in knowledge.complaints:
            unknown = f"the complaint {sheet.complaint} is not among the rules: it may mean stop"
            checked = Checked("forbids", unknown)
    except Exception as error:
        checked = Checked("forbids", f"the sheet could not be judged: {type(error).__name__}")
    return _line("nothing_means_stop", needs, checked, (), ENERGISED_STATES)


def _judged(
    rule: GateRule, seen: Evidence, situation: Situation, suspects: Mapping[str, float]
) -> Iterator[ShutLine]:
    """Yield the line of a rule, split where its exceptions clear only some of the guarded states."""
    facts = facts_of(seen.sheet)
    of_kind = "any" in rule.kinds or seen.sheet.machine.kind in rule.kinds
    if not of_kind or not meets(rule.where, facts):
        return
    checked = _check(rule, seen, suspects)
    states = frozenset(rule.guards) & GUARDED
    if checked.only:
        states &= frozenset(checked.only)
    excepted = _excepted(rule, situation) & states if checked.status == "needed" else frozenset()
    if excepted == states and states:
        yield _line(rule.id, rule.name, Checked("cleared", _WHY[situation]), rule.asks, states)
    else:
        yield _line(rule.id, rule.name, checked, rule.asks, states - excepted)


def _through_the_start(lines: Iterator[ShutLine], situation: Situation) -> Iterator[ShutLine]:
    """Let what shuts a start shut running as well, where the machine stands and only a start leads there."""
    for one in lines:
        if situation in {"stands", "overload_trip"} and "starting" in one.states:
            yield msgspec.structs.replace(one, states=one.states | RUNNING_STATES)
        else:
            yield one


def _check(rule: GateRule, seen: Evidence, suspects: Mapping[str, float]) -> Checked:
    """Return the gravest answer of a rule's checks; a check that nobody knows clears nothing."""
    for fault, odds in rule.suspects.items():
        stands_at = sum(p for name, p in suspects.items() if fault in name.split("+"))
        if not stands_at < odds:
            stands = (
                f"{100 * stands_at:.0f} %" if stands_at <= MOST_SAID else f"above {100 * MOST_SAID:.0f} %"
            )
            return Checked("forbids", f"{_name(seen, fault)} stands at {stands}")
    answers = [CHECKS[name](seen) if name in CHECKS else Checked("needed") for name in rule.clears]
    for status in ("forbids", "needed"):
        for answer in answers:
            if answer.status == status:
                return answer
    if not answers and not rule.suspects:
        return Checked("needed")
    return answers[0] if answers else Checked("cleared", "no such suspect")


def _excepted(rule: GateRule, situation: Situation) -> frozenset[str]:
    """Return the states for which the way the machine was found stands in for the line."""
    if rule.found_running_clears and situation in {"found_running", "ran_until_overload_trip"}:
        return RUNNING_STATES | {"starting"} if situation == "found_running" else RUNNING_STATES
    if rule.overload_trip_clears and situation in {"overload_trip", "ran_until_overload_trip"}:
        return RUNNING_STATES | {"starting"}
    return frozenset()


_WHY: Final[dict[Situation, str]] = {
    "found_running": "the machine was found running",
    "ran_until_overload_trip": "readings of the running machine are on record",
    "overload_trip": "not asked after an overload trip; look for its cause",
    "stands": "",
}


def _name(seen: Evidence, fault: str) -> str:
    entry = seen.knowledge.faults.get(fault)
    return entry.name if entry else fault.replace("_", " ")


def _line(name: str, needs: str, checked: Checked, asks: tuple[str, ...], states: frozenset[str]) -> ShutLine:
    line = GateLine(id=name, needs=needs, status=checked.status, because=checked.because, asks=asks)
    wants = (checked.wants or asks[:1]) if checked.status == "needed" else ()
    return ShutLine(line, states, wants)


def _broken(error: object) -> ShutLine:
    said = error if isinstance(error, str) else f"the sheet could not be judged: {type(error).__name__}"
    return _line(
        "unjudged", "a sheet that can be judged", Checked("forbids", str(said)), (), ENERGISED_STATES
    )


def _state(lines: list[ShutLine]) -> GateState:
    shut = tuple(one for one in lines if one.line.status != "cleared" and one.states)
    deciding = [one for one in shut if one.states & DECISIVE]
    needs = [ask.partition("@")[0] for one in deciding for ask in one.wants]
    forbids = [one.line.because for one in deciding if one.line.status == "forbids"]
    energise = Energise(
        gate="shut" if deciding else "no_finding_forbids",
        needs=tuple(dict.fromkeys(needs)),
        because=tuple(dict.fromkeys(forbids)),  # one entry may forbid on several lines
        lines=tuple(one.line for one in lines if one.states - NEVER_ARRANGED),
        says=SAYS_SHUT if deciding else SAYS_NOTHING_FORBIDS,
    )
    return GateState(energise, shut)
