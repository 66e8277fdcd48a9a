"""Corrections to one temperature against published numbers."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.errors import RangeError
from calc.temperature import (
    insulation_at_40_c,
    insulation_system,
    rise_by_resistance_k,
    winding_resistance_at,
)


@pytest.mark.parametrize(("conductor", "ratio"), [("copper", 1.2157), ("aluminium", 1.2245)])
def test_resistance_from_20_to_75_degrees_rises_by_the_iec_ratio(conductor, ratio):
    # IEC 60034-2-1 with k = 235 and 225 (from memory): 310/255 and 300/245
    at_75 = winding_resistance_at(resistance_ohm=1.0, measured_c=20.0, wanted_c=75.0, conductor=conductor)
    assert at_75 == pytest.approx(ratio, abs=5e-5)


def test_ten_kelvin_between_phases_are_nearly_four_percent_in_copper():
    # 10/(235 + 20) = 3.92 %: computed from the same law
    assert winding_resistance_at(resistance_ohm=1.0, measured_c=20.0, wanted_c=30.0) == pytest.approx(
        1.0392, abs=5e-5
    )


def test_a_copper_armature_follows_the_temperature_coefficient_of_a_published_data_set():
    # Open-source machine library, DC permanent-magnet motor with losses (looked up): 0.03864 ohm at
    # 20 degC is 0.0500 ohm at 95 degC with alpha_20 = 3.92e-3 /K. 1/(235 + 20) is the same coefficient.
    hot = winding_resistance_at(resistance_ohm=0.03864, measured_c=20.0, wanted_c=95.0)
    assert hot == pytest.approx(0.0500, abs=5e-5)


def test_an_open_winding_stays_open():
    assert winding_resistance_at(resistance_ohm=math.inf, measured_c=20.0, wanted_c=75.0) == math.inf


@given(st.floats(1e-3, 1e3), st.floats(-40.0, 150.0), st.floats(-40.0, 150.0))
def test_a_correction_and_its_reverse_cancel(resistance_ohm, measured_c, wanted_c):
    there = winding_resistance_at(resistance_ohm=resistance_ohm, measured_c=measured_c, wanted_c=wanted_c)
    back = winding_resistance_at(resistance_ohm=there, measured_c=wanted_c, wanted_c=measured_c)
    assert back == pytest.approx(resistance_ohm, rel=1e-12)


@given(st.floats(0.01, 100.0), st.floats(-20.0, 60.0), st.floats(0.0, 150.0), st.floats(-20.0, 60.0))
def test_the_rise_is_the_temperature_that_the_resistance_law_gives_back(cold_ohm, cold_c, rise_k, ambient_c):
    hot_ohm = winding_resistance_at(resistance_ohm=cold_ohm, measured_c=cold_c, wanted_c=ambient_c + rise_k)
    found = rise_by_resistance_k(cold_ohm=cold_ohm, hot_ohm=hot_ohm, cold_c=cold_c, ambient_c=ambient_c)
    assert found == pytest.approx(rise_k, abs=1e-8)


@pytest.mark.parametrize(
    ("megohm", "winding_c", "at_40"),
    [(200.0, 20.0, 50.0), (40.0, 45.0, 56.57)],  # article with the IEEE 43 formula (looked up); computed
)
def test_older_insulation_halves_for_every_ten_kelvin(megohm, winding_c, at_40):
    found = insulation_at_40_c(insulation_ohm=megohm * 1e6, winding_c=winding_c, system="thermoplastic")
    assert found == pytest.approx(at_40 * 1e6, rel=1e-4)


@pytest.mark.parametrize(
    ("winding_c", "factor"),
    [(20.0, 0.76), (30.0, 0.88), (40.0, 1.00), (50.0, 1.52), (60.0, 2.25), (70.0, 3.26), (80.0, 4.6)],
)
def test_thermosetting_insulation_follows_ieee_43_2013(winding_c, factor):
    # IEEE 43-2013, K_T for thermosetting systems (from memory)
    found = insulation_at_40_c(insulation_ohm=1.0, winding_c=winding_c, system="thermoset")
    assert found == pytest.approx(factor, rel=0.01)


def test_a_hot_megohm_does_not_pass_as_sixteen_where_the_system_is_unknown():
    assert insulation_at_40_c(insulation_ohm=1e6, winding_c=80.0) == pytest.approx(4.6e6, rel=0.01)
    assert insulation_at_40_c(insulation_ohm=1e6, winding_c=20.0) == pytest.approx(0.25e6)


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
        lambda: rise_by_resistance_k(cold_ohm=0.0, hot_ohm=1.0, cold_c=20.0, ambient_c=20.0),
        lambda: insulation_at_40_c(insulation_ohm=math.nan, winding_c=40.0),
        lambda: insulation_at_40_c(insulation_ohm=1.0, winding_c=40.0, system="paper"),
    ],
)
def test_impossible_quantities_are_refused(call):
    with pytest.raises(RangeError, match="it must be"):
        call()
