"""What is read next because somebody, or the gate, asks for it: what the rules say, with all hazards."""

from __future__ import annotations

from typing import TYPE_CHECKING

from rules.answer import NextItem
from rules.cautions import with_hazards

if TYPE_CHECKING:
    from collections.abc import Iterable

    from calc.sheet import CaseSheet
    from rules.knowledge import Knowledge


def item_of(
    key: str, sheet: CaseSheet, knowledge: Knowledge, proposed: Iterable[NextItem] = (), *, why: str = ""
) -> NextItem:
    """Return what a key names: the proposal where there is one, else what the rules say of it.

    What this very machine adds, such as magnets or a hanging load, stands with the hazards of the reading.
    """
    for item in proposed:
        if item.key == key:
            return item
    measure, at, state = key.partition("@")
    if not at:
        return with_hazards(NextItem(observation=key, why=why), sheet, knowledge)
    rule = knowledge.readings.get(measure)
    how = rule.states.get(state) if rule is not None else None
    if how is None:
        return with_hazards(NextItem(measure=measure, state=state, why=why), sheet, knowledge)
    item = NextItem(
        measure=measure, state=state, minutes=how.minutes, leads=how.leads, hazards=how.hazards, why=why
    )
    return with_hazards(item, sheet, knowledge)
