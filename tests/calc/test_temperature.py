"""Corrections to one temperature: what must always hold. Published values: tests/published."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.errors import RangeError
from calc.temperature import (
    insulation_at_40_c,
    insulation_system,
    winding_resistance_at,
)


def test_an_open_winding_stays_open():
    assert winding_resistance_at(resistance_ohm=math.inf, measured_c=20.0, wanted_c=75.0) == math.inf


@given(st.floats(1e-3, 1e3), st.floats(-40.0, 150.0), st.floats(-40.0, 150.0))
def test_a_correction_and_its_reverse_cancel(resistance_ohm, measured_c, wanted_c):
    there = winding_resistance_at(resistance_ohm=resistance_ohm, measured_c=measured_c, wanted_c=wanted_c)
    back = winding_resistance_at(resistance_ohm=there, measured_c=wanted_c, wanted_c=measured_c)
    assert back == pytest.approx(resistance_ohm, rel=1e-12)


@given(st.floats(0.0, 1e12), st.floats(10.0, 85.0))
def test_an_unknown_system_gets_the_lower_result(insulation_ohm, winding_c):
    unknown = insulation_at_40_c(insulation_ohm=insulation_ohm, winding_c=winding_c)
    known = [
        insulation_at_40_c(insulation_ohm=insulation_ohm, winding_c=winding_c, system=system)
        for system in ("thermoplastic", "thermoset")
    ]
    assert unknown == pytest.approx(min(known))


@pytest.mark.parametrize("winding_c", [9.9, 85.1, -10.0, math.nan])
def test_no_law_holds_outside_its_range(winding_c):
    assert insulation_at_40_c(insulation_ohm=1e6, winding_c=winding_c) is None


def test_the_class_tells_the_system_or_nothing():
    assert [insulation_system(letter) for letter in ("F", "A", None)] == ["thermoset", "thermoplastic", None]


@pytest.mark.parametrize(
    "call",
    [
        lambda: winding_resistance_at(resistance_ohm=-1.0, measured_c=20.0, wanted_c=40.0),
        lambda: winding_resistance_at(resistance_ohm=1.0, measured_c=-240.0, wanted_c=40.0),
        lambda: winding_resistance_at(resistance_ohm=1.0, measured_c=20.0, wanted_c=40.0, conductor="silver"),
        lambda: insulation_at_40_c(insulation_ohm=math.nan, winding_c=40.0),
        lambda: insulation_at_40_c(insulation_ohm=1.0, winding_c=40.0, system="paper"),
    ],
)
def test_impossible_quantities_are_refused(call):
    with pytest.raises(RangeError, match="it must be"):
        call()
