"""The meter errors of ``rules/readings`` as plain numbers for ``calc.observe``."""

from __future__ import annotations

from calc.observe import InstrumentError
from rules.amounts import amount
from rules.knowledge import Knowledge, ReadingRule


def instrument_errors(knowledge: Knowledge) -> dict[str, InstrumentError]:
    """Return what the usual instrument of each measure may be off by."""
    return {rule.id: _one(rule) for rule in knowledge.readings.values()}


def _one(rule: ReadingRule) -> InstrumentError:
    return InstrumentError(
        share=rule.accuracy_percent / 100.0,
        floor=amount(rule.floor) if rule.floor else 0.0,
        contrast=None if rule.contrast_percent is None else rule.contrast_percent / 100.0,
        lead_ohm=amount(rule.lead) if rule.lead else 0.0,
    )
