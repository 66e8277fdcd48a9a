"""Nameplates that contradict themselves: which fields, and which one is the likely slip."""

import math
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc.errors import InputError
from calc.nameplate import check_plate
from calc.plate_checks import findings, plate_of
from calc.sheet_io import read_sheet, sheet_from_plain

SHEETS = sorted((Path(__file__).parents[1] / "sheets").glob("*.yaml"))

# A plate of the trade: 1.732 x 400 V x 14.9 A x 0.84 x 0.887 = 7.69 kW
FOUR_POLE = {
    "power": "7.5 kW",
    "voltage": "400 V",
    "current": "14.9 A",
    "frequency": "50 Hz",
    "speed": "1455 rpm",
    "power_factor": "0.84",
    "efficiency": "88.7 %",
}
NEMA = FOUR_POLE | {"power": "10 hp", "voltage": "460 V", "current": "12.9 A", "frequency": "60 Hz"}
NEMA |= {"speed": "1755 rpm", "power_factor": "0.82", "efficiency": "89.5 %"}
SHUNT = {
    "power": "7.5 kW",
    "voltage": "240 V",
    "current": "37 A",
    "speed": "1750 rpm",
    "field_current": "0.92 A",
}
SINGLE = {
    "power": "1.5 kW",
    "voltage": "230 V",
    "current": "9.6 A",
    "frequency": "50 Hz",
    "speed": "1420 rpm",
    "power_factor": "0.92",
    "efficiency": "74 %",
    "run_capacitor": "40 uF",
}


def machine(plate, kind="induction_3ph", supply=None, **changes):
    fields = {name: text for name, text in {**plate, **changes}.items() if text is not None}
    described = {"kind": kind, "nameplate": fields, "supply": supply or {}}
    return sheet_from_plain({"format": 1, "machine": described, "complaint": "routine_check"}).machine


def remarks(*args, **kwargs):
    return check_plate(machine(*args, **kwargs))


def only(*args, **kwargs):
    (remark,) = remarks(*args, **kwargs)
    return remark


@pytest.mark.parametrize("path", SHEETS, ids=lambda path: path.stem)
def test_the_plates_of_the_example_sheets_agree_with_themselves(path):
    assert check_plate(read_sheet(path).machine) == []


# Input, current and output of published worked examples make plates that agree.
PUBLISHED = [
    # Fitzgerald, "Electric Machinery", 6th ed., example 6.2, recomputed:
    # 220 V, 6 poles, 60 Hz, 18.78 A, 5221.6 W, 86.3 %
    {
        "power": "5.22 kW",
        "voltage": "220 V",
        "current": "18.78 A",
        "frequency": "60 Hz",
        "speed": "1176 rpm",
        "power_factor": "0.8456",
        "efficiency": "86.3 %",
    },
    # Chapman, "Electric Machinery Fundamentals", 4th ed., example 7-3,
    # recomputed: 460 V, 18.89 A, 1760 r/min, 14.05 hp
    {
        "power": "14.05 hp",
        "voltage": "460 V",
        "current": "18.89 A",
        "frequency": "60 Hz",
        "speed": "1760 rpm",
        "power_factor": "0.832",
        "efficiency": "83.7 %",
    },
]


@pytest.mark.parametrize("plate", PUBLISHED)
def test_the_rated_points_of_published_examples_agree(plate):
    assert remarks(plate) == []


def test_the_distance_of_a_published_example_is_what_its_numbers_say():
    # 18.89 A against 14.05 hp / (1.732 x 460 V x 0.832 x 0.837) = 18.88 A: next to nothing
    (balance, *_) = findings(plate_of(machine(PUBLISHED[1])))
    assert balance.distance < 0.05


@pytest.mark.parametrize(
    ("plate", "changes", "field", "instead"),
    [
        (FOUR_POLE, {"current": "41.9 A"}, "current", "14.9 A"),
        (FOUR_POLE, {"power": "10 kW"}, "power", "10 hp"),
        (FOUR_POLE, {"power": "7.5 hp"}, "power", "7.5 kW"),
        (NEMA, {"power": "10 kW"}, "power", "10 hp"),
        (FOUR_POLE, {"power_factor": "0.48"}, "power_factor", "0.84"),
        (FOUR_POLE, {"speed": "1755 rpm"}, "frequency", "60 Hz"),
        (NEMA, {"speed": "1455 rpm"}, "frequency", "50 Hz"),
        (FOUR_POLE, {"frequency": "60 Hz"}, "frequency", "50 Hz"),
        (FOUR_POLE, {"speed": "1545 rpm"}, "speed", "1455 rpm"),
        (FOUR_POLE, {"speed": "145 rpm"}, "speed", "1450 rpm"),
    ],
)
def test_the_one_field_that_explains_a_contradiction_is_named(plate, changes, field, instead):
    remark = only(plate, **changes)
    assert (remark.likely, remark.instead) == (field, instead)
    assert f"{instead} instead of" in remark.suggestion


@pytest.mark.parametrize(
    ("plate", "kind", "changes", "field", "instead"),
    [
        (FOUR_POLE, "induction_3ph", {"current": "149 A"}, "current", "14.9 A"),
        (FOUR_POLE, "induction_3ph", {"current": "1.49 A"}, "current", "14.9 A"),
        (FOUR_POLE, "induction_3ph", {"power": "75 kW"}, "power", "7.5 kW"),
        (FOUR_POLE, "induction_3ph", {"voltage": "4160 V"}, "voltage", "416 V"),
        (SINGLE, "induction_1ph", {"current": "96 A"}, "current", "9.6 A"),
        (SHUNT, "dc_shunt", {"current": "3.7 A"}, "current", "37 A"),
    ],
)
def test_a_decimal_point_in_the_wrong_place_is_refused_with_the_likely_value(
    plate, kind, changes, field, instead
):
    with pytest.raises(InputError) as refused:
        machine(plate, kind=kind, **changes)
    (problem,) = refused.value.problems
    assert problem.where == f"machine.nameplate.{field}"
    assert f"{instead} instead of" in problem.allowed


def test_amps_of_the_other_voltage_leave_two_explanations():
    remark = only(NEMA, current="25.8 A")
    assert remark.likely is None
    assert "current 12.9 A instead of 25.8 A" in remark.suggestion
    assert "voltage 230 V instead of 460 V" in remark.suggestion


def test_the_site_voltage_decides_between_them():
    remark = only(NEMA, current="25.8 A", supply={"nominal_voltage": "230 V"})
    assert (remark.likely, remark.instead) == ("voltage", "230 V")


def test_a_remark_says_which_current_would_fit():
    remark = only(FOUR_POLE, power_factor=None, current="24.9 A")
    assert remark.id == "power_balance"
    assert remark.fields == ("power", "voltage", "current", "efficiency")
    assert "takes about 14.5 A; the plate says 24.9 A" in str(remark)


@pytest.mark.parametrize("speed", ["1500 rpm", "1502 rpm"])
def test_a_speed_that_is_not_below_synchronous_is_remarked(speed):
    remark = only(FOUR_POLE, speed=speed)
    assert remark.id == "speed_not_below_synchronous"
    assert "with its load such a motor turns at about 1460 rpm" in remark.says


def test_a_design_d_motor_may_slip_more():
    assert only(FOUR_POLE, speed="1340 rpm").id == "slip"
    assert remarks(FOUR_POLE, speed="1340 rpm", design_letter="D") == []


def test_a_small_motor_may_slip_more():
    small = {
        "power": "0.25 kW",
        "voltage": "400 V",
        "current": "0.79 A",
        "frequency": "50 Hz",
        "speed": "1340 rpm",
    }
    assert remarks(small) == []


def test_poles_and_speed_that_do_not_belong_together_are_remarked():
    assert only(FOUR_POLE, poles="6").fields == ("speed", "frequency", "poles")


@pytest.mark.parametrize(("ratio", "count"), [("6.5", 0), ("2.1", 1), ("14", 1)])
def test_a_locked_rotor_ratio_that_no_motor_has_is_remarked(ratio, count):
    assert len(remarks(FOUR_POLE, locked_rotor_current_ratio=ratio)) == count


def test_a_code_letter_is_compared_with_the_ratio():
    # 10 hp at 460 V and 12.9 A: 1.028 kVA/hp, so that letter H (6.3 to 7.1 kVA/hp, NEMA MG 1)
    # is 6.1 to 6.9 times rated
    assert remarks(NEMA, code_letter="H", locked_rotor_current_ratio="6.5") == []
    remark = only(NEMA, code_letter="A", locked_rotor_current_ratio="6.5")
    assert remark.id == "code_letter"
    assert "code letter A means 2.7 to 3.1 times the rated current; the plate says 6.5" in remark.says


def test_a_code_letter_alone_is_compared_with_what_is_made():
    assert remarks(NEMA, code_letter="H") == []
    assert only(NEMA, code_letter="T").id == "code_letter"


def test_two_ratings_share_their_volt_amperes():
    plate = {**FOUR_POLE, "voltage": None, "current": None, "in_use": "400 V"}
    good = [
        {"voltage": "230 V", "current": "25.9 A", "connection": "delta"},
        {"voltage": "400 V", "current": "14.9 A", "connection": "star"},
    ]
    assert remarks(plate, ratings=good) == []
    same_amps = [{"voltage": "230 V", "current": "14.9 A"}, {"voltage": "400 V", "current": "14.9 A"}]
    assert "14.9 A at 230 V goes with about 8.57 A at 400 V" in only(plate, ratings=same_amps).says
    turned = [dict(rating, connection=word) for rating, word in zip(good, ("star", "delta"), strict=True)]
    assert "delta belongs to the lower voltage" in only(plate, ratings=turned).says


def test_a_dc_plate_is_output_over_armature_input():
    assert remarks(SHUNT, kind="dc_shunt") == []
    remark = only(SHUNT, kind="dc_shunt", power="10 kW")
    assert (remark.likely, remark.instead) == ("power", "10 hp")
    assert "113 % efficiency" in remark.says
    assert "the plate says 70 %" in only(SHUNT, kind="dc_shunt", efficiency="70 %").says


def test_a_dc_field_that_takes_a_third_of_the_output_is_a_decimal_point():
    remark = only(SHUNT, kind="dc_shunt", field_current="9.2 A")
    assert (remark.id, remark.likely, remark.instead) == ("field_power", "field_current", "0.92 A")


def test_a_single_phase_plate_has_no_root_of_three():
    assert remarks(SINGLE, kind="induction_1ph") == []
    assert only(SINGLE, kind="induction_1ph", current="5.5 A").id == "power_balance"


@pytest.mark.parametrize(
    "silent", [{}, {"power": "7.5 kW"}, {"voltage": "400 V", "current": "14.9 A"}, {"speed": "1455 rpm"}]
)
def test_a_plate_that_says_too_little_is_not_remarked(silent):
    assert remarks(silent) == []


@given(
    st.sampled_from([1.1, 3.0, 7.5, 18.5, 45.0, 110.0]),
    st.sampled_from([230.0, 400.0, 460.0, 690.0]),
    st.floats(0.72, 0.92),
    st.floats(0.78, 0.965),
    st.floats(0.97, 1.03),
)
@settings(deadline=None)
def test_a_plate_made_from_one_machine_is_never_remarked(kilowatts, volts, power_factor, efficiency, scatter):
    amps = 1000.0 * kilowatts / (math.sqrt(3.0) * volts * power_factor * efficiency) * scatter
    plate = {
        "power": f"{kilowatts} kW",
        "voltage": f"{volts:.0f} V",
        "current": f"{amps:.3g} A",
        "frequency": "50 Hz",
        "speed": "1450 rpm",
        "power_factor": f"{power_factor:.2f}",
        "efficiency": f"{100 * efficiency:.1f} %",
    }
    assert remarks(plate) == []


@given(
    st.dictionaries(
        st.sampled_from(sorted({*FOUR_POLE, *SHUNT, "locked_rotor_current_ratio"})),
        st.sampled_from(["1", "7.5", "88.7", "0.84", "1455", "50", "400", "0.001", "9999"]),
    ),
    st.sampled_from(["induction_3ph", "induction_1ph", "dc_shunt", "dc_series", "alternator"]),
)
@settings(deadline=None)
def test_any_plate_is_checked_or_refused(numbers, kind):
    units = {
        "power": "kW",
        "voltage": "V",
        "current": "A",
        "frequency": "Hz",
        "speed": "rpm",
        "field_current": "A",
    }
    plate = {name: f"{number} {units.get(name, '')}".strip() for name, number in numbers.items()}
    try:
        found = remarks(plate, kind=kind)
    except InputError as refused:
        assert refused.problems
    else:
        assert all(remark.says for remark in found)
