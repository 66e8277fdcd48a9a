"""What one reading, one observation, or a plate may do to the odds, and what it may not."""

import math
import warnings

import msgspec
import pytest

from calc.kinds import twin_of
from calc.sheet import Reading, Value
from rules.diagnosing import diagnose
from rules.learned import Counts, with_counts
from rules.weigh.posterior import OTHER, weigh
from tests.rules.makers import case, insulation, reading, shipped, value

from .cases import answer, apart, numbers_of, odds, simulated, typed, with_readings


def test_a_reading_that_says_nothing_changes_nearly_nothing():
    sheet = simulated(4, complaint="trips_under_load")
    blurred = Value(text="7 kW", number=7000.0, unit="kW", resolution=1e9)
    vague = Reading(
        measure="power_factor", state="loaded", values=(Value(text="0.8", number=0.8, resolution=50.0),)
    )
    without = [r for r in sheet.readings if r.measure != "input_power"]
    plain = odds(with_readings(sheet, without))
    assert apart(plain, odds(with_readings(sheet, [*without, vague]))) < 0.02
    power = Reading(measure="input_power", state="loaded", values=(blurred,))
    assert apart(plain, odds(with_readings(sheet, [*without, power]))) < 0.05


def test_a_reading_that_nobody_weighs_changes_nothing_and_is_named():
    sheet = simulated(4, complaint="trips_under_load")
    knowledge = shipped()
    posterior = weigh(sheet, knowledge, twin_of(sheet.machine))
    known = {r.measure for r in posterior.direct} | {s.ask.measure for s in posterior.data.seen}
    measure = next(
        m for m in ("starts_per_hour", "drive_current", "dc_bus_voltage", "overload_class", "brake_voltage")
        if m not in known and not any({m, f"{m}@standby"} & {*f.readings} for f in knowledge.faults.values())
    )  # fmt: skip
    more = with_readings(sheet, [*sheet.readings, typed(measure, "standby", [4.0])])
    assert apart(odds(sheet), odds(more)) < 1e-12
    assert any(measure in note.replace(" ", "_") for note in answer(more).notes)


def test_an_observation_that_no_rule_knows_changes_nothing():
    sheet = simulated(4)
    told = msgspec.structs.replace(sheet, observations={"smells_of_lavender": True})
    assert apart(odds(sheet), odds(told)) < 1e-12


def test_one_hot_bearing_of_two_speaks_for_a_bearing():
    cool = reading("bearing_temperature", "loaded", "47 degC", position="nde")
    hot = reading("bearing_temperature", "loaded", "95 degC", position="de")
    base = odds(case("noisy_or_vibrating", cool))
    found = answer(case("noisy_or_vibrating", cool, hot))
    both = {f.id: f.probability for f in found.faults}
    assert both["bearing_defect"] > 2.0 * base["bearing_defect"]
    assert not found.slips


@pytest.mark.parametrize("efficiency", ["60 %", "10.8 %"])
def test_a_plate_that_contradicts_itself_does_not_decide_the_case(efficiency):
    plate = {"power": "6 kW", "voltage": "400 V", "current": "12.36 A", "power_factor": "0.74"}
    sheet = case("trips_at_start", insulation("0.02 Mohm"), nameplate=plate)
    told = msgspec.structs.replace(sheet.machine.nameplate, efficiency=value(efficiency, "percent"))
    machine = msgspec.structs.replace(sheet.machine, nameplate=told)
    found = odds(msgspec.structs.replace(sheet, machine=machine))
    assert all(math.isfinite(chance) for chance in found.values())
    assert found[OTHER] < 0.5


@pytest.mark.parametrize("rpm", ["2890 rpm", "1455 rpm", "955 rpm"])
def test_any_usual_speed_of_a_motor_whose_plate_cannot_be_read_is_no_fault(rpm):
    found = answer(case("routine_check", reading("speed", "loaded", rpm), plate=False))
    assert found.faults[0].id == "healthy"


@pytest.mark.parametrize("rpm", ["3510 rpm", "1755 rpm", "1165 rpm"])
def test_a_usual_speed_on_60_hz_of_a_motor_whose_plate_cannot_be_read_is_no_fault(rpm):
    found = answer(case("routine_check", reading("speed", "loaded", rpm), plate=False))
    assert found.faults[0].id == "healthy"


@pytest.mark.parametrize("kind", ["dc_series", "dc_shunt"])
def test_a_ripple_frequency_alone_leaves_finite_bands(kind):
    read = reading("ripple_frequency", "loaded", "64.96 Hz")
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        found = answer(case("after_repair", read, kind=kind, nameplate={}))
    assert all(math.isfinite(number) for number in numbers_of(found))


def test_even_windings_speak_against_a_turn_short_and_uneven_ones_for_it():
    plate = {"connection": "star"}
    plate |= {
        "power": "7.5 kW",
        "voltage": "400 V",
        "current": "14.9 A",
        "frequency": "50 Hz",
        "speed": "1455 rpm",
    }

    def of(*texts):
        read = (reading("winding_resistance", "isolated", *texts, method="four_wire"),)
        return odds(case("trips_under_load", *read, nameplate=plate))["turn_short"]

    even, uneven = of("1.912 ohm", "1.910 ohm", "1.911 ohm"), of("1.780 ohm", "1.911 ohm", "1.778 ohm")
    bare = odds(case("trips_under_load", nameplate=plate))["turn_short"]
    assert uneven > 3.0 * bare
    assert even < bare


@pytest.mark.parametrize(("megohm", "least"), [("0.2 Mohm", 0.8), ("800 Mohm", 0.0)])
def test_low_insulation_speaks_for_what_lowers_it(megohm, least):
    found = odds(case("routine_check", insulation(megohm)))
    wet = found["ground_fault"] + found["damp_insulation"]
    assert wet >= least if least else wet < 0.1


def test_confirmed_cases_of_the_shop_shift_the_start():
    sheet = case("noisy_or_vibrating")
    counted = with_counts(shipped(), "induction_3ph", Counts(faults={"misalignment": 30.0}))
    own = {f.id: f.probability for f in diagnose(sheet, knowledge=counted).faults}
    assert own["misalignment"] > 1.5 * odds(sheet)["misalignment"]
    assert sum(own.values()) == pytest.approx(1.0)


def test_no_confirmed_case_shifts_nothing():
    assert with_counts(shipped(), "induction_3ph", Counts()) is shipped()
