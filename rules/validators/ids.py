"""Checks that every id which an entry names is known."""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache

from calc.quantities import KINDS, MEASURES, STATES
from calc.sheet import Machine
from rules.derived import QUANTITIES
from rules.facts import NAMES as FACTS
from rules.gate_checks import CHECKS
from rules.knowledge import Knowledge
from rules.validators.base import Issue, Mistaken, Use, named, unknown, uses


class UnknownKind(Issue):
    """A machine kind that the case sheet does not have."""


class KindCheck:
    """Machine kinds are those of the case sheet, or ``any`` where a list may say so."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown machine kinds."""
        lists = uses(
            knowledge,
            "observations.kinds", "complaints.kinds", "readings.kinds", "limits.kinds", "hazards.kinds",
            "gates.kinds", "faults.effects",
        )  # fmt: skip
        yield from unknown(UnknownKind, lists, {*KINDS, "any"})
        plain = uses(knowledge, "faults.odds", "faults.complaints_by_kind", "faults.observations_by_kind")
        yield from unknown(UnknownKind, plain, KINDS)
        yield from unknown(UnknownKind, _within(knowledge, "shares"), KINDS)


class UnknownState(Issue):
    """A state of the machine that the case sheet does not have."""


class StateCheck:
    """States are those of the case sheet, or ``any`` where a list may say so."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown states."""
        lists = uses(knowledge, "observations.states", "limits.states", "limits.shuts")
        yield from unknown(UnknownState, lists, {*STATES, "any"})
        plain = uses(knowledge, "readings.states", "gates.guards", "hazards.states")
        yield from unknown(UnknownState, plain, STATES)


class UnknownMeasure(Issue):
    """A measure that the case sheet does not have, or a quantity that nobody derives."""


class MeasureCheck:
    """Measures, ``measure@state`` and the quantities of limits are known."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown measures, states after ``@``, and quantities."""
        for rule in knowledge.readings.values():
            yield from unknown(UnknownMeasure, [Use("readings", rule.id, ("id",), rule.id)], MEASURES)
        for limit in knowledge.limits.values():
            use = Use("limits", limit.id, ("quantity",), limit.quantity)
            yield from unknown(UnknownMeasure, [use], {*MEASURES, *QUANTITIES})
        for use in _readings_named(knowledge):
            measure, at, state = use.name.partition("@")
            yield from unknown(UnknownMeasure, [Use(use.section, use.entry, use.path, measure)], MEASURES)
            if at:
                yield from unknown(UnknownState, [Use(use.section, use.entry, use.path, state)], STATES)


def _readings_named(knowledge: Knowledge) -> Iterator[Use]:
    yield from uses(knowledge, "faults.readings", "faults.retest", "hazards.measures")
    yield from _within(knowledge, "readings")
    yield from (use for use in uses(knowledge, "gates.asks") if "@" in use.name)


def _within(knowledge: Knowledge, field: str) -> Iterator[Use]:
    for fault in knowledge.faults.values():
        for index, part in enumerate(fault.within):
            yield from named("faults", fault.id, ("within", index, field), getattr(part, field))


def _by_kind(knowledge: Knowledge, field: str) -> Iterator[Use]:
    for fault in knowledge.faults.values():
        for kind, names in getattr(fault, field).items():
            yield from named("faults", fault.id, (field, kind), names)


class UnknownObservation(Issue):
    """An observation that has no entry."""


class ObservationCheck:
    """Observations that faults and gate lines name have an entry."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown observations."""
        yield from unknown(UnknownObservation, uses(knowledge, "faults.observations"), knowledge.observations)
        yield from unknown(UnknownObservation, _within(knowledge, "observations"), knowledge.observations)
        by_kind = _by_kind(knowledge, "observations_by_kind")
        yield from unknown(UnknownObservation, by_kind, knowledge.observations)
        asked = (use for use in uses(knowledge, "gates.asks") if "@" not in use.name)
        yield from unknown(UnknownObservation, asked, knowledge.observations)


class UnknownComplaint(Issue):
    """A complaint that has no entry."""


class ComplaintCheck:
    """Complaints that faults name have an entry."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown complaints."""
        yield from unknown(UnknownComplaint, uses(knowledge, "faults.complaints"), knowledge.complaints)
        yield from unknown(UnknownComplaint, _within(knowledge, "complaints"), knowledge.complaints)
        by_kind = _by_kind(knowledge, "complaints_by_kind")
        yield from unknown(UnknownComplaint, by_kind, knowledge.complaints)


class UnknownFault(Issue):
    """A fault that has no entry."""


class FaultCheck:
    """Faults that cautions and gate lines name have an entry."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown faults."""
        yield from unknown(
            UnknownFault, uses(knowledge, "hazards.faults", "gates.suspects"), knowledge.faults
        )


class UnknownHazard(Issue):
    """A hazard that has no caution."""


class HazardCheck:
    """Every hazard that an entry names has its caution."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield hazards without an entry."""
        yield from unknown(
            UnknownHazard, uses(knowledge, "faults.cautions", "observations.hazards"), knowledge.hazards
        )
        for rule in knowledge.readings.values():
            for state, how in rule.states.items():
                found = named("readings", rule.id, ("states", state, "hazards"), how.hazards)
                yield from unknown(UnknownHazard, found, knowledge.hazards)


class UnknownGateLine(Issue):
    """A gate line that has no entry."""


class GateLineCheck:
    """What must be shown before energising, or before a reading, is a line of the gate."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown gate lines."""
        named_lines = uses(knowledge, "faults.before_energising", "readings.needs")
        yield from unknown(UnknownGateLine, named_lines, knowledge.gates)


class UnknownGateCheck(Issue):
    """A check of the gate that the program does not have."""


class GateCheckCheck:
    """The checks that gate lines call for exist."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown checks."""
        yield from unknown(UnknownGateCheck, uses(knowledge, "gates.clears"), CHECKS)


class UnknownFact(Issue):
    """A fact of machine or reading that conditions cannot ask for."""


class FactCheck:
    """Conditions ask for facts that the case sheet has."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown facts in ``where`` and ``when``."""
        yield from unknown(UnknownFact, uses(knowledge, "limits.where", "gates.where", "hazards.when"), FACTS)


class UnknownEffect(Issue):
    """An effect that the machine model does not have."""


class EffectCheck:
    """Effects are those that the models of the fault's kinds offer; a kind without a model is not checked."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield unknown effects, each once."""
        seen: set[Use] = set()
        for fault in knowledge.faults.values():
            for kind in fault.odds:
                offered = effects_of(kind)
                key = kind if kind in fault.effects else "any"
                for index, effect in enumerate(fault.effects.get(key, ())):
                    use = Use("faults", fault.id, ("effects", key, index, "name"), effect.name)
                    if offered is not None and use not in seen:
                        found = list(unknown(UnknownEffect, [use], offered))
                        seen |= {use} if found else set()
                        yield from found


@cache
def effects_of(kind: str) -> frozenset[str] | None:
    """Return the effects that the model of a machine kind offers, or None where there is no model."""
    from calc.kinds import twin_of  # noqa: PLC0415  the models bring numpy, which loading rules does without

    twin = twin_of(Machine(kind=kind))
    return None if twin is None else frozenset(twin.effects)
