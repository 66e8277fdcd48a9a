"""Which hazards a case calls for, each with its precaution, once."""

from __future__ import annotations

from collections.abc import Collection

import msgspec

from calc.sheet import CaseSheet
from rules.answer import NextItem
from rules.facts import facts_of, meets
from rules.knowledge import Hazard, Knowledge


def cautions_for(
    sheet: CaseSheet,
    knowledge: Knowledge,
    *,
    states: Collection[str],
    faults: Collection[str],
    measures: Collection[str] = (),
    hazards: Collection[str] = (),
) -> tuple[str, ...]:
    """Return the precautions that apply, in the order of ``cautions.yaml``, none twice.

    Parameters
    ----------
    sheet : CaseSheet
        The machine and the complaint.
    knowledge : Knowledge
        Its ``hazards`` hold the precautions.
    states, measures : collections of str
        Those of the readings that are proposed or picked.
    faults : collection of str
        Faults that stand in front.
    hazards : collection of str
        Ids that a reading or an observation names itself.

    """
    called = set(hazards) | _named_by(knowledge, states=states, faults=faults, measures=measures)
    found = [
        hazard.precaution
        for hazard in knowledge.hazards.values()
        if hazard.id in called or _applies(hazard, sheet, states=states, faults=faults, measures=measures)
    ]
    return tuple(dict.fromkeys(found))


def with_hazards(item: NextItem, sheet: CaseSheet, knowledge: Knowledge) -> NextItem:
    """Return an item of what to read next with the hazards that this very machine adds to its own.

    Those of its kind (magnets, capacitors, a field, a series motor) and of how it stands (a hanging
    load, a brake, an explosive atmosphere). What any machine has in that state is not repeated.
    """
    states = states_of(item, knowledge)
    measures = {item.measure} if item.measure else set()
    added = (
        hazard.id
        for hazard in knowledge.hazards.values()
        if (hazard.when or "any" not in hazard.kinds)
        and _applies(hazard, sheet, states=states, faults=(), measures=measures)
    )
    return msgspec.structs.replace(item, hazards=tuple(dict.fromkeys((*item.hazards, *added))))


def states_of(item: NextItem, knowledge: Knowledge) -> frozenset[str]:
    """Return the states in which an item of what to read next may be taken."""
    if item.state is not None:
        return frozenset({item.state})
    known = knowledge.observations.get(item.observation or "")
    return frozenset(known.states if known is not None else ()) - {"any"}


def _named_by(
    knowledge: Knowledge, *, states: Collection[str], faults: Collection[str], measures: Collection[str]
) -> set[str]:
    """Return the hazards that faults and readings name themselves."""
    named: set[str] = set()
    for fault in faults:
        if (entry := knowledge.faults.get(fault)) is not None:
            named |= set(entry.cautions)
    for measure in measures:
        rule = knowledge.readings.get(measure)
        for state in states if rule is not None else ():
            if rule is not None and state in rule.states:
                named |= set(rule.states[state].hazards)
    return named


def _applies(
    hazard: Hazard,
    sheet: CaseSheet,
    *,
    states: Collection[str],
    faults: Collection[str],
    measures: Collection[str],
) -> bool:
    """Whether a hazard of this machine is called for by a state, measure, fault or the machine itself."""
    of_kind = "any" in hazard.kinds or sheet.machine.kind in hazard.kinds
    if not of_kind or (hazard.when and not meets(hazard.when, facts_of(sheet))):
        return False
    calls = (
        set(hazard.states) & set(states),
        set(hazard.measures) & set(measures),
        set(hazard.faults) & set(faults),
    )
    asks_for_more = hazard.states or hazard.measures or hazard.faults
    return any(calls) or (bool(hazard.when) and not asks_for_more)
