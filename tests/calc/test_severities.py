"""A severity in words, as a technician reads it."""

from __future__ import annotations

import pytest

from calc.severities import say_severity


@pytest.mark.parametrize(
    ("attribute", "amount", "words"),
    [
        ("turns", 0.02, "2 % of a phase's turns shorted"),
        ("load", 1.234, "load at 120 % of rated torque"),
        ("earth_ohm", 12345.0, "a path to earth of 12000 ohm"),
        ("supply_level", 0.05, "supply level of 0.05"),
    ],
)
def test_an_amount_is_said_with_two_digits_and_without_an_exponent(attribute, amount, words):
    assert say_severity(attribute, amount) == words
