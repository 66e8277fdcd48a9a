"""Values as typed: numbers, units, resolution, and what is refused."""

import math

import pytest
from hypothesis import assume, example, given
from hypothesis import strategies as st

from calc.errors import clip
from calc.quantities import INNER_UNIT
from calc.values import ValueTextError, dimension_facts, parse_value

DIMENSIONS = st.sampled_from(sorted(INNER_UNIT))


@pytest.mark.parametrize(
    ("text", "dimension", "number", "resolution"),
    [
        ("7.5 kW", "power", 7500.0, 100.0),
        ("7.5kW", "power", 7500.0, 100.0),
        ("10 hp", "power", 7456.998715822702, 745.6998715822702),
        ("0.42 ohm", "resistance", 0.42, 0.01),
        ("0.4 ohm", "resistance", 0.4, 0.1),
        ("0.400 ohm", "resistance", 0.4, 0.001),
        ("350 Mohm", "resistance", 350e6, 1e6),
        ("1920 mΩ", "resistance", 1.92, 0.001),
        ("82 degC", "temperature", 82.0, 1.0),
        ("-5 °C", "temperature", -5.0, 1.0),
        ("−5 °C", "temperature", -5.0, 1.0),
        ("-38 dB", "level", -38.0, 1.0),
        ("3.1 mm/s", "velocity", 3.1, 0.1),
        ("30 µF", "capacitance", 30e-6, 1e-6),
        ("88.7 %", "ratio", 0.887, 0.001),
        ("0.84", "ratio", 0.84, 0.01),
        ("71.0 %", "percent", 71.0, 0.1),
        ("1455 rpm", "speed", 1455.0, 1.0),
        ("1455 1/min", "speed", 1455.0, 1.0),
        ("1455 min⁻¹", "speed", 1455.0, 1.0),
        ("1 455 rpm", "speed", 1455.0, 1.0),
        ("1\u2009455 rpm", "speed", 1455.0, 1.0),
        ("1.2e3 ohm", "resistance", 1200.0, 100.0),
        ("6", "rate", 6.0, 1.0),
        ("4", "count", 4.0, 1.0),
    ],
)
def test_a_value_is_its_number_in_the_inner_unit_and_the_worth_of_its_last_digit(
    text, dimension, number, resolution
):
    value = parse_value(text, dimension=dimension)
    assert (value.number, value.resolution) == (
        pytest.approx(number, rel=1e-12),
        pytest.approx(resolution, rel=1e-12),
    )
    assert value.text == text


def test_one_number_is_the_same_in_every_unit():
    assert (
        parse_value("0.42 ohm", dimension="resistance").number
        == parse_value("420 mohm", dimension="resistance").number
    )


@pytest.mark.parametrize(("text", "fahrenheit"), [("212 degF", 100.0), ("32 degF", 0.0), ("-40 degF", -40.0)])
def test_fahrenheit_is_converted_at_the_fixed_points(text, fahrenheit):
    assert parse_value(text, dimension="temperature").number == pytest.approx(fahrenheit, abs=1e-12)


@pytest.mark.parametrize(
    ("text", "horsepower"),
    [("1/2 hp", 0.5), ("7½ hp", 7.5), ("7-1/2 HP", 7.5), ("1 1/2 hp", 1.5), ("1/20 hp", 0.05)],
)
def test_fractions_of_a_horsepower_are_read_as_plates_print_them(text, horsepower):
    assert parse_value(text, dimension="power").number == pytest.approx(horsepower * 745.69987, rel=1e-7)


@pytest.mark.parametrize("text", ["open", "OL", "O.L.", "ol", "0L", "Open circuit", "OL Mohm"])
def test_an_open_circuit_is_infinite(text):
    value = parse_value(text, dimension="resistance")
    assert (value.number, value.kind) == (math.inf, "open")


@pytest.mark.parametrize(
    ("text", "kind", "number"),
    [
        (">5 Gohm", "above", 5e9),
        ("≥ 5 GΩ", "above", 5e9),
        ("<1 Mohm", "below", 1e6),
        ("<= 1 Mohm", "below", 1e6),
    ],
)
def test_a_limit_of_the_meter_is_kept_as_a_limit(text, kind, number):
    value = parse_value(text, dimension="resistance")
    assert (value.kind, value.number) == (kind, number)


@pytest.mark.parametrize(
    "text", ["161-193 uF", "161–193 µF", "161 uF - 193 uF", "161 to 193 uF", "161..193 uF"]
)
def test_a_range_has_both_ends(text):
    value = parse_value(text, dimension="capacitance")
    assert (value.kind, value.number, value.high) == ("range", pytest.approx(161e-6), pytest.approx(193e-6))


@pytest.mark.parametrize(
    ("text", "dimension", "first", "second"),
    [
        ("1,455 rpm", "speed", "1455 rpm", "1.455 rpm"),
        ("12,345 ohm", "resistance", "12345 ohm", "12.345 ohm"),
    ],
)
def test_a_comma_before_three_digits_is_refused_with_both_meanings(text, dimension, first, second):
    with pytest.raises(ValueTextError) as refused:
        parse_value(text, dimension=dimension)
    assert f"can be {first} or {second}: write it without the comma" in refused.value.allowed


@pytest.mark.parametrize(
    ("text", "number"),
    [
        ("1,2 ohm", 1.2),
        ("1,25 ohm", 1.25),
        ("0,455 ohm", 0.455),
        (",455 ohm", 0.455),
        ("1,2345 ohm", 1.2345),
        ("1234,567 ohm", 1234.567),
    ],
)
def test_a_comma_that_can_only_be_a_decimal_comma_is_one(text, number):
    assert parse_value(text, dimension="resistance").number == pytest.approx(number)


@pytest.mark.parametrize(
    ("text", "number"), [("1,455.5 rpm", 1455.5), ("1.455,5 rpm", 1455.5), ("1,455,000 rpm", 1455000.0)]
)
def test_thousands_marks_beside_a_decimal_mark_are_understood(text, number):
    if number < 1e6:
        assert parse_value(text, dimension="speed").number == number
    else:
        assert parse_value(text.replace("rpm", "ohm"), dimension="resistance").number == number


@pytest.mark.parametrize(
    ("text", "dimension", "says"),
    [
        ("14.9", "current", "the unit is missing: a current such as 14.9 A (A, mA"),
        ("14.9 V", "current", "V is the unit of a voltage"),
        ("7.5 kVA", "power", "kVA is apparent power, not output"),
        ("25 Hz", "speed", "Hz is the unit of a frequency"),
        ("3 furlong", "length", "furlong is no unit that Plateside knows"),
        ("NaN A", "current", "not a number"),
        ("inf", "resistance", "an open circuit is written open"),
        ("1e400 A", "current", "beyond any plate or meter"),
        ("1e999999999999 A", "current", "beyond any plate or meter"),
        ("1e-400 A", "current", "beyond any plate or meter"),
        ("-14.9 A", "current", "zero or more"),
        ("-300 degC", "temperature", "beyond any plate or meter"),
        ("230/400 V", "voltage", "several ratings go under ratings"),
        ("1.2.3 A", "current", "one number, with one decimal point"),
        ("193-161 uF", "capacitance", "from the lower to the higher"),
        ("4.5", "count", "a whole number"),
        ("open", "voltage", "only a resistance can be open"),
        ("open", "capacitance", "such as >30 uF"),
        ("OL", "current", "such as >14.9 A"),
        ("", "current", "leave the field out"),
        ("about 5 A", "current", "a current such as 14.9 A"),
        ("9" * 61 + " A", "current", "in at most 60 characters"),
        ("30 MF", "capacitance", "MF is no unit that Plateside knows"),
        ("500 MA", "current", "MA is no unit that Plateside knows"),
    ],
)
def test_what_is_no_value_is_refused_with_what_to_write(text, dimension, says):
    with pytest.raises(ValueTextError) as refused:
        parse_value(text, dimension=dimension)
    assert says in refused.value.allowed
    assert refused.value.given == clip(text)


@given(DIMENSIONS)
def test_what_is_told_to_write_for_a_value_beyond_the_meter_is_understood_in_its_own_unit(dimension):
    assume(dimension != "resistance")
    with pytest.raises(ValueTextError) as refused:
        parse_value("open", dimension=dimension)
    told = refused.value.allowed.rpartition("such as ")[2].rstrip(")")
    assert parse_value(told, dimension=dimension).kind == "above"


@given(st.text(max_size=70), DIMENSIONS)
@example("1/0 hp", "power")
@example("²", "ratio")
@example("1e", "ratio")
@example("½", "power")
@example("٣ A", "current")
def test_any_text_is_a_value_within_its_bounds_or_refused(text, dimension):
    try:
        value = parse_value(text, dimension=dimension)
    except ValueTextError as refused:
        assert refused.allowed
        assert refused.given.isprintable()
    else:
        facts = dimension_facts(dimension)
        assert value.kind == "open" or facts.lowest <= value.number <= facts.highest
        assert value.resolution >= 0.0


NUMBERS = st.from_regex(r"[+-]?[0-9]{0,4}[.,]?[0-9]{0,4}([eE][+-]?[0-9]{1,3})?", fullmatch=True)
UNITS = st.sampled_from(
    ["", "A", "kW", "mohm", "Mohm", "%", "rpm", "degF", "V", "uF", "hp", "dB", "1/h", "mm/s"]
)


@given(NUMBERS, UNITS, DIMENSIONS)
def test_any_number_with_any_unit_is_a_value_or_refused(number, unit, dimension):
    try:
        value = parse_value(f"{number} {unit}", dimension=dimension)
    except ValueTextError as refused:
        assert refused.allowed
    else:
        assert parse_value(value.text, dimension=dimension) == value


@given(st.integers(1, 999), st.integers(0, 999), st.sampled_from(["rpm"]))
def test_no_comma_before_three_digits_is_ever_guessed(whole, rest, unit):
    with pytest.raises(ValueTextError, match="can be"):
        parse_value(f"{whole},{rest:03} {unit}", dimension="speed")
