"""Speeds, poles, code letters and efficiency classes against published tables."""

import math
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.errors import RangeError
from calc.lookup import code_letter_kva_per_hp, code_letters
from calc.nameplate import (
    class_efficiency,
    poles_from_speed,
    synchronous_speed_rpm,
    typical_efficiency,
    typical_locked_rotor_ratio,
    typical_power_factor,
    typical_slip,
)

# IEC 60034-30-1, nominal efficiency at 50 Hz in percent for 2, 4, 6 poles (IE1 to IE3 up to 7.5 kW
# looked up in a copy of the table, the others from memory).
IEC_TABLE = {
    ("IE1", 0.75): (72.1, 72.1, 70.0),
    ("IE1", 1.5): (77.2, 77.2, 75.2),
    ("IE1", 7.5): (86.0, 86.0, 84.7),
    ("IE2", 0.75): (77.4, 79.6, 75.9),
    ("IE2", 2.2): (83.2, 84.3, 81.8),
    ("IE2", 5.5): (87.0, 87.7, 86.0),
    ("IE2", 200): (95.0, 95.1, 95.0),
    ("IE3", 0.75): (80.7, 82.5, 78.9),
    ("IE3", 1.5): (84.2, 85.3, 82.5),
    ("IE3", 4): (88.1, 88.6, 86.8),
    ("IE3", 7.5): (90.1, 90.4, 89.1),
    ("IE3", 30): (93.3, 93.6, 92.9),
    ("IE3", 200): (95.8, 96.0, 95.8),
    ("IE4", 11): (92.6, 93.3, 92.3),
    ("IE4", 110): (96.0, 96.3, 95.8),
}


@pytest.mark.parametrize(("efficiency_class", "kw"), IEC_TABLE)
def test_the_efficiency_formula_gives_the_values_of_the_iec_table(efficiency_class, kw):
    for poles, percent in zip((2, 4, 6), IEC_TABLE[efficiency_class, kw], strict=True):
        found = class_efficiency(efficiency_class=efficiency_class, power_w=1000.0 * kw, poles=poles)
        assert 100.0 * found == pytest.approx(percent, abs=0.06)


# NEMA MG 1, 10.37.2 = NEC Table 430.7(B): lowest kVA per hp of each letter (looked up on three pages)
LETTERS = {
    "B": 3.15,
    "C": 3.55,
    "D": 4.0,
    "E": 4.5,
    "F": 5.0,
    "G": 5.6,
    "H": 6.3,
    "J": 7.1,
    "K": 8.0,
    "L": 9.0,
    "M": 10.0,
    "N": 11.2,
    "P": 12.5,
    "R": 14.0,
    "S": 16.0,
    "T": 18.0,
    "U": 20.0,
    "V": 22.4,
}


def test_every_code_letter_begins_where_nema_says():
    assert {letter: code_letter_kva_per_hp(letter)[0] for letter in LETTERS} == LETTERS
    assert set(code_letters()) == {"A", *LETTERS}


def test_every_code_letter_ends_where_the_next_begins():
    spans = [code_letter_kva_per_hp(letter) for letter in code_letters()]
    assert all(one[1] == two[0] for one, two in pairwise(spans))


def test_a_letter_that_is_not_used_is_refused():
    with pytest.raises(RangeError, match="letter is I"):
        code_letter_kva_per_hp("I")


def test_a_150_hp_motor_of_letter_g_starts_with_the_published_current():
    # C. I. Hubert, "Electric Machines", example 5.13 (looked up in worked solutions): 1054 to 1186 A at 460 V
    low, high = (150.0 * edge * 1000.0 / (math.sqrt(3.0) * 460.0) for edge in code_letter_kva_per_hp("G"))
    assert (low, high) == (pytest.approx(1054.3, abs=0.1), pytest.approx(1186.1, abs=0.1))


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


@pytest.mark.parametrize(
    ("hp", "amps_460"), [(5, 7.6), (10, 14.0), (25, 34.0), (50, 65.0), (100, 124.0), (200, 240.0)]
)
def test_usual_values_together_give_about_the_currents_of_the_code_table(hp, amps_460):
    # NEC Table 430.250, 460 V (looked up). The table is a sizing value, so a motor lies at or below it;
    # below 5 hp it lies so far above the plates that it says nothing.
    power_w = 745.7 * hp
    share = typical_efficiency(power_w=power_w, poles=4, frequency_hz=60.0) * typical_power_factor(
        power_w=power_w, poles=4
    )
    assert power_w / (math.sqrt(3.0) * 460.0 * share) == pytest.approx(amps_460, rel=0.2)


def test_no_usual_value_without_a_size():
    with pytest.raises(RangeError):
        typical_power_factor(power_w=0.0, poles=4)
    with pytest.raises(RangeError):
        class_efficiency(efficiency_class="IE9", power_w=1e3, poles=4)
