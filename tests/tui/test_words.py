"""Readings, numbers and what comes first in words: a unit once where it is the same, else as typed."""

import math

import pytest

from calc.sheet import Reading
from calc.typed import parse_typed
from rules.loading import load_knowledge
from tests.rules.makers import shop
from tui.screens.worksheet_lines import band_number
from tui.words import reading_text, stop_words


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


@pytest.mark.parametrize(
    ("value", "shown"), [(999.6, "1000"), (999.4, "999"), (15.04, "15.0"), (0.4, "0.400"), (math.inf, "open")]
)
def test_a_number_of_a_band_has_three_digits_and_no_exponent(value, shown):
    assert band_number(value) == shown


def test_a_shops_own_complaint_that_means_stop_says_what_to_do_first_even_where_the_shop_does_not(tmp_path):
    own = "complaints:\n- {id: glows, name: glows, source: this shop, runs: 'yes', stop: true}\n"
    known = load_knowledge(extra_folders=[shop(tmp_path / "rules", own)])
    assert stop_words("glows", known).startswith("Isolate it")
    assert stop_words("shock_from_frame", known) == known.complaints["shock_from_frame"].first
    assert stop_words("runs_hot", known) == ""
