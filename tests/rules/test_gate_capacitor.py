"""29 CFR 1910.333(b)(2)(ii)(C): stored energy is discharged; capacitors come before the isolated readings."""

import pytest

from rules.answer import NextItem
from rules.cautions import with_hazards
from rules.gate import gate

from .makers import built, case, insulation, shipped, shop

KNOWN = shipped()
PLATE = {"power": "1.5 hp", "voltage": "230 V", "current": "8.4 A", "frequency": "60 Hz", "speed": "1725 rpm"}
LINE = "capacitor_discharged"


def line_of(sheet):
    """Return the line on capacitors, if the gate has it for this machine."""
    return next((line for line in gate(sheet, KNOWN).energise.lines if line.id == LINE), None)


def single_phase(complaint="hums_will_not_turn", *readings, **seen):
    return case(complaint, *readings, kind="induction_1ph", nameplate=PLATE, seen=seen)


def test_the_list_of_a_single_phase_machine_asks_for_its_capacitors():
    assert line_of(single_phase()).status == "needed"
    assert "discharged" in line_of(single_phase()).needs


def test_a_yes_clears_the_line_and_a_no_forbids():
    assert line_of(single_phase(capacitor_discharged=True)).status == "cleared"
    assert line_of(single_phase(capacitor_discharged=False)).status == "forbids"


@pytest.mark.parametrize("kind", ["induction_3ph", "dc_shunt", "dc_permanent_magnet"])
def test_no_other_machine_is_asked_for_motor_capacitors(kind):
    assert line_of(case("runs_hot", kind=kind, plate=False)) is None


def test_discharged_capacitors_open_nothing_energised_and_shut_nothing_energised():
    before, after = gate(single_phase(), KNOWN), gate(single_phase(capacitor_discharged=True), KNOWN)
    for state in ("standby", "stalled", "starting", "no_load", "light_load", "loaded"):
        assert before.forbids(state) == after.forbids(state)
    assert LINE not in before.energise.needs


def test_isolated_readings_stay_proposed_for_discharging_is_their_first_step():
    assert not gate(single_phase(), KNOWN).forbids("isolated")


@pytest.mark.parametrize(
    "measure",
    [
        rule.id
        for rule in KNOWN.readings.values()
        if "isolated" in rule.states
        and {"any", "induction_1ph"} & set(rule.kinds)
        and any(word in rule.id for word in ("resistance", "insulation", "capacitance"))
        and rule.id != "thermistor_resistance"
    ],
)
def test_every_isolated_reading_at_the_terminals_of_a_single_phase_machine_names_the_line(measure):
    item = with_hazards(NextItem(measure=measure, state="isolated"), single_phase(), KNOWN)
    assert LINE in KNOWN.readings[measure].needs
    assert "capacitor_charge" in item.hazards or measure == "cable_insulation_resistance"


def test_every_line_that_a_reading_needs_guards_the_isolated_machine():
    for rule in KNOWN.readings.values():
        for need in rule.needs:
            assert "isolated" in KNOWN.gates[need].guards, rule.id


def test_insulation_alone_does_not_clear_the_line():
    assert line_of(single_phase("hums_will_not_turn", insulation())).status == "needed"


def test_a_shop_that_leaves_the_line_out_of_a_reading_is_told_so(tmp_path):
    own = """readings:
- id: run_capacitance
  name: Run capacitor
  source: own standard
  kinds: [induction_1ph]
  instruments: [capacitance_meter]
  accuracy_percent: 2
  states:
    isolated: {leads: Across its terminals., minutes: 5, hazards: [capacitor_charge]}
"""
    knowledge, problems = built(shop(tmp_path, own))
    assert problems == []
    assert any(LINE in said for said in knowledge.loosened)
