"""What the gate still asks for, as things to read or to look at next."""

from __future__ import annotations

from calc.quantities import MEASURES
from calc.sheet import CaseSheet
from rules.answer import NextItem
from rules.gate import GateState
from rules.knowledge import Knowledge, ReadingRule

_KIT_ALWAYS = frozenset({"eyes"})


def within_kit(rule: ReadingRule, sheet: CaseSheet, kind: str) -> bool:
    """Whether a reading makes sense on the kind and the kit that is carried can take it."""
    measure = MEASURES.get(rule.id)
    if measure is None or not measure.suits(kind) or not ("any" in rule.kinds or kind in rule.kinds):
        return False
    return sheet.kit is None or bool((set(sheet.kit) | _KIT_ALWAYS) & set(rule.instruments))


def gate_items(sheet: CaseSheet, knowledge: Knowledge, gate: GateState, state: str) -> list[NextItem]:
    """What would clear the lines that keep a state shut: for each line the first that can be had."""
    taken = {r.key for r in sheet.readings} | set(sheet.observations)
    found: dict[str, NextItem] = {}
    for line in gate.lines_for(state):
        for ask in line.asks:
            item = _gate_item(ask, line.needs, sheet, knowledge)
            if ask not in taken and item is not None and not gate.forbids(item.state or "isolated"):
                found.setdefault(ask, item)
                break
    return list(found.values())


def _gate_item(ask: str, needs: str, sheet: CaseSheet, knowledge: Knowledge) -> NextItem | None:
    why = f"needed before energising: {needs}"
    known = knowledge.observations.get(ask)
    if known is not None:
        return NextItem(
            observation=ask,
            minutes=known.minutes,
            leads=known.how or known.name,
            hazards=known.hazards,
            why=why,
        )
    measure, _, state = ask.partition("@")
    rule = knowledge.readings.get(measure)
    if rule is None or state not in rule.states or not within_kit(rule, sheet, sheet.machine.kind):
        return None
    how = rule.states[state]
    return NextItem(
        measure=measure, state=state, minutes=how.minutes, leads=how.leads, hazards=how.hazards, why=why
    )
