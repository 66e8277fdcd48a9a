"""Numbers written out, and read again."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.formatting import format_value, in_unit
from calc.quantities import INNER_UNIT
from calc.values import dimension_facts, parse_value


@pytest.mark.parametrize(
    ("number", "dimension", "text"),
    [
        (350e6, "resistance", "350 Mohm"),
        (0.42, "resistance", "0.420 ohm"),
        (999.96e3, "resistance", "1.00 Mohm"),
        (7500.0, "power", "7.50 kW"),
        (14.93, "current", "14.9 A"),
        (0.0149, "current", "14.9 mA"),
        (0.012, "voltage", "12.0 mV"),
        (4163.0, "voltage", "4163 V"),
        (1455.4, "speed", "1455 rpm"),
        (49.97, "frequency", "49.97 Hz"),
        (82.3, "temperature", "82 degC"),
        (-38.2, "level", "-38 dB"),
        (3e-5, "capacitance", "30.0 uF"),
        (0.0, "power", "0 W"),
        (math.inf, "resistance", "open"),
        (math.nan, "current", "not read"),
    ],
)
def test_a_number_is_written_in_the_handiest_unit_without_an_exponent(number, dimension, text):
    assert format_value(number, dimension=dimension) == text


def test_unit_and_digits_can_be_asked_for():
    assert format_value(7456.9987, dimension="power", unit="hp", digits=2) == "10 hp"
    assert format_value(0.887, dimension="ratio", unit="%", digits=3) == "88.7 %"


def test_a_unit_of_another_dimension_is_an_error():
    with pytest.raises(KeyError):
        format_value(1.0, dimension="power", unit="V")
    with pytest.raises(KeyError):
        in_unit(1.0, dimension="power", unit="V")


@given(st.sampled_from(sorted(INNER_UNIT)), st.floats(0.0, 1.0), st.integers(1, 9))
def test_what_is_written_reads_as_the_same_number_within_its_digits(dimension, share, digits):
    facts = dimension_facts(dimension)
    smallest = 1e-6 if dimension != "capacitance" else 1e-10
    number = smallest * (0.9 * facts.highest / smallest) ** share
    if dimension == "count":
        number = float(round(number))
    text = format_value(number, dimension=dimension, digits=digits)
    assert "e" not in text.split()[0]
    again = parse_value(text, dimension=dimension)
    assert again.number == pytest.approx(number, rel=0.51 * 10.0 ** (1 - digits), abs=1e-300)
