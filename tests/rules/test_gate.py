"""The gate starts shut, opens on recorded entries only, and says nothing that is a permission."""

import msgspec
import pytest

from calc.quantities import ENERGISED_STATES
from calc.sheet import CaseSheet, Machine, Reading, Value
from rules.gate import SAYS_NOTHING_FORBIDS, gate
from rules.wording import texts_in, unwanted

from .gates import CLEARED, LOADED, STARTED, lines, shut
from .makers import case, insulation, reading, windings


def test_it_starts_shut_and_says_what_is_needed(knowledge):
    energise = gate(case("will_not_start"), knowledge).energise
    assert energise.gate == "shut"
    assert energise.needs == (
        "insulation_resistance", "winding_resistance", "shaft_turns_freely", "guards_fitted",
    )  # fmt: skip
    assert energise.because == ()


def test_a_machine_that_stands_still_may_have_its_live_supply_read(knowledge):
    assert shut(case("will_not_start"), knowledge) == STARTED


def test_states_without_power_are_never_shut(knowledge):
    state = gate(case("smoke_or_burning"), knowledge)
    assert not any(state.forbids(name) for name in ("isolated", "coasting"))


def test_a_driven_machine_makes_its_own_voltage_and_stays_shut_with_the_supply(knowledge):
    assert gate(case("shock_from_frame"), knowledge).forbids("spun")
    assert gate(case("routine_check", insulation("0.4 Mohm")), knowledge).lines_for("spun")
    assert gate(case("routine_check"), knowledge, suspects={"ground_fault": 0.4}).forbids("spun")
    assert not gate(case("will_not_start"), knowledge).forbids("spun")


def test_two_faults_at_once_are_suspected_like_each_of_them(knowledge):
    odds = {"damp_insulation+ground_fault": 0.2, "ground_fault": 0.15}
    assert gate(case("routine_check"), knowledge, suspects=odds).forbids("standby")


def test_a_field_that_may_be_lost_shuts_a_machine_that_was_found_running(knowledge):
    sheet = case("runs_fast", kind="dc_shunt")
    assert not gate(sheet, knowledge, suspects={"open_field": 0.2}).forbids("loaded")
    assert gate(sheet, knowledge, suspects={"open_field": 0.4}).forbids("loaded")


def test_a_state_that_nobody_knows_stays_shut(knowledge):
    assert gate(case("routine_check", LOADED), knowledge).forbids("loaded ")


def test_every_line_is_cleared_by_an_entry_that_it_shows(knowledge):
    sheet = case("will_not_start", insulation(), windings(), seen=CLEARED)
    state = gate(sheet, knowledge)
    assert shut(sheet, knowledge) == set()
    assert state.energise.gate == "no_finding_forbids"
    assert state.energise.says == SAYS_NOTHING_FORBIDS
    shown = {line.id: line.because for line in state.energise.lines if line.status == "cleared"}
    assert "350 Mohm" in shown["insulation_to_earth"]
    assert "1.91 ohm, 1.92 ohm, 1.90 ohm" in shown["winding_balanced"]
    assert shown["shaft_free"].endswith(": yes")


@pytest.mark.parametrize("missing", ["insulation", "windings", "shaft_turns_freely", "guards_fitted"])
def test_one_line_missing_keeps_it_shut(knowledge, missing):
    readings = [insulation()] * (missing != "insulation") + [windings()] * (missing != "windings")
    seen = {name: True for name in CLEARED if name != missing}
    sheet = case("will_not_start", *readings, seen=seen)
    assert shut(sheet, knowledge) >= {"starting", "loaded"}
    assert gate(sheet, knowledge).energise.gate == "shut"


@pytest.mark.parametrize("seen", [{"shaft_turns_freely": False}, {"guards_fitted": False}])
def test_a_no_forbids(knowledge, seen):
    sheet = case("will_not_start", insulation(), windings(), seen=CLEARED | seen)
    assert "forbids" in lines(sheet, knowledge).values()
    assert shut(sheet, knowledge) >= {"starting", "loaded"}


def test_a_motor_that_turns_uncoupled_may_be_jammed_by_its_load(knowledge):
    seen = CLEARED | {"shaft_turns_freely": False, "turns_freely_uncoupled": True}
    sheet = case("will_not_start", insulation(), windings(), seen=seen)
    assert shut(sheet, knowledge) == {"light_load", "loaded"}


# ------------------------------------------------------------------ what shuts everything
@pytest.mark.parametrize("complaint", ["shock_from_frame", "smoke_or_burning"])
def test_a_complaint_that_means_stop_shuts_every_energised_state(knowledge, complaint):
    sheet = case(complaint, insulation(), windings(), LOADED, seen=CLEARED)
    assert shut(sheet, knowledge) == ENERGISED_STATES - {"stalled"}
    assert knowledge.complaints[complaint].name in gate(sheet, knowledge).energise.because[0]


@pytest.mark.parametrize(
    "low",
    [
        insulation("0.99 Mohm"), insulation("0 ohm"), insulation("<1 Mohm"), insulation("12 kohm"),
        insulation("0.5 Mohm", temperature="90 degC"), insulation("0.9 Mohm", at="cable_end"),
        reading("insulation_resistance", "loaded", "0.9 Mohm"),
        reading("insulation_resistance_30s", "isolated", "0.2 Mohm"),
        reading("cable_insulation_resistance", "isolated", "0.2 Mohm"),
        reading("insulation_between_phases", "isolated", "90 Mohm", "0.1 Mohm", "90 Mohm"),
    ],
)  # fmt: skip
@pytest.mark.parametrize("complaint", ["routine_check", "after_repair", "trips_under_load"])
def test_insulation_below_1_megohm_shuts_every_energised_state(knowledge, low, complaint):
    sheet = case(complaint, low, insulation("900 Mohm"), windings(), LOADED, seen=CLEARED)
    assert shut(sheet, knowledge) == ENERGISED_STATES - {"stalled"}


def test_insulation_below_its_published_minimum_shuts_every_energised_state(knowledge):
    sheet = case("runs_hot", insulation("4 Mohm", temperature="40 degC"), LOADED)
    assert shut(sheet, knowledge) == ENERGISED_STATES - {"stalled"}
    assert any("IEEE" not in text and "4 Mohm" in text for text in gate(sheet, knowledge).energise.because)


def test_an_earth_fault_trip_asks_for_insulation_before_anything_live(knowledge):
    assert shut(case("earth_fault_trip"), knowledge) == ENERGISED_STATES - {"stalled"}
    assert "standby" not in shut(case("earth_fault_trip", insulation()), knowledge)


def test_a_voltage_unbalance_above_5_percent_leaves_the_live_supply_to_be_read(knowledge):
    sheet = case("runs_hot", reading("supply_voltage", "loaded", "400 V", "400 V", "340 V"))
    assert shut(sheet, knowledge) == STARTED


def test_severe_vibration_lets_it_be_read_while_it_runs_but_not_started_again(knowledge):
    sheet = case("noisy_or_vibrating", reading("vibration_velocity", "loaded", "9 mm/s"))
    assert shut(sheet, knowledge) == {"starting"}


# ------------------------------------------------------------------ windings
@pytest.mark.parametrize(
    ("texts", "status"),
    [
        (("1.91 ohm", "1.92 ohm", "1.90 ohm"), "cleared"),
        (("1.91 ohm", "1.92 ohm", "1.70 ohm"), "forbids"),
        (("1.91 ohm", "open", "open"), "forbids"),
        (("20 Mohm", "20 Mohm", "20 Mohm"), "forbids"),
        (("0.3 ohm", "0.3 ohm", "0.3 ohm"), "needed"),
        (("0.0 ohm", "0.0 ohm", "0.0 ohm"), "needed"),
        (("0.300 ohm", "0.301 ohm", "0.300 ohm"), "cleared"),
        (("2.0 ohm", "2.0 ohm", "2.0 ohm"), "cleared"),
    ],
)
def test_a_winding_line_is_cleared_by_balance_that_the_meter_can_judge(knowledge, texts, status):
    assert lines(case("will_not_start", windings(*texts)), knowledge)["winding_balanced"] == status


def test_two_of_three_values_clear_nothing(knowledge):
    gone = Value(text="", number=float("nan"), kind="missing")
    read = windings()
    two = msgspec.structs.replace(read, values=(*read.values[:2], gone))
    assert lines(case("will_not_start", two), knowledge)["winding_balanced"] == "needed"


def test_a_winding_far_below_the_plate_forbids(knowledge):
    # 400 V, 14.9 A: 0.15 % of 15.5 ohm is 0.023 ohm per phase, 0.047 ohm between terminals
    sheet = case("will_not_start", windings("0.030 ohm", "0.030 ohm", "0.030 ohm"))
    assert lines(sheet, knowledge)["winding_balanced"] == "forbids"


def test_a_damaged_winding_shuts_a_machine_that_was_found_running(knowledge):
    sheet = case("runs_hot", windings("1.91 ohm", "open", "open"), LOADED)
    assert shut(sheet, knowledge) == STARTED


def test_phase_resistances_do_as_well(knowledge):
    phases = reading("phase_resistance", "isolated", "2.86 ohm", "2.87 ohm", "2.86 ohm")
    assert lines(case("will_not_start", phases), knowledge)["winding_balanced"] == "cleared"


# ------------------------------------------------------------------ odds
def test_a_suspected_earth_fault_shuts_what_entries_had_opened(knowledge):
    sheet = case("runs_hot", LOADED)
    assert shut(sheet, knowledge, ground_fault=0.29) == set()
    assert shut(sheet, knowledge, ground_fault=0.30) == ENERGISED_STATES - {"stalled"}


def test_a_leading_suspect_that_forbids_lets_it_be_read_while_it_runs_but_not_started(knowledge):
    assert shut(case("runs_hot", LOADED), knowledge, turn_short=0.49) == set()
    assert shut(case("runs_hot", LOADED), knowledge, turn_short=0.5) == {"starting"}
    sheet = case("will_not_start", insulation(), windings(), seen=CLEARED)
    assert shut(sheet, knowledge, turn_short=0.5) == STARTED
    assert "turn" in gate(sheet, knowledge, suspects={"turn_short": 0.5}).energise.because[0]


def test_every_fault_that_forbids_energising_is_a_suspect_of_the_gate(knowledge):
    forbidding = {fault.id for fault in knowledge.faults.values() if fault.forbids_energising}
    assert set(knowledge.gates["forbidding_fault"].suspects) == forbidding


def test_what_shuts_a_start_shuts_the_way_to_running_of_a_machine_that_stands(knowledge):
    shaken = reading("vibration_velocity", "loaded", "9 mm/s")
    sheet = case("will_not_start", insulation(), windings(), shaken, seen=CLEARED)
    assert shut(sheet, knowledge) == STARTED


def test_odds_that_are_no_number_shut(knowledge):
    assert "loaded" in shut(case("runs_hot", LOADED), knowledge, ground_fault=float("nan"))


# ------------------------------------------------------------------ broken sheets and rules
HOSTILE = [
    CaseSheet(machine=Machine(kind="no_such_kind"), complaint=""),
    CaseSheet(machine=Machine(kind="induction_3ph"), complaint="x", readings=(
        Reading(measure="insulation_resistance", state="isolated", values=()),)),
    CaseSheet(machine=Machine(kind="induction_3ph"), complaint="x", readings=(
        Reading(measure="insulation_resistance", state="isolated", values=("350 Mohm",)),)),
    CaseSheet(machine=Machine(kind="induction_3ph"), complaint=None, observations=None),
    CaseSheet(machine=Machine(kind=["a"]), complaint=["b"], readings=None),
    CaseSheet(machine=None, complaint="will_not_start"),
    CaseSheet(machine=Machine(kind="induction_3ph"), complaint="x",
              observations={"shaft_turns_freely": "yes", "guards_fitted": 1}),
]  # fmt: skip


@pytest.mark.parametrize("sheet", HOSTILE)
def test_a_sheet_that_cannot_be_judged_stays_shut_and_raises_nothing(knowledge, sheet):
    assert gate(sheet, knowledge).energise.gate == "shut"
    assert gate(sheet, knowledge).forbids("loaded")


def test_rules_without_gate_lines_keep_it_shut(knowledge):
    bare = msgspec.structs.replace(knowledge, gates={})
    assert shut(case("runs_hot", LOADED), bare) == ENERGISED_STATES - {"stalled"}


def test_a_check_that_nobody_knows_clears_nothing(knowledge):
    line = msgspec.structs.replace(knowledge.gates["guards_fitted"], clears=("looks_nice",))
    other = msgspec.structs.replace(knowledge, gates={**knowledge.gates, "guards_fitted": line})
    sheet = case("will_not_start", insulation(), windings(), seen=CLEARED)
    assert shut(sheet, other) == STARTED


def test_nothing_the_gate_says_is_a_permission(knowledge):
    sheets = [*HOSTILE, case("will_not_start"), case("runs_hot", LOADED),
              case("will_not_start", insulation(), windings(), seen=CLEARED),
              case("smoke_or_burning", insulation("0.1 Mohm")), case("trips_instantly")]  # fmt: skip
    for sheet in sheets:
        for path, text in texts_in(gate(sheet, knowledge).energise):
            assert unwanted(text) == (), path
