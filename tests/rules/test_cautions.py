"""Hazards are shown where they apply, each once."""

import pytest

from calc.quantities import KINDS, MEASURES, STATES
from rules.cautions import cautions_for

from .makers import case


def called(knowledge, sheet, **more) -> set[str]:
    found = cautions_for(sheet, knowledge, **({"states": (), "faults": ()} | more))
    by_text = {hazard.precaution: hazard.id for hazard in knowledge.hazards.values()}
    return {by_text[text] for text in found}


def test_a_quiet_machine_calls_for_nothing(knowledge):
    assert called(knowledge, case("routine_check")) == set()


@pytest.mark.parametrize(
    ("more", "hazard"),
    [
        ({"states": ["isolated"]}, "unexpected_energising"),
        ({"states": ["loaded"]}, "rotating_parts"),
        ({"states": ["isolated"], "measures": ["insulation_resistance"]}, "insulation_test_voltage"),
        ({"measures": ["thermistor_resistance"]}, "thermistor_voltage"),
        ({"states": ["standby"], "measures": ["supply_voltage"]}, "arc_flash"),
        ({"hazards": ["hot_surface"]}, "hot_surface"),
        ({"faults": ["turn_short"]}, "hot_surface"),
    ],
)
def test_a_state_a_measure_a_fault_or_a_name_calls_for_its_hazard(knowledge, more, hazard):
    assert hazard in called(knowledge, case("routine_check"), **more)


@pytest.mark.parametrize(
    ("sheet", "hazard", "states"),
    [
        (case("shock_from_frame"), "shock_or_smoke", ()),
        (case("routine_check", load_type="hoist"), "moving_load", ()),
        (case("routine_check", hazardous_area=True), "explosive_atmosphere", ()),
        (case("routine_check", thermal_protector="automatic"), "automatic_restart", ()),
        (case("routine_check", brake=True), "brake_released", ("isolated",)),
        (case("routine_check", kind="dc_permanent_magnet"), "magnet_rotor_live", ("spun",)),
        (case("routine_check", kind="dc_series"), "series_runaway", ("loaded",)),
        (case("routine_check", kind="dc_shunt"), "field_loss_overspeed", ("starting",)),
        (case("after_repair"), "first_run", ()),
    ],
)
def test_the_machine_itself_calls_for_its_hazard(knowledge, sheet, hazard, states):
    assert hazard in called(knowledge, sheet, states=states)
    assert hazard not in called(knowledge, case("routine_check"), states=states)


def test_charged_capacitors_belong_to_single_phase_motors(knowledge):
    asked = {"states": ["isolated"], "measures": ["run_capacitance"]}
    assert "capacitor_charge" in called(knowledge, case("routine_check", kind="induction_1ph"), **asked)


def test_each_hazard_is_shown_once_whatever_calls_for_it(knowledge):
    sheet = case("shock_from_frame", kind="dc_compound", load_type="hoist", hazardous_area=True)
    found = cautions_for(
        sheet, knowledge, states=list(STATES) * 2, faults=list(knowledge.faults),
        measures=list(MEASURES), hazards=list(knowledge.hazards),
    )  # fmt: skip
    assert len(found) == len(set(found)) == len(knowledge.hazards)


def test_unknown_ids_call_for_nothing(knowledge):
    nothing = called(
        knowledge, case("routine_check"), states=["x"], faults=["y"], measures=["z"], hazards=["w"]
    )
    assert nothing == set()


def test_every_hazard_can_be_called_for(knowledge):
    named = {h for fault in knowledge.faults.values() for h in fault.cautions}
    named |= {h for o in knowledge.observations.values() for h in o.hazards}
    named |= {h for rule in knowledge.readings.values() for how in rule.states.values() for h in how.hazards}
    for hazard in knowledge.hazards.values():
        by_itself = hazard.states or hazard.measures or hazard.faults or hazard.when
        assert by_itself or hazard.id in named, hazard.id
        assert "any" in hazard.kinds or set(hazard.kinds) <= set(KINDS)
