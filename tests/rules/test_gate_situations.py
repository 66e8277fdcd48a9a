"""The gate by how the machine was found, what tripped, and what is never arranged on its kind."""

import pytest

from rules.gate import gate, situation_of

from .gates import CLEARED, LOADED, STARTED, lines, shut
from .makers import case, insulation, reading, windings


# ------------------------------------------------------------------ a complaint that nobody knows
@pytest.mark.parametrize("complaint", ["shock", "shock_from_frames", "smoke_or_burnig"])
def test_a_misspelt_complaint_keeps_every_energised_state_shut(knowledge, complaint):
    state = gate(case(complaint, LOADED), knowledge)
    assert state.energise.gate == "shut"
    assert all(state.forbids(one) for one in ("starting", "no_load", "loaded"))
    assert any(complaint in words for words in state.energise.because)


# ------------------------------------------------------------------ found running, trips, repair
def test_a_machine_found_running_may_be_read_with_the_clamp(knowledge):
    assert shut(case("runs_hot"), knowledge) == set()
    assert shut(case("noisy_or_vibrating", LOADED), knowledge) == set()


@pytest.mark.parametrize(
    "complaint", ["will_not_start", "hums_will_not_turn", "after_repair", "trips_instantly", "blows_fuses"]
)
def test_readings_of_a_running_machine_do_not_clear_after_these_complaints(knowledge, complaint):
    assert shut(case(complaint, LOADED), knowledge) >= {"starting", "loaded"}


@pytest.mark.parametrize("tripped", ["breaker_tripped", "fuse_blown", "drive_tripped"])
def test_an_instantaneous_trip_on_record_asks_for_every_line(knowledge, tripped):
    sheet = case("trips_under_load", insulation(), LOADED, seen={tripped: True, "shaft_turns_freely": True})
    needs = gate(sheet, knowledge).energise.needs
    assert needs == ("winding_resistance", "guards_fitted", "trip_cause_found")
    assert shut(sheet, knowledge) == STARTED


def test_an_overload_trip_asks_for_insulation_and_a_free_shaft(knowledge):
    assert gate(case("trips_under_load"), knowledge).energise.needs == (
        "insulation_resistance",
        "shaft_turns_freely",
    )
    sheet = case("trips_under_load", insulation(), seen={"shaft_turns_freely": True})
    assert shut(sheet, knowledge) == set()


def test_an_overload_trip_with_running_readings_may_be_read_but_not_restarted(knowledge):
    sheet = case("trips_under_load", LOADED)
    assert shut(sheet, knowledge) == {"starting"}
    assert gate(sheet, knowledge).energise.gate == "shut"


def test_what_tripped_and_why_is_asked_after_a_trip(knowledge):
    seen = CLEARED | {"breaker_tripped": True}
    sheet = case("trips_instantly", insulation(), windings(), seen=seen)
    assert lines(sheet, knowledge)["trip_cause_known"] == "needed"
    sheet = case("trips_instantly", insulation(), windings(), seen=seen | {"trip_cause_found": True})
    assert lines(sheet, knowledge)["trip_cause_known"] == "cleared"
    assert shut(sheet, knowledge) == set()


def test_a_repair_asks_for_its_re_test(knowledge):
    sheet = case("after_repair", insulation(), windings(), seen=CLEARED)
    assert gate(sheet, knowledge).energise.needs == ("repair_retested",)
    sheet = case("after_repair", insulation(), windings(), seen=CLEARED | {"repair_retested": True})
    assert shut(sheet, knowledge) == set()


@pytest.mark.parametrize(
    ("sheet", "situation"),
    [
        (case("runs_hot"), "found_running"),
        (case("a_shops_own_complaint", LOADED), "found_running"),
        (case("a_shops_own_complaint"), "stands"),
        (case("trips_at_start"), "overload_trip"),
        (case("runs_hot", LOADED, seen={"overload_tripped": True}), "ran_until_overload_trip"),
        (case("runs_hot", LOADED, seen={"fuse_blown": True}), "stands"),
        (case("drive_trips", LOADED), "stands"),
        (case("earth_fault_trip", LOADED), "stands"),
    ],
)
def test_how_a_machine_was_found(knowledge, sheet, situation):
    assert situation_of(sheet, knowledge) == situation


# ------------------------------------------------------------------ never arranged
def test_a_stall_is_never_arranged(knowledge):
    sheet = case("will_not_start", insulation(), windings(), seen=CLEARED)
    assert gate(sheet, knowledge).forbids("stalled")
    assert "stall_not_arranged" not in lines(sheet, knowledge)


@pytest.mark.parametrize(
    "sheet",
    [
        case("hums_will_not_turn", insulation(), windings(), seen=CLEARED),
        case("will_not_start", insulation(), windings(), reading("speed", "stalled", "0 rpm"), seen=CLEARED),
    ],
)
def test_a_machine_that_stalled_is_not_started_again(knowledge, sheet):
    assert shut(sheet, knowledge) == STARTED


def test_a_series_motor_is_never_uncoupled(knowledge):
    armature = reading("armature_resistance", "isolated", "0.31 ohm")
    sheet = case("will_not_start", insulation(), armature, kind="dc_series", seen=CLEARED)
    assert shut(sheet, knowledge) == {"no_load"}
    assert lines(sheet, knowledge)["load_coupled"] == "forbids"
    assert shut(case("runs_hot", kind="dc_series"), knowledge) == {"no_load"}


@pytest.mark.parametrize("kind", ["dc_shunt", "dc_separately_excited", "dc_compound"])
@pytest.mark.parametrize(
    ("field", "status"), [(None, "needed"), ("120 ohm", "cleared"), ("20 Mohm", "forbids")]
)
def test_the_field_is_proved_before_the_armature_is_energised(knowledge, kind, field, status):
    readings = [insulation(), reading("armature_resistance", "isolated", "0.31 ohm")]
    readings += [reading("field_resistance", "isolated", field)] if field else []
    sheet = case("will_not_start", *readings, kind=kind, seen=CLEARED)
    assert lines(sheet, knowledge)["field_circuit_proved"] == status
    assert shut(sheet, knowledge) == (set() if status == "cleared" else STARTED)


def test_a_lost_field_shuts_a_running_machine(knowledge):
    plate = {"voltage": "240 V", "current": "30 A", "field_current": "1.5 A"}
    sheet = case("runs_fast", reading("field_current", "loaded", "0.02 A"), kind="dc_shunt", nameplate=plate)
    assert shut(sheet, knowledge) == STARTED


def test_a_hoist_waits_until_its_load_is_held(knowledge):
    readings = (insulation(), windings())
    hanging = case("will_not_start", *readings, load_type="hoist", seen=CLEARED)
    assert shut(hanging, knowledge) == STARTED | {"standby"}
    held = CLEARED | {"load_held": True}
    assert shut(case("will_not_start", *readings, load_type="hoist", seen=held), knowledge) == set()
    assert "loaded" in shut(case("runs_hot", load_type="hoist"), knowledge)


def test_both_windings_of_a_single_phase_motor_are_asked_for(knowledge):
    main = reading("main_resistance", "isolated", "2.1 ohm")
    auxiliary = reading("auxiliary_resistance", "isolated", "9.0 ohm")
    sheet = case("will_not_start", insulation(), main, kind="induction_1ph", seen=CLEARED)
    assert gate(sheet, knowledge).energise.needs == ("auxiliary_resistance",)
    both = case("will_not_start", insulation(), main, auxiliary, kind="induction_1ph", seen=CLEARED)
    assert shut(both, knowledge) == set()
