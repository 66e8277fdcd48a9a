"""The shipped faults, observations, complaints and readings against the vocabulary of case sheet format 1."""

from __future__ import annotations

from pathlib import Path

import pytest
import yaml

from calc.quantities import DC_KINDS, MEASURES, RUNNING_STATES
from rules.knowledge import Fault, Knowledge, Refinement

IDS = yaml.safe_load(Path(__file__).with_name("case_sheet_ids.yaml").read_text(encoding="utf-8"))


def missing(ids: list[str], kind: str, knowledge: Knowledge) -> list[str]:
    """Faults that a kind does not have."""
    return [fault for fault in ids if kind not in knowledge.faults[fault].odds]


def test_every_fault_of_a_three_phase_motor_is_known(knowledge: Knowledge) -> None:
    assert missing(IDS["three_phase_faults"], "induction_3ph", knowledge) == []


def test_every_fault_of_a_single_phase_motor_is_known(knowledge: Knowledge) -> None:
    assert missing(IDS["single_phase_faults"], "induction_1ph", knowledge) == []


def test_every_fault_of_a_dc_motor_belongs_to_a_dc_kind(knowledge: Knowledge) -> None:
    assert [fault for fault in IDS["dc_faults"] if not DC_KINDS & set(knowledge.faults[fault].odds)] == []


def test_the_further_faults_stay_rare(knowledge: Knowledge) -> None:
    for fault in IDS["further_faults"]:
        assert 0.0 < max(knowledge.faults[fault].odds.values()) <= 0.2


def test_only_magnets_are_demagnetised_and_only_a_compound_motor_has_a_series_field_to_reverse(
    knowledge: Knowledge,
) -> None:
    assert set(knowledge.faults["demagnetised_magnets"].odds) == {"dc_permanent_magnet"}
    assert set(knowledge.faults["reversed_series_field"].odds) == {"dc_compound"}
    assert "dc_permanent_magnet" not in knowledge.faults["open_field"].odds


def test_every_cause_stands_within_its_fault(knowledge: Knowledge) -> None:
    found = {fault: {part.id for part in knowledge.faults[fault].within} for fault in IDS["causes"]}
    assert found == {fault: set(causes) for fault, causes in IDS["causes"].items()}


def test_every_observation_and_complaint_of_the_case_sheet_is_known(knowledge: Knowledge) -> None:
    assert set(IDS["observations"]) <= set(knowledge.observations)
    assert set(IDS["complaints"]) == set(knowledge.complaints)


def test_the_complaints_that_mean_stop_are_shock_and_smoke(knowledge: Knowledge) -> None:
    assert {c.id for c in knowledge.complaints.values() if c.stop} == {"shock_from_frame", "smoke_or_burning"}


def test_every_measure_has_leads(knowledge: Knowledge) -> None:
    assert set(MEASURES) == set(knowledge.readings)
    assert all(state.leads for rule in knowledge.readings.values() for state in rule.states.values())


def test_a_stall_is_never_proposed_and_neither_is_a_helped_start(knowledge: Knowledge) -> None:
    stalled = [r.states["stalled"] for r in knowledge.readings.values() if "stalled" in r.states]
    assert stalled
    assert not any(state.proposed for state in stalled)
    assert not knowledge.observations["starts_if_helped"].proposed


def test_an_isolated_reading_of_a_winding_warns_of_what_is_stored(knowledge: Knowledge) -> None:
    for measure in ("main_resistance", "auxiliary_resistance", "run_capacitance", "start_capacitance"):
        assert "capacitor_charge" in knowledge.readings[measure].states["isolated"].hazards
    for rule in knowledge.readings.values():
        if "insulation" in rule.id:
            assert "insulation_test_voltage" in rule.states["isolated"].hazards


def test_an_uncoupled_reading_on_a_dc_machine_names_the_series_motor(knowledge: Knowledge) -> None:
    for measure in ("armature_voltage", "armature_current", "ripple_voltage", "ripple_frequency"):
        assert "series_runaway" in knowledge.readings[measure].states["no_load"].hazards


def test_no_energised_reading_of_volts_hides_that_it_is_live(knowledge: Knowledge) -> None:
    for measure in ("supply_voltage", "incoming_voltage", "armature_voltage", "field_voltage", "pole_drop"):
        for state, how in knowledge.readings[measure].states.items():
            if state in RUNNING_STATES:
                assert "live_parts" in how.hazards, (measure, state)


def test_a_healthy_machine_is_the_most_likely_before_anything_is_read(knowledge: Knowledge) -> None:
    for kind in ("induction_3ph", "induction_1ph", *DC_KINDS):
        odds = {f.id: f.odds[kind] for f in knowledge.faults.values() if kind in f.odds}
        assert max(odds, key=odds.__getitem__) == "healthy"
        assert 0.1 < odds["healthy"] / sum(odds.values()) < 0.5


def test_no_chance_is_a_certainty(knowledge: Knowledge) -> None:
    for fault in knowledge.faults.values():
        holders: tuple[Fault | Refinement, ...] = (fault, *fault.within)
        for holder in holders:
            chances = [*holder.observations.values(), *holder.complaints.values()]
            assert all(0.005 <= chance <= 0.995 for chance in chances), holder.id


def test_complaints_of_a_fault_leave_room_for_the_unlisted(knowledge: Knowledge) -> None:
    for fault in knowledge.faults.values():
        for kind in fault.odds:
            assert sum(fault.for_kind(kind).complaints.values()) < 0.99, (fault.id, kind)


def test_the_causes_of_a_fault_share_it_whole_on_every_kind(knowledge: Knowledge) -> None:
    for fault in knowledge.faults.values():
        for kind in fault.odds:
            shares = [part.share for part in fault.for_kind(kind).within]
            assert not shares or sum(shares) == pytest.approx(1.0), (fault.id, kind)


def test_a_single_phase_motor_cannot_be_stuck_in_star(knowledge: Knowledge) -> None:
    parts = {part.id for part in knowledge.faults["overload"].for_kind("induction_1ph").within}
    assert "stuck_in_star" not in parts
    assert "process_overload" in parts


def test_what_a_shorted_or_open_winding_needs_is_never_energising(knowledge: Knowledge) -> None:
    for fault in (
        "turn_short",
        "phase_to_phase_short",
        "ground_fault",
        "open_winding",
        "open_field",
        "jammed_shaft",
    ):
        assert knowledge.faults[fault].forbids_energising, fault
