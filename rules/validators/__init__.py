"""Checks on the rules as a whole: one small class each, with an issue type of its own."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Final

from rules.knowledge import Knowledge
from rules.validators import examples, ids, numbers
from rules.validators.base import Check, Issue, Mistaken

KEEP_FROM_LOADING: Final[tuple[Check, ...]] = (
    numbers.SourceCheck(),
    ids.KindCheck(),
    ids.StateCheck(),
    ids.MeasureCheck(),
    ids.ObservationCheck(),
    ids.ComplaintCheck(),
    ids.FaultCheck(),
    ids.HazardCheck(),
    ids.GateLineCheck(),
    ids.GateCheckCheck(),
    ids.FactCheck(),
    numbers.OddsCheck(),
    numbers.ChanceCheck(),
    numbers.SharesCheck(),
    numbers.SeverityCheck(),
    numbers.AmountCheck(),
    numbers.SpreadCheck(),
    examples.LimitExamplesCheck(),
)
"""What these find, no diagnosis can be made with."""

LEFT_TO_DO: Final[tuple[Check, ...]] = (
    ids.EffectCheck(),
    examples.FaultExamplesCheck(),
    examples.BoundaryCheck(),
    examples.WordingCheck(),
)
"""What these find, ``check-rules`` and the tests refuse."""

__all__ = ["KEEP_FROM_LOADING", "LEFT_TO_DO", "Check", "Issue", "Mistaken", "all_mistakes"]


def all_mistakes(knowledge: Knowledge, *, thorough: bool = True) -> Iterator[Mistaken]:
    """Yield everything that the checks find; without ``thorough`` only what keeps from loading."""
    for check in (*KEEP_FROM_LOADING, *(LEFT_TO_DO if thorough else ())):
        yield from check.look(knowledge)
