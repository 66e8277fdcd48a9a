"""Speeds, poles, code letters and usual values: what must always hold. Published tables: tests/published."""

import math
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.errors import RangeError
from calc.lookup import code_letter_kva_per_hp, code_letters
from calc.typical import (
    class_efficiency,
    poles_from_speed,
    synchronous_speed_rpm,
    typical_efficiency,
    typical_locked_rotor_ratio,
    typical_power_factor,
    typical_slip,
)


def test_every_code_letter_ends_where_the_next_begins():
    spans = [code_letter_kva_per_hp(letter) for letter in code_letters()]
    assert all(one[1] == two[0] for one, two in pairwise(spans))


def test_a_letter_that_is_not_used_is_refused():
    with pytest.raises(RangeError, match="letter is I"):
        code_letter_kva_per_hp("I")


def test_synchronous_speed_of_a_four_pole_machine_on_60_hz():
    # S. J. Chapman, "Electric Machinery Fundamentals", 4th ed., example 7-1: 208 V, 10 hp, 4 poles, 60 Hz
    assert synchronous_speed_rpm(frequency_hz=60.0, poles=4) == 1800.0


@pytest.mark.parametrize(("frequency_hz", "poles"), [(0.0, 4), (math.nan, 4), (50.0, 3), (50.0, 0)])
def test_no_speed_without_frequency_or_pole_pairs(frequency_hz, poles):
    with pytest.raises(RangeError, match="it must be"):
        synchronous_speed_rpm(frequency_hz=frequency_hz, poles=poles)


@pytest.mark.parametrize(
    ("speed_rpm", "frequency_hz", "poles"),
    [
        (
            3502.0,
            60.0,
            2,
        ),  # Fitzgerald, "Electric Machinery", 6th ed., example 6.1: 3502 r/min, 60 Hz, 2 poles
        (1176.0, 60.0, 6),  # the same, example 6.2: 6 poles, slip 2 %
        (1760.0, 60.0, 4),  # Chapman, example 7-3: 4 poles, slip 2.2 %
        (1500.0, 50.0, 4),
        (1455.0, 50.0, 4),
        (950.0, 50.0, 6),
        (725.0, 50.0, 8),
        (1300.0, 50.0, 4),
    ],
)
def test_poles_from_a_rated_speed(speed_rpm, frequency_hz, poles):
    assert poles_from_speed(speed_rpm=speed_rpm, frequency_hz=frequency_hz) == poles


@given(st.sampled_from([2, 4, 6, 8, 10, 12]), st.sampled_from([50.0, 60.0]), st.floats(0.002, 0.07))
def test_any_usual_slip_gives_its_poles_back(poles, frequency_hz, slip):
    speed_rpm = (1.0 - slip) * synchronous_speed_rpm(frequency_hz=frequency_hz, poles=poles)
    assert poles_from_speed(speed_rpm=speed_rpm, frequency_hz=frequency_hz) == poles


@given(st.floats(50.0, 2e6), st.sampled_from([2, 4, 6, 8, 10]), st.sampled_from([50.0, 60.0]))
def test_usual_values_stay_what_a_motor_can_have(power_w, poles, frequency_hz):
    assert 0.4 < typical_efficiency(power_w=power_w, poles=poles, frequency_hz=frequency_hz) < 0.98
    assert 0.5 < typical_power_factor(power_w=power_w, poles=poles) < 0.95
    assert 3.0 < typical_locked_rotor_ratio(power_w=power_w, poles=poles) <= 7.5
    assert 0.003 < typical_slip(power_w=power_w) < 0.1


def test_no_usual_value_without_a_size():
    with pytest.raises(RangeError):
        typical_power_factor(power_w=0.0, poles=4)
    with pytest.raises(RangeError):
        class_efficiency(efficiency_class="IE9", power_w=1e3, poles=4)
