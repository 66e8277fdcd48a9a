"""Limits do what their examples say. Their numbers against the standards: tests/published."""

import pytest

from calc.sheet import Reading, Value
from rules.derived import QUANTITIES, derived
from rules.findings import findings
from rules.limit_bands import floor_of
from rules.validators.examples import verdict_of

from .makers import PLATE, case, insulation, reading, shipped, value, windings

EXAMPLES = [
    pytest.param(limit, example, id=f"{limit.id} at {example.value}")
    for limit in shipped().limits.values()
    for example in limit.examples
]


@pytest.mark.parametrize(("limit", "example"), EXAMPLES)
def test_an_example_gets_its_stated_verdict(limit, example):
    assert verdict_of(limit, example) == example.verdict


def test_every_derived_quantity_is_judged_by_a_limit(knowledge):
    assert set(QUANTITIES) == {limit.quantity for limit in knowledge.limits.values()} & set(QUANTITIES)


def one(quantity, *readings, **more) -> float:
    (found,) = derived(case("routine_check", *readings, **more), quantity)
    return found.value


# IEEE 43-2013 from memory: factors of the thermosetting law; the older law halves per 10 K
@pytest.mark.parametrize(
    ("t_c", "thermoset"),
    [(10, 0.66), (20, 0.76), (30, 0.88), (40, 1.0), (50, 1.52), (60, 2.25), (70, 3.26), (80, 4.6)],
)
def test_insulation_is_brought_to_40_degrees_by_the_lower_of_both_laws(t_c, thermoset):
    older = 0.5 ** ((40 - t_c) / 10)
    read = insulation("100 Mohm", temperature=f"{t_c} degC")
    assert one("insulation_at_40c", read) == pytest.approx(1e8 * min(older, thermoset), rel=0.01)
    known = {"insulation_class": "F"}
    assert one("insulation_at_40c", read, nameplate=known) == pytest.approx(1e8 * thermoset, rel=0.01)


@pytest.mark.parametrize(("typed", "as_at"), [("-20 degC", 10), ("2 degC", 10), ("120 degC", 85)])
def test_outside_the_span_of_the_laws_the_nearer_end_is_taken(typed, as_at):
    far = one("insulation_at_40c", insulation("100 Mohm", temperature=typed))
    assert far == pytest.approx(one("insulation_at_40c", insulation("100 Mohm", temperature=f"{as_at} degC")))


def test_without_a_temperature_the_reading_counts_as_it_is():
    assert one("insulation_at_40c", insulation("12 Mohm")) == 12e6


def test_a_hot_megohm_does_not_pass_as_sixteen():
    hot = insulation("1 Mohm", temperature="80 degC")
    assert one("insulation_at_40c", hot) == pytest.approx(4.6e6, rel=0.01)


def test_200_megohm_at_20_degrees_counts_as_50_at_40():
    assert one("insulation_at_40c", insulation("200 Mohm", temperature="20 degC")) == pytest.approx(50e6)


def ids(sheet, knowledge) -> dict[str, str]:
    return {finding.id: finding.verdict for finding in findings(sheet, knowledge)}


def test_insulation_below_the_minimum_is_a_finding_with_its_source(knowledge):
    sheet = case("routine_check", insulation("3 Mohm", temperature="40 degC"))
    (found,) = findings(sheet, knowledge)
    assert (found.id, found.verdict) == ("insulation_below_minimum", "stop")
    assert "IEEE 43" in found.source
    assert "from memory" in found.source
    assert "3 Mohm" in found.says
    assert found.about == "insulation_resistance@isolated"


def test_a_finding_says_what_was_read_and_what_was_made_of_it(knowledge):
    (found,) = findings(case("routine_check", insulation("9.8 Mohm", temperature="25 degC")), knowledge)
    assert found.says.endswith("(3.46 Mohm from 9.8 Mohm at 25 degC)")
    volts = reading("supply_voltage", "loaded", "400 V", "395 V", "388 V")
    (found,) = findings(case("routine_check", volts), knowledge)
    assert found.says.endswith("(1.61 % from 400 V, 395 V, 388 V)")
    (found,) = findings(case("routine_check", reading("bearing_temperature", "loaded", "93 degC")), knowledge)
    assert found.says == "bearing above 90 degC (read: 93 degC)"


def test_the_minimum_of_a_high_voltage_winding_is_its_own(knowledge):
    plate = {"voltage": "6 kV"}
    assert ids(case("routine_check", insulation("6.9 Mohm"), nameplate=plate), knowledge) == {
        "insulation_below_kv_plus_one": "stop",
        "insulation_high_voltage": "watch",
    }
    assert ids(case("routine_check", insulation("8 Mohm"), nameplate=plate), knowledge) == {
        "insulation_high_voltage": "watch"
    }


def test_the_worst_of_several_readings_is_the_finding(knowledge):
    sheet = case("routine_check", insulation("800 Mohm"), insulation("0.5 Mohm"), insulation("900 Mohm"))
    assert ids(sheet, knowledge)["insulation_below_1_mohm"] == "stop"


def test_findings_stand_in_the_order_of_their_gravity(knowledge):
    sheet = case(
        "runs_hot",
        reading("line_current", "loaded", "16 A", "16.5 A", "13 A"),
        insulation("0.5 Mohm"),
        reading("supply_voltage", "loaded", "376 V", "377 V", "376 V"),
    )
    verdicts = [finding.verdict for finding in findings(sheet, knowledge)]
    assert verdicts == sorted(verdicts, key=["stop", "watch", "remark"].index)
    assert set(verdicts) == {"stop", "watch", "remark"}


def test_a_limit_without_its_inputs_is_silent(knowledge):
    bare = case(
        "runs_hot",
        reading("line_current", "loaded", "99 A", "99 A", "99 A"),
        reading("vibration_velocity", "loaded", "3 mm/s"),
        reading("speed", "loaded", "12 rpm"),
        reading("run_capacitance", "isolated", "1 uF"),
        plate=False,
    )
    assert findings(bare, knowledge) == ()


def test_the_polarisation_index_is_ignored_above_5_gigohm(knowledge):
    late = reading("insulation_resistance_10min", "isolated", "6.1 Gohm")
    assert derived(case("routine_check", insulation("6 Gohm"), late), "polarisation_index") == ()
    assert one("polarisation_index", insulation("4 Gohm"), late) == pytest.approx(1.525)


def test_slip_within_the_tolerance_says_nothing(knowledge):
    # 1455 rpm at 50 Hz is 45 rpm of slip; 20 % more is 54 rpm (IEC 60034-1, from 1 kW)
    assert ids(case("runs_slow", reading("speed", "loaded", "1446 rpm")), knowledge) == {}
    assert ids(case("runs_slow", reading("speed", "loaded", "1445 rpm")), knowledge) == {
        "slip_high": "remark"
    }


def test_slip_is_taken_at_the_frequency_that_was_read():
    readings = (reading("speed", "loaded", "1425 rpm"), reading("supply_frequency", "loaded", "49 Hz"))
    assert one("slip_over_plate", *readings) == pytest.approx(100.0)


def test_the_step_of_the_meter_is_no_unbalance(knowledge):
    assert ids(case("routine_check", windings("0.4 ohm", "0.5 ohm", "0.4 ohm")), knowledge) == {}
    assert ids(case("routine_check", windings("0.400 ohm", "0.500 ohm", "0.400 ohm")), knowledge) == {
        "winding_unbalance": "stop"
    }


def test_service_factor_moves_the_rated_current(knowledge):
    over = reading("line_current", "loaded", "16.5 A", "16.5 A", "16.5 A")
    plate = {"current": "14.9 A", "service_factor": "1.15"}
    assert ids(case("routine_check", over, nameplate=plate), knowledge) == {}
    assert ids(case("routine_check", over), knowledge) == {"current_over_rated": "watch"}


# ISO 10816-3 group 2 rigid B/C 2.8, C/D 4.5; class I of ISO 10816-1 (up to 15 kW) 1.8 and 4.5 mm/s
@pytest.mark.parametrize(
    ("power", "mount", "velocity", "verdict"),
    [
        ("7.5 kW", None, "1.8", None), ("7.5 kW", None, "1.9", "watch"),
        ("7.5 kW", None, "4.6", "stop"),
        ("15 kW", None, "2.0", "watch"), ("15.1 kW", "rigid", "2.8", None),
        ("90 kW", "rigid", "2.9", "watch"), ("90 kW", "rigid", "4.6", "stop"),
        ("90 kW", "flexible", "4.5", None), ("90 kW", None, "7.2", "stop"),
        ("301 kW", "rigid", "4.5", None), ("400 hp", "rigid", "4.6", "stop"),
        ("500 kW", "flexible", "11.1", "stop"),
    ],
)  # fmt: skip
def test_vibration_is_judged_by_size_and_support(knowledge, power, mount, velocity, verdict):
    sheet = case(
        "noisy_or_vibrating",
        reading("vibration_velocity", "loaded", f"{velocity} mm/s"),
        nameplate={"power": power},
        mount=mount,
    )
    assert set(ids(sheet, knowledge).values()) == ({verdict} if verdict else set())


# NEMA MG 10 Table 2-3: 25 hp 4-pole 8.8 starts an hour, 10 hp 2-pole 6.2
@pytest.mark.parametrize(
    ("power", "speed", "starts", "crossed"),
    [
        ("25 hp", "1765 rpm", "8", False), ("25 hp", "1765 rpm", "9", True),
        ("10 hp", "3500 rpm", "6", False), ("10 hp", "3500 rpm", "7", True),
        ("18.5 kW", "1765 rpm", "9", True), ("300 hp", "1785 rpm", "20", False),
    ],
)  # fmt: skip
def test_starts_per_hour_follow_size_and_poles(knowledge, power, speed, starts, crossed):
    plate = {"power": power, "speed": speed, "frequency": "60 Hz"}
    sheet = case("runs_hot", reading("starts_per_hour", "loaded", starts), nameplate=plate)
    assert ("starts_per_hour" in ids(sheet, knowledge)) is crossed


@pytest.mark.parametrize(
    ("read", "verdicts"),
    [("150 uF", {"start_capacitor_low": "watch"}), ("161 uF", {}), ("193 uF", {}),
     ("200 uF", {"start_capacitor_high": "remark"})],
)  # fmt: skip
def test_a_start_capacitor_is_judged_by_its_marked_range(knowledge, read, verdicts):
    plate = {"start_capacitor": "161-193 uF"}
    sheet = case(
        "will_not_start",
        reading("start_capacitance", "isolated", read),
        kind="induction_1ph",
        nameplate=plate,
    )
    assert ids(sheet, knowledge) == verdicts


@pytest.mark.parametrize("typed", ["-38 dB", "38 dB"])
def test_a_sideband_is_understood_with_either_sign(knowledge, typed):
    assert ids(case("noisy_or_vibrating", reading("sideband_level", "loaded", typed)), knowledge) == {
        "sideband_below_40_db": "watch"
    }


def test_values_that_were_not_read_cross_nothing(knowledge):
    gone = Value(text="", number=float("nan"), kind="missing")
    volts = Reading(measure="supply_voltage", state="loaded", values=(value("500 V", "voltage"), gone, gone))
    assert findings(case("routine_check", volts), knowledge) == ()


def test_the_floor_of_insulation_is_the_highest_limit_that_stops_this_machine(knowledge):
    """5 Mohm for windings below 1 kV, IEEE 43-2013, from memory; it lies above the older 1 Mohm."""
    assert floor_of(case("runs_hot"), knowledge, "insulation_resistance") == (5e6, "5 Mohm")


def test_the_floor_is_that_of_the_machine_at_hand(knowledge):
    high = case("runs_hot", nameplate={**PLATE, "voltage": "6 kV"})
    assert floor_of(high, knowledge, "insulation_resistance") == (1e6, "1 Mohm")
    assert floor_of(case("runs_hot"), knowledge, "insulation_between_phases") == (1e6, "1 Mohm")


def test_a_measure_without_such_a_limit_has_no_floor(knowledge):
    assert floor_of(case("runs_hot"), knowledge, "speed") is None
