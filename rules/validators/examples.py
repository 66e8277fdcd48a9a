"""Checks that faults and limits carry examples, that limits heed theirs, and that words are chosen."""

from __future__ import annotations

from collections.abc import Iterator

from rules.amounts import amount, is_amount
from rules.facts import facts_in, meets
from rules.knowledge import Knowledge, Limit, LimitExample
from rules.limit_bands import band_of
from rules.validators.base import Issue, Mistaken, every_entry
from rules.wording import texts_in, unwanted


class FewExamples(Issue):
    """A fault without evidence that must lead to it and evidence that must not."""


class FaultExamplesCheck:
    """Every fault has an example that leads to it, and one that does not."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield faults with too few examples."""
        for fault in knowledge.faults.values():
            given = {example.leads for example in fault.examples}
            for leads, word in ((True, "leads: yes"), (False, "leads: no")):
                if leads not in given:
                    yield Mistaken(
                        FewExamples, "faults", fault.id, ("examples",), "too few", f"one more with {word}"
                    )


class WrongVerdict(Issue):
    """An example of a limit that does not get its stated verdict."""


class LimitExamplesCheck:
    """Every example of a limit gets the verdict that it states."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield examples with another verdict."""
        for limit in knowledge.limits.values():
            for index, example in enumerate(limit.examples):
                if is_amount(example.value) and (got := verdict_of(limit, example)) != example.verdict:
                    path = ("examples", index, "verdict")
                    yield Mistaken(
                        WrongVerdict, "limits", limit.id, path, example.verdict, f"the bands say {got}"
                    )


def verdict_of(limit: Limit, example: LimitExample) -> str:
    """Return the verdict of a limit on one of its examples."""
    if example.where and not meets(limit.where, facts_in({**limit.where, **example.where})):
        return "normal"
    return band_of(limit, amount(example.value)).verdict


class BareBoundary(Issue):
    """A boundary of a limit without an example on both its sides."""


class BoundaryCheck:
    """Every boundary of a limit has an example on it or just before it, and one beyond."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield boundaries with a bare side."""
        for limit in knowledge.limits.values():
            ends = sorted({amount(text) for text in _ends(limit) if is_amount(text)})
            values = [amount(e.value) for e in limit.examples if is_amount(e.value) and not e.where]
            for index, band in enumerate(limit.bands):
                for field in ("below", "above"):
                    text = getattr(band, field)
                    if text is None or not is_amount(text):
                        continue
                    for side in _bare_sides(amount(text), ends, values, under=field == "below"):
                        yield Mistaken(
                            BareBoundary,
                            "limits",
                            limit.id,
                            ("bands", index, field),
                            text,
                            f"an example {side}",
                        )


def _ends(limit: Limit) -> Iterator[str]:
    for band in limit.bands:
        yield from (text for text in (band.below, band.above) if text is not None)


def _bare_sides(end: float, ends: list[float], values: list[float], *, under: bool) -> Iterator[str]:
    """Yield the sides of a boundary that no example between it and the next boundary stands on."""
    lower = max((other for other in ends if other < end), default=float("-inf"))
    upper = min((other for other in ends if other > end), default=float("inf"))
    below = any(lower <= v < end or (v == end and not under) for v in values)
    above = any(end < v <= upper or (v == end and under) for v in values)
    if not below:
        yield "below it" if under else "up to it"
    if not above:
        yield "from it up" if under else "above it"


class UnwantedWords(Issue):
    """A text that says what Plateside never says."""


class WordingCheck:
    """No text gives a permission or tells a dangerous thing to do."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield texts with unwanted words."""
        for section, entry in every_entry(knowledge):
            for path, text in texts_in(entry):
                for words in unwanted(text):
                    yield Mistaken(UnwantedWords, section, entry.id, path, words, "other words")
