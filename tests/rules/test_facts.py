"""Conditions of rules against facts of machine and reading."""

import math

import pytest

from calc.errors import RangeError
from rules.amounts import amount, is_amount
from rules.facts import facts_in, facts_of, meets, span

from .makers import case, reading


@pytest.mark.parametrize(
    ("text", "inner"),
    [
        ("5 Mohm", 5e6), ("2.8 mm/s", 2.8), ("300 mA", 0.3), ("10 hp", 7456.9987158227022), ("-5 %", -5.0),
        ("1.5", 1.5), ("90 degC", 90.0), ("50 K", 50.0), ("40 dB", 40.0), ("8.8 1/h", 8.8), ("150 mV", 0.15),
    ],
)  # fmt: skip
def test_an_amount_is_read_in_the_inner_unit(text, inner):
    assert amount(text) == pytest.approx(inner)


@pytest.mark.parametrize("text", ["", "five ohm", "5 furlong", "nan ohm", "inf V", "5..6 V", "1e400 V"])
def test_what_is_no_amount_is_refused(text):
    assert not is_amount(text)
    with pytest.raises(RangeError):
        amount(text)


@pytest.mark.parametrize(
    ("text", "ends"),
    [
        ("15..300 kW", (15e3, 300e3)), ("..15 kW", (-math.inf, 15e3)), ("300.. kW", (300e3, math.inf)),
        ("0.999.. kW", (999.0, math.inf)), ("1.01..1.51 hp", (753.157, 1126.007)), ("..4", (-math.inf, 4.0)),
    ],
)  # fmt: skip
def test_a_span_has_two_ends(text, ends):
    assert span(text) == pytest.approx(ends, rel=1e-6)


@pytest.mark.parametrize("text", ["15 kW", "..", ".. kW", "a..b kW", "1..2 furlong", ""])
def test_what_is_no_span_is_none(text):
    assert span(text) is None


@pytest.mark.parametrize(
    ("wanted", "power", "met"),
    [
        ("15..300 kW", "15 kW", False), ("15..300 kW", "15.1 kW", True), ("15..300 kW", "300 kW", True),
        ("15..300 kW", "301 kW", False), ("7.5 kW", "7.5 kW", True), ("7.5 kW | 11 kW", "11 kW", True),
        ("7.5 kW", "7.6 kW", False),
    ],
)  # fmt: skip
def test_a_span_leaves_its_lower_end_out(wanted, power, met):
    assert meets({"power": wanted}, facts_in({"power": power})) is met
    assert meets({"power": wanted}, facts_of(case("runs_hot", nameplate={"power": power}))) is met


def test_a_missing_fact_meets_only_unknown():
    bare = facts_of(case("runs_hot", plate=False))
    assert not meets({"mount": "rigid | flexible"}, bare)
    assert meets({"mount": "flexible | unknown"}, bare)
    assert not meets({"mount": "flexible | unknown"}, facts_of(case("runs_hot", mount="rigid")))


def test_flags_are_yes_and_no():
    assert meets({"brake": "yes"}, facts_of(case("runs_hot", brake=True)))
    assert meets({"brake": "no"}, facts_of(case("runs_hot", brake=False)))
    assert not meets({"brake": "no"}, facts_of(case("runs_hot")))


def test_facts_of_the_reading_count_where_there_is_one():
    read = reading("insulation_resistance", "isolated", "5 Mohm", at="cable_end")
    assert meets({"at": "cable_end", "state": "isolated"}, facts_of(case("runs_hot"), read))
    assert not meets({"at": "cable_end"}, facts_of(case("runs_hot")))


@pytest.mark.parametrize(
    ("speed", "frequency", "poles"),
    [("1455 rpm", "50 Hz", 4), ("2945 rpm", "50 Hz", 2), ("1175 rpm", "60 Hz", 6), ("3500 rpm", "60 Hz", 2)],
)
def test_poles_follow_from_speed_and_frequency_where_the_plate_is_silent(speed, frequency, poles):
    facts = facts_of(case("runs_hot", nameplate={"speed": speed, "frequency": frequency}))
    assert facts("poles") == poles
    assert meets({"poles": str(poles)}, facts)


def test_all_conditions_must_hold():
    facts = facts_in({"mount": "rigid", "power": "90 kW"})
    assert meets({"mount": "rigid", "power": "15..300 kW"}, facts)
    assert not meets({"mount": "rigid", "power": "300.. kW"}, facts)
    assert meets({}, facts)
