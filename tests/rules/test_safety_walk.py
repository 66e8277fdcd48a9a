"""Every complaint, kind, state and finding, walked as the person who could be hurt."""

from functools import cache

import msgspec
import pytest

from calc.quantities import ENERGISED_STATES, KINDS, MEASURES, RUNNING_STATES
from rules.answer import Diagnosis, NextItem
from rules.cautions import cautions_for, with_hazards
from rules.diagnosing import diagnose
from rules.gate import gate

from .makers import PLATE, case, insulation, reading, shipped, windings

KNOWN = shipped()
LIVE = sorted(ENERGISED_STATES)
DC_PLATE = {"power": "7.5 kW", "voltage": "240 V", "current": "37 A", "speed": "1150 rpm"}
FIELD = {"field_voltage": "240 V", "field_current": "1.2 A"}
SMALL = {
    "power": "0.75 kW",
    "voltage": "230 V",
    "current": "5.2 A",
    "frequency": "50 Hz",
    "speed": "1420 rpm",
}
PLATES = {
    "induction_3ph": PLATE,
    "induction_1ph": SMALL | {"run_capacitor": "25 uF"},
    "dc_shunt": DC_PLATE | FIELD,
    "dc_separately_excited": DC_PLATE | FIELD,
    "dc_compound": DC_PLATE | FIELD,
    "dc_series": DC_PLATE,
    "dc_permanent_magnet": DC_PLATE,
}
FIELD_KINDS = ("dc_shunt", "dc_separately_excited", "dc_compound")
CLEARED = {"shaft_turns_freely": True, "guards_fitted": True, "load_held": True, "repair_retested": True,
           "overload_tripped": True, "trip_cause_found": True}  # fmt: skip
EARTH_FAULTS = (insulation("0.3 Mohm"), reading("cable_insulation_resistance", "isolated", "20 kohm"))
TWO_WINDINGS = (
    reading("main_resistance", "isolated", "3.1 ohm"),
    reading("auxiliary_resistance", "isolated", "9 ohm"),
)
DC_WINDINGS = (
    reading("armature_resistance", "isolated", "0.47 ohm"),
    reading("field_resistance", "isolated", "166 ohm"),
)


def complaints_of(kind: str) -> list[str]:
    """What may be wrong with a machine of a kind."""
    return [c.id for c in KNOWN.complaints.values() if "any" in c.kinds or kind in c.kinds]


EVERY = [(kind, complaint) for kind in KINDS for complaint in complaints_of(kind)]
MODELLED = [(kind, complaint) for kind in PLATES for complaint in complaints_of(kind)]


def cleared(kind: str, complaint: str, *more, **machine):
    """A sheet on which everything that the gate asks for stands on record, and something more."""
    read = {"induction_3ph": (windings(),), "induction_1ph": TWO_WINDINGS}.get(kind, DC_WINDINGS)
    return case(
        complaint, insulation(), *read, *more, kind=kind, seen=CLEARED, nameplate=PLATES.get(kind, PLATE),
        **machine,
    )  # fmt: skip


@cache
def answer(kind: str, complaint: str, **machine) -> Diagnosis:
    """The whole answer for a machine of which nothing was read yet."""
    return diagnose(case(complaint, kind=kind, nameplate=PLATES.get(kind, PLATE), **machine), knowledge=KNOWN)


def text_of(hazard: str) -> str:
    return KNOWN.hazards[hazard].precaution


def taken_in(item: NextItem, states) -> bool:
    """Whether an item of what to read next is bound to one of some states."""
    if item.state is not None:
        return item.state in states
    return bool(set(KNOWN.observations[item.observation].states) & set(states))


def open_states(sheet, **suspects) -> set[str]:
    state = gate(sheet, KNOWN, suspects=suspects)
    return {name for name in (*LIVE, "spun") if not state.forbids(name)}


# ------------------------------------------------------------------ what the gate keeps shut
@pytest.mark.parametrize("kind", KINDS)
def test_an_earth_fault_on_record_or_suspected_leaves_nothing_that_carries_voltage(kind):
    for complaint in complaints_of(kind):
        for low in EARTH_FAULTS:
            assert open_states(cleared(kind, complaint, low)) == set(), (complaint, low.measure)
        for odds in ({"ground_fault": 0.35}, {"ground_fault+overload": 0.35}):
            assert open_states(cleared(kind, complaint), **odds) == set(), (complaint, odds)


@pytest.mark.parametrize("kind", KINDS)
def test_an_earth_fault_trip_leaves_nothing_until_insulation_is_read(kind):
    assert open_states(case("earth_fault_trip", kind=kind, seen=CLEARED)) == set()


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("complaint", ["shock_from_frame", "smoke_or_burning"])
def test_a_stop_leaves_nothing_whatever_else_is_cleared(kind, complaint):
    assert open_states(cleared(kind, complaint)) == set()


@pytest.mark.parametrize("kind", FIELD_KINDS)
def test_a_lost_field_on_record_or_suspected_leaves_the_armature_off(kind):
    lost = [
        reading("field_resistance", "isolated", "open"),
        reading("field_current", "loaded", "0.01 A"),
        reading("field_voltage", "loaded", "0 V"),
        reading("speed", "loaded", "2700 rpm"),
    ]
    for complaint in complaints_of(kind):
        for found in lost:
            assert open_states(cleared(kind, complaint, found)) <= {"standby", "spun"}, (complaint, found.key)
        for odds in ({"open_field": 0.35}, {"open_field+overload": 0.35}):
            assert open_states(cleared(kind, complaint), **odds) <= {"standby", "spun"}, (complaint, odds)


@pytest.mark.parametrize("kind", FIELD_KINDS)
def test_a_field_that_nobody_read_leaves_a_standing_machine_off(kind):
    for complaint in ("will_not_start", "trips_instantly", "after_repair", "blows_fuses"):
        assert open_states(case(complaint, insulation(), kind=kind, seen=CLEARED)) <= {"standby", "spun"}


@pytest.mark.parametrize("kind", FIELD_KINDS)
def test_a_machine_that_ran_fast_is_not_started_again_before_its_field_is_read(kind):
    assert "starting" not in open_states(case("runs_fast", insulation(), kind=kind, seen=CLEARED))
    assert "starting" in open_states(cleared(kind, "runs_fast"))


@pytest.mark.parametrize("kind", ["dc_series", "universal"])
def test_a_series_motor_is_never_run_uncoupled(kind):
    for complaint in complaints_of(kind):
        assert "no_load" not in open_states(cleared(kind, complaint)), complaint
        assert "no_load" not in open_states(
            cleared(kind, complaint, reading("speed", "no_load", "3000 rpm"))
        ), complaint


def test_a_series_motor_that_runs_away_is_not_read_running():
    for complaint in complaints_of("dc_series"):
        found = cleared("dc_series", complaint, reading("speed", "loaded", "2700 rpm"))
        assert open_states(found) <= {"standby", "spun"}, complaint


@pytest.mark.parametrize(("kind", "complaint"), EVERY)
def test_a_hoist_is_not_energised_before_its_load_is_held(kind, complaint):
    hanging = cleared(kind, complaint, load_type="hoist")
    seen = {name: yes for name, yes in hanging.observations.items() if name != "load_held"}
    for answers in (seen, seen | {"load_held": False}):
        assert open_states(msgspec.structs.replace(hanging, observations=answers)) == set()


@pytest.mark.parametrize("kind", KINDS)
def test_a_stall_is_never_arranged(kind):
    assert all("stalled" not in open_states(cleared(kind, complaint)) for complaint in complaints_of(kind))


# ------------------------------------------------------------------ what stands before what is proposed
@pytest.mark.parametrize(("kind", "complaint"), MODELLED)
def test_nothing_is_proposed_before_its_cautions(kind, complaint):
    found = answer(kind, complaint)
    shut = gate(case(complaint, kind=kind, nameplate=PLATES[kind]), KNOWN,
                suspects={f.id: f.probability for f in found.faults})  # fmt: skip
    for item in found.next:
        assert item.state is None or not shut.forbids(item.state), item.key
        assert {text_of(hazard) for hazard in item.hazards} <= set(found.cautions), item.key
        if taken_in(item, {"isolated"}):
            assert text_of("unexpected_energising") in found.cautions
        if item.state in {"starting", *RUNNING_STATES}:
            assert text_of("rotating_parts") in found.cautions


def test_a_capacitor_is_discharged_before_any_winding_or_capacitor_is_read():
    measures = [m for m in MEASURES if m.endswith(("resistance", "capacitance")) or "insulation" in m]
    on_windings = {m for m in measures if MEASURES[m].suits("induction_1ph")} - {
        "thermistor_resistance", "cable_insulation_resistance",
    }  # fmt: skip
    assert {"main_resistance", "run_capacitance", "insulation_resistance"} <= on_windings
    sheet = case("routine_check", kind="induction_1ph")
    for measure in sorted(on_windings):
        item = with_hazards(NextItem(measure=measure, state="isolated"), sheet, KNOWN)
        assert "capacitor_charge" in item.hazards, measure
    assert "discharge" in text_of("capacitor_charge")


@pytest.mark.parametrize("kind", ["dc_permanent_magnet", "synchronous_permanent_magnet"])
def test_a_magnet_rotor_is_held_before_its_leads_are_touched(kind):
    for measure in ("armature_resistance", "winding_resistance", "insulation_resistance"):
        for state in ("isolated", "coasting", "spun"):
            item = with_hazards(NextItem(measure=measure, state=state), case("runs_hot", kind=kind), KNOWN)
            assert "magnet_rotor_live" in item.hazards
    assert text_of("magnet_rotor_live") in answer(kind, "will_not_start").cautions
    assert "hold the shaft" in text_of("magnet_rotor_live")


@pytest.mark.parametrize("kind", FIELD_KINDS)
def test_the_field_is_proved_before_a_reading_with_the_armature_live(kind):
    for state in ("starting", *sorted(RUNNING_STATES)):
        item = with_hazards(NextItem(measure="speed", state=state), case("runs_fast", kind=kind), KNOWN)
        assert "field_loss_overspeed" in item.hazards


@pytest.mark.parametrize("kind", PLATES)
@pytest.mark.parametrize(
    ("machine", "hazard"),
    [
        ({"hazardous_area": True}, "explosive_atmosphere"),
        ({"thermal_protector": "automatic"}, "automatic_restart"),
        ({"load_type": "hoist"}, "moving_load"),
    ],
    ids=["explosive atmosphere", "restarts by itself", "hanging load"],
)
def test_what_the_machine_stands_in_is_said_before_every_reading(kind, machine, hazard):
    for complaint in ("will_not_start", "runs_hot", "trips_under_load"):
        found = answer(kind, complaint, **machine)
        assert found.next
        assert text_of(hazard) in found.cautions
        assert all(hazard in item.hazards for item in found.next)


@pytest.mark.parametrize("kind", KINDS)
def test_an_insulation_tester_is_never_named_without_the_explosive_atmosphere(kind):
    for rule in KNOWN.readings.values():
        if "insulation_tester" in rule.instruments:
            assert all("explosive_atmosphere" in how.hazards for how in rule.states.values()), rule.id
    here = cautions_for(case("runs_hot", kind=kind, hazardous_area=True), KNOWN, states=(), faults=())
    assert text_of("explosive_atmosphere") in here


def test_whoever_is_told_to_command_a_start_is_told_that_it_may_run():
    told = [
        (entry.id, hazards)
        for entry, text, hazards in (
            *((o, o.how, o.hazards) for o in KNOWN.observations.values() if o.proposed),
            *((r, how.leads, how.hazards) for r in KNOWN.readings.values() for how in r.states.values()),
        )
        if "start is commanded" in text or "when commanded" in text or "start is given" in text
    ]
    assert {name for name, _ in told} >= {"control_voltage", "contactor_pulls_in"}
    assert [name for name, hazards in told if not {"commanded_start"} & set(hazards)] == []


# ------------------------------------------------------------------ what the texts ask for
def test_no_fault_asks_for_an_uncoupled_run_of_a_series_motor():
    for fault in KNOWN.faults.values():
        if "dc_series" not in fault.odds:
            continue
        assert not [key for key in fault.for_kind("dc_series").retest if key.endswith("@no_load")], fault.id
        for text in (fault.confirm, fault.remedy):
            if "uncoupled" in text.casefold() and "by hand" not in text:
                assert "series motor" in text, fault.id


def test_no_complaint_of_a_series_motor_begins_with_an_uncoupled_run():
    for complaint in complaints_of("dc_series"):
        first = KNOWN.complaints[complaint].first
        if "uncouple" in first:
            assert "series motor" in first or "where that is allowed" in first, complaint
