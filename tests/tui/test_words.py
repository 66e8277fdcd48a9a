"""Readings in words: the unit once where it is the same, as typed where it is not."""

import pytest

from calc.sheet import Reading
from calc.typed import parse_typed
from tui.words import reading_text


@pytest.mark.parametrize(
    ("measure", "typed", "shown"),
    [
        ("line_current", "22,6/22.9/22.7A", "22,6 / 22.9 / 22.7 A"),
        ("line_current", "15.2 15.9 14.8", "15.2 / 15.9 / 14.8 A"),
        ("supply_voltage", "402 - 399 V", "402 / - / 399 V"),
        ("winding_resistance", "1.9 OL 1.9", "1.9 / OL / 1.9 ohm"),
        ("winding_resistance", "420m 0.42 0.43", "420 mohm / 0.42 ohm / 0.43 ohm"),
        ("insulation_resistance", ">5G", ">5 Gohm"),
        ("insulation_resistance", "OL", "OL"),
    ],
)
def test_a_reading_is_shown_as_typed_with_its_unit_once(measure, typed, shown):
    values = parse_typed(typed, measure=measure, kind="induction_3ph")
    assert reading_text(Reading(measure=measure, state="isolated", values=values)) == shown
