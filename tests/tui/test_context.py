"""What is typed with a reading: temperature, test voltage, speed, which bearing, by which method."""

from __future__ import annotations

import pytest

from calc.errors import InputError
from tui.context import context_hint, split_context

INSULATION = ("temperature", "test_voltage", "links")
WINDING = ("temperature", "method")


@pytest.mark.parametrize(
    ("typed", "values", "context"),
    [
        ("350", "350", {}),
        ("350 at 24 C 500 V", "350", {"temperature": "24 degC", "test_voltage": "500 V"}),
        ("350@24 500", "350", {"temperature": "24 degC", "test_voltage": "500 V"}),
        (">5G at 24C, 1 kV", ">5G", {"temperature": "24 degC", "test_voltage": "1 kV"}),
        ("350 Mohm, 500V", "350 Mohm", {"test_voltage": "500 V"}),
        ("OL at 75 F links off", "OL", {"temperature": "75 degF", "links": "removed"}),
    ],
)
def test_insulation_is_typed_with_its_temperature_and_test_voltage(typed, values, context):
    assert split_context(typed, INSULATION) == (values, context)


@pytest.mark.parametrize("typed", ["1.91 1.92 1.90 @ 24", "1.91 1.92 1.90 at 24 C", "1.91 1.92 1.90 24C"])
def test_a_winding_is_typed_with_its_temperature(typed):
    assert split_context(typed, WINDING) == ("1.91 1.92 1.90", {"temperature": "24 degC"})


def test_a_bearing_is_named_behind_its_value():
    assert split_context("82 nde", ("position",)) == ("82", {"position": "nde"})
    assert split_context("3.2 DE h", ("position", "direction")) == (
        "3.2",
        {"position": "de", "direction": "horizontal"},
    )


def test_a_spun_machine_is_typed_with_its_speed():
    assert split_context("410 at 1000", ("speed",)) == ("410", {"speed": "1000 rpm"})


def test_a_unit_that_belongs_to_the_values_stays_with_them():
    assert split_context("400 401 402 V", ("at",)) == ("400 401 402 V", {})
    assert split_context("82 C de", ("position",)) == ("82 C", {"position": "de"})


def test_what_goes_with_no_such_reading_is_refused_with_what_does():
    with pytest.raises(InputError) as refused:
        split_context("350 at home", INSULATION)
    assert "at 24 C, 500 V" in str(refused.value)


def test_the_hint_names_what_the_rules_ask_for_and_nothing_where_they_ask_nothing():
    assert context_hint("insulation_resistance", INSULATION[:2]) == "add: at 24 C, 500 V"
    assert context_hint("power_factor", ()) == ""
