"""What people type at the worksheet, and what is said back to them."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.quantities import KINDS, MEASURES, arity
from calc.typed import parse_typed, spell_out, value_places
from calc.values import ValueTextError, parse_value

THREE_PHASE = "induction_3ph"


@pytest.mark.parametrize(
    "text",
    [
        "15.2 15.9 14.8",
        "15.2/15.9/14.8",
        "15.2;15.9;14.8",
        "15.2, 15.9, 14.8",
        "15.2,15.9,14.8",
        "15,2 15,9 14,8",
        "15.2 15.9 14.8 A",
        "15.2A 15.9A 14.8A",
        "15.2 A 15.9 A 14.8 A",
        "15200m 15900m 14800m",
    ],
)
def test_three_currents_can_be_typed_in_many_ways(text):
    values = parse_typed(text, measure="line_current", kind=THREE_PHASE)
    assert [value.number for value in values] == [15.2, 15.9, 14.8]
    assert spell_out("line_current", values).startswith("line current: L1 15")


@pytest.mark.parametrize(
    ("text", "measure", "number"),
    [
        ("0.42", "main_resistance", 0.42),
        ("420m", "main_resistance", 0.42),
        ("1,2k", "thermistor_resistance", 1200.0),
        ("350", "insulation_resistance", 350e6),
        ("350M", "insulation_resistance", 350e6),
        ("5G", "insulation_resistance", 5e9),
        ("800k", "insulation_resistance", 8e5),
        ("30", "run_capacitance", 30e-6),
        ("30u", "run_capacitance", 30e-6),
        ("7.5", "input_power", 7500.0),
        ("7.5k", "input_power", 7500.0),
        ("1455", "speed", 1455.0),
        ("82", "bearing_temperature", 82.0),
        ("180F", "bearing_temperature", pytest.approx(82.2222, abs=1e-4)),
        ("-38", "sideband_level", -38.0),
        ("0.84", "power_factor", 0.84),
        ("2 min", "starting_time", 120.0),
    ],
)
def test_a_bare_number_has_the_usual_unit_and_a_multiplier_the_base_unit(text, measure, number):
    (value,) = parse_typed(text, measure=measure, kind="induction_1ph")
    assert value.number == number


def test_another_usual_unit_can_be_given():
    (value,) = parse_typed("180", measure="bearing_temperature", kind=THREE_PHASE, usual_unit="degF")
    assert value.number == pytest.approx(82.2222, abs=1e-4)


def test_a_dash_is_a_value_that_was_not_read():
    values = parse_typed("15.2 - 14.8", measure="line_current", kind=THREE_PHASE)
    assert math.isnan(values[1].number)
    assert spell_out("line_current", values) == "line current: L1 15.2 A, L2 not read, L3 14.8 A"


def test_open_and_beyond_the_meter_are_said_in_words():
    values = parse_typed("OL 3.4 OL", measure="winding_resistance", kind=THREE_PHASE)
    said = spell_out("winding_resistance", values)
    assert said == "winding resistance between terminals: U-V open circuit, V-W 3.4 ohm, W-U open circuit"
    (value,) = parse_typed(">5G", measure="insulation_resistance", kind=THREE_PHASE)
    assert spell_out("insulation_resistance", (value,)) == "insulation to frame, 60 s: more than 5 gigaohm"


def test_the_echo_tells_mega_from_milli():
    mega = parse_typed("2.2M", measure="thermistor_resistance", kind=THREE_PHASE)
    milli = parse_typed("2.2m", measure="thermistor_resistance", kind=THREE_PHASE)
    assert "2.2 megohm" in spell_out("thermistor_resistance", mega)
    assert "2.2 milliohm" in spell_out("thermistor_resistance", milli)


@pytest.mark.parametrize(
    ("text", "measure", "says"),
    [
        (
            "15.2 15.9",
            "line_current",
            "three values with spaces between (L1, L2, L3; - for one not read); 2 given",
        ),
        ("401,398,402", "supply_voltage", "three values with spaces between"),
        ("", "speed", "one value; 0 given"),
        ("-", "speed", "at least one value"),
        ("- - -", "line_current", "at least one value"),
        ("1,455", "speed", "can be 1455 rpm or 1.455 rpm"),
        ("350m", "insulation_resistance", "m is a thousandth; insulation is read in M (Mohm), G or k"),
        ("5m", "starting_time", "m is the unit of a length"),
        ("15 16 V 17", "line_current", "V is the unit of a voltage"),
        ("15 xx 17", "line_current", "a current such as"),
        ("161-193", "run_capacitance", "not a range"),
        ("14.9 V", "overload_setting", "V is the unit of a voltage"),
        ("nan", "speed", "not a number"),
        ("\x1b[31m", "speed", "a speed such as 1455 rpm"),
    ],
)
def test_what_is_typed_wrong_is_refused_with_what_to_type(text, measure, says):
    kind = "induction_1ph" if measure == "run_capacitance" else THREE_PHASE
    with pytest.raises(ValueTextError) as refused:
        parse_typed(text, measure=measure, kind=kind)
    assert says in refused.value.allowed


@pytest.mark.parametrize("kind", ["induction_3ph", "induction_1ph", "dc_shunt"])
@pytest.mark.parametrize("measure", MEASURES)
def test_every_place_of_a_measure_has_a_name(measure, kind):
    places = value_places(measure, kind)
    assert len(places) == arity(measure, kind)
    assert len(set(places)) == len(places)


@given(st.text(max_size=40), st.sampled_from(sorted(MEASURES)), st.sampled_from(sorted(KINDS)))
def test_any_text_is_understood_or_refused(text, measure, kind):
    try:
        values = parse_typed(text, measure=measure, kind=kind)
    except ValueTextError as refused:
        assert refused.allowed
    else:
        assert len(values) == arity(measure, kind)
        assert spell_out(measure, values).startswith(MEASURES[measure].label)


TYPED = st.from_regex(r"[<>]?[0-9]{1,3}([.,][0-9]{1,2})?[umkMGV]?( [0-9]{1,3}m?){0,2}", fullmatch=True)


@given(TYPED, st.sampled_from(sorted(MEASURES)))
def test_what_was_understood_can_stand_in_a_sheet_and_means_the_same(text, measure):
    try:
        values = parse_typed(text, measure=measure, kind=THREE_PHASE)
    except ValueTextError:
        return
    for value in values:
        if value.is_read:
            assert parse_value(value.text, dimension=MEASURES[measure].dimension) == value
