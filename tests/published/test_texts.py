"""Published numbers in the sentences of rules/: they stand there as printed, and no other does."""

import re

import pytest

from rules.gate_record import INSULATION_FLOOR_OHM
from rules.wording import texts_in
from tests.published.sources import entries, of_entry, published
from tests.rules.makers import shipped

TEXTS = entries("texts")
SECTIONS = ("readings", "gates", "hazards", "observations", "complaints", "faults")
SENTENCES = {"name", "leads", "how", "precaution", "first", "source", "confirm", "remedy"}
UNITS = (
    "mV|V|A|mA|kohm|ohm|Mohm|Gohm|Hz|%|K|degC|°C|mm/s|mm|kPa|bar|psi|kV|kW|rpm|r/min|dB|s|min|minutes|h|times"
)
NUMBER = re.compile(
    rf"\d+(?:[.,]\d+)?(?: to \d+(?:\.\d+)?|-\d+)? ?(?:{UNITS})(?!\w)"
    r"|\b(?:two|three|four|five|ten) (?:times|minutes|seconds)"
)


def sentences(entry):
    """The texts of an entry that people read, its examples left out."""
    for path, text in texts_in(entry):
        if "examples" not in path and SENTENCES & {str(step) for step in path}:
            yield text


def entry_of(name):
    section, _, key = name.partition("/")
    return getattr(shipped(), section)[key]


@pytest.mark.parametrize("check", [pytest.param(c, marks=of_entry(c, c["of"]), id=c["of"]) for c in TEXTS])
def test_a_sentence_of_the_rules_holds_the_published_numbers(check):
    said = " | ".join(sentences(entry_of(check["of"])))
    for number in check["numbers"]:
        assert re.search(rf"(?<![\d.]){re.escape(number)}", said), number


@published(
    "this folder", "the rules' own sentences", known="computed", checks="rules",
    says="every number with a unit in a sentence is in the list",
)  # fmt: skip
def test_every_number_in_a_sentence_of_the_rules_is_listed():
    for section in SECTIONS:
        for key, entry in getattr(shipped(), section).items():
            listed = " | ".join(n for c in TEXTS if c["of"] == f"{section}/{key}" for n in c["numbers"])
            for text in sentences(entry):
                for number in NUMBER.findall(text):
                    assert number in listed, (section, key, number)


@published(
    "trade usage", "older minimum of 1 Mohm", known="common practice",
    says="no rule file can lower it", checks="rules.gate_record.INSULATION_FLOOR_OHM",
)  # fmt: skip
def test_the_floor_of_insulation_stands_at_one_megohm():
    assert INSULATION_FLOOR_OHM == 1.0e6
