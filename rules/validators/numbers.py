"""Checks that odds, chances, shares, severities and amounts can be what they say."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping

from rules.amounts import is_amount
from rules.decoding import Steps
from rules.facts import PLATE, span
from rules.knowledge import Fault, Knowledge, Spread
from rules.validators.base import Issue, Mistaken, every_entry

_TOLERANCE = 1e-9


class MissingSource(Issue):
    """An entry does not say what it is or where it comes from."""


class SourceCheck:
    """Every entry has a name and a source, if only ``from memory`` or ``common practice``."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield entries with a blank source or name."""
        for section, entry in every_entry(knowledge):
            for field in ("source", "name"):
                if not getattr(entry, field).strip():
                    yield Mistaken(
                        MissingSource, section, entry.id, (field,), "blank", "it must say something"
                    )


class BadOdds(Issue):
    """Odds that are no odds."""


class OddsCheck:
    """Odds are finite and above zero, for at least one machine kind."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield odds that are no odds."""
        for fault in knowledge.faults.values():
            if not fault.odds:
                yield Mistaken(BadOdds, "faults", fault.id, ("odds",), "none", "odds for a machine kind")
            for kind, odds in fault.odds.items():
                if not 0.0 < odds < math.inf:
                    yield Mistaken(BadOdds, "faults", fault.id, ("odds", kind), f"{odds:g}", "above zero")


class BadChance(Issue):
    """A chance outside 0 to 1, or chances that add up to more than 1."""


class ChanceCheck:
    """Chances lie between 0 and 1; those of the complaints of one fault add up to 1 at most."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield chances that are none."""
        for observation in knowledge.observations.values():
            for field in ("base_rate", "reliability"):
                chances = {field: getattr(observation, field)}
                yield from _chances("observations", observation.id, (), chances)
        for rule in knowledge.gates.values():
            yield from _chances("gates", rule.id, ("suspects",), rule.suspects)
        for fault in knowledge.faults.values():
            for path, chances in _chances_of(fault):
                yield from _chances("faults", fault.id, path, chances)
                if (
                    path[0] in {"complaints", "complaints_by_kind"}
                    and sum(chances.values()) > 1.0 + _TOLERANCE
                ):
                    given = f"together {sum(chances.values()):g}"
                    yield Mistaken(BadChance, "faults", fault.id, path, given, "1 at most")


def _chances_of(fault: Fault) -> Iterator[tuple[Steps, dict[str, float]]]:
    yield ("complaints",), fault.complaints
    yield ("observations",), fault.observations
    for kind, chances in fault.complaints_by_kind.items():
        yield ("complaints_by_kind", kind), chances
    for kind, chances in fault.observations_by_kind.items():
        yield ("observations_by_kind", kind), chances
    for index, part in enumerate(fault.within):
        yield ("within", index, "complaints"), part.complaints
        yield ("within", index, "observations"), part.observations


def _chances(section: str, entry: str, path: Steps, chances: Mapping[str, float]) -> Iterator[Mistaken]:
    for name, chance in chances.items():
        if not 0.0 <= chance <= 1.0:
            yield Mistaken(BadChance, section, entry, (*path, name), f"{chance:g}", "between 0 and 1")


class BadShares(Issue):
    """Shares of refinements that are none, or add up to more than the fault."""


class SharesCheck:
    """Shares of the causes within a fault lie between 0 and 1, and add up to 1 at most."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield shares that cannot be."""
        for fault in knowledge.faults.values():
            for index, part in enumerate(fault.within):
                yield from _chances("faults", fault.id, ("within", index), {"share": part.share})
                yield from _chances("faults", fault.id, ("within", index, "shares"), part.shares)
            total = sum(part.share for part in fault.within)
            if total > 1.0 + _TOLERANCE:
                yield Mistaken(BadShares, "faults", fault.id, ("within",), f"together {total:g}", "1 at most")


class BadSeverity(Issue):
    """A range of severity that is none."""


class SeverityCheck:
    """A severity range runs from a value above zero to a higher one, and weights are above zero."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield severities and weights that cannot be."""
        for fault in knowledge.faults.values():
            for kind, effects in fault.effects.items():
                for index, effect in enumerate(effects):
                    path: Steps = ("effects", kind, index)
                    if effect.severity is not None and not 0.0 < effect.severity[0] <= effect.severity[1]:
                        given = f"{effect.severity[0]:g} to {effect.severity[1]:g}"
                        allowed = "a value above zero and a higher one"
                        yield Mistaken(BadSeverity, "faults", fault.id, (*path, "severity"), given, allowed)
                    if not 0.0 < effect.weight < math.inf:
                        given = f"{effect.weight:g}"
                        yield Mistaken(
                            BadSeverity, "faults", fault.id, (*path, "weight"), given, "above zero"
                        )


class BadAmount(Issue):
    """A text that is no number with a known unit."""


class AmountCheck:
    """Amounts are numbers with a unit that case sheets know."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield texts that are no amounts."""
        for section, entry, path, text in _amounts(knowledge):
            if not is_amount(text):
                yield Mistaken(BadAmount, section, entry, path, text, "a number and a unit, such as 5 Mohm")
        for section, entry, path, text in _spans(knowledge):
            words = [word.strip() for word in text.split("|")]
            if not all(word == "unknown" or is_amount(word) or span(word) for word in words):
                yield Mistaken(
                    BadAmount, section, entry, path, text, "an amount or a span such as 15..300 kW"
                )


Amount = tuple[str, str, Steps, str]


def _amounts(knowledge: Knowledge) -> Iterator[Amount]:
    for limit in knowledge.limits.values():
        for index, band in enumerate(limit.bands):
            for field in ("below", "above"):
                if (text := getattr(band, field)) is not None:
                    yield "limits", limit.id, ("bands", index, field), text
        for index, example in enumerate(limit.examples):
            yield "limits", limit.id, ("examples", index, "value"), example.value
    for fault in knowledge.faults.values():
        for path, spread in _spreads(fault):
            yield "faults", fault.id, (*path, "median"), spread.median
            if spread.sigma is not None:
                yield "faults", fault.id, (*path, "sigma"), spread.sigma
    for rule in knowledge.readings.values():
        for field in ("floor", "lead"):
            if text := getattr(rule, field):
                yield "readings", rule.id, (field,), text
        for index, text in enumerate(rule.plausible or ()):
            yield "readings", rule.id, ("plausible", index), text


def _spans(knowledge: Knowledge) -> Iterator[Amount]:
    for section, field in (("limits", "where"), ("gates", "where"), ("hazards", "when")):
        for entry in getattr(knowledge, section).values():
            for name, text in getattr(entry, field).items():
                if name in PLATE:
                    yield section, entry.id, (field, name), text


class BadSpread(Issue):
    """A spread that is none."""


class SpreadCheck:
    """A spread gives a factor above 1 or a sigma, not both and not neither."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield spreads that cannot be."""
        for fault in knowledge.faults.values():
            for path, spread in _spreads(fault):
                if (wrong := _wrong_spread(spread)) is not None:
                    yield Mistaken(BadSpread, "faults", fault.id, path, *wrong)


def _spreads(fault: Fault) -> Iterator[tuple[Steps, Spread]]:
    for name, spread in fault.readings.items():
        yield ("readings", name), spread
    for index, part in enumerate(fault.within):
        for name, spread in part.readings.items():
            yield ("within", index, "readings", name), spread


def _wrong_spread(spread: Spread) -> tuple[str, str] | None:
    if (spread.factor is None) == (spread.sigma is None):
        return "both or neither of factor and sigma", "one of them"
    if spread.factor is not None and not 1.0 < spread.factor < math.inf:
        return f"factor {spread.factor:g}", "above 1"
    return None
