"""Quantities that limits judge, worked by hand from their published definitions (``data/derived.yaml``)."""

import pytest

from rules.derived import QUANTITIES, derived
from tests.published.sources import entries, of_entry, published
from tests.rules.makers import PLATE, case, reading

DERIVED = entries("derived")


def read(given):
    """Make a reading of [measure, state, values …]; a last "at 20 degC" is its temperature."""
    measure, state, *texts = given
    temperature = {"temperature": texts.pop()[3:]} if texts[-1].startswith("at ") else {}
    return reading(measure, state, *texts, **temperature)


def sheet_of(entry):
    kind = entry.get("kind", "induction_3ph")
    usual = PLATE if kind == "induction_3ph" else {}
    readings = [read(given) for given in entry["readings"]]
    return case("routine_check", *readings, kind=kind, nameplate=usual | entry.get("nameplate", {}))


@pytest.mark.parametrize(
    "entry",
    [
        pytest.param(entry, marks=of_entry(entry, f"derived/{entry['quantity']}"), id=entry["says"])
        for entry in DERIVED
    ],
)
def test_a_derived_quantity_is_what_its_definition_gives(entry):
    found = derived(sheet_of(entry), entry["quantity"])
    if entry["gives"] == "nothing":
        assert found == ()
    else:
        assert found[0].value == pytest.approx(entry["gives"], abs=entry["within"], rel=1e-9)


@published(
    "this folder", "the rules' own names", says="every derived quantity has a worked value",
    known="computed", checks="rules/derived",
)  # fmt: skip
def test_every_derived_quantity_has_a_worked_value():
    assert {entry["quantity"] for entry in DERIVED} == set(QUANTITIES)
