"""The examples of the faults, and the causes inside a fault, weighed by the whole engine."""

from __future__ import annotations

import pytest

from calc.sheet_io import sheet_from_plain
from rules.diagnosing import diagnose
from rules.knowledge import Fault, Knowledge

from .makers import shipped

# A plain motor, a DC machine and a separately ventilated one; values of common practice.
PLAIN = {
    "kind": "induction_3ph",
    "nameplate": {
        "power": "7.5 kW",
        "voltage": "400 V",
        "current": "14.9 A",
        "frequency": "50 Hz",
        "speed": "1455 rpm",
        "connection": "delta",
    },
}
VENTILATED = {
    "kind": "dc_separately_excited",
    "nameplate": {"power": "15 kW", "voltage": "400 V", "current": "43 A", "speed": "1500 rpm"},
}


def sheets(*, leads: bool) -> list[object]:
    """Every example of one sense, named by its sentence."""
    return [
        pytest.param(fault, example.sheet, id=f"{fault.id}: {example.says}")
        for fault in shipped().faults.values()
        for example in fault.examples
        if example.leads is leads
    ]


@pytest.mark.system
@pytest.mark.parametrize(("fault", "sheet"), sheets(leads=True))
def test_evidence_leads_to_its_fault(knowledge: Knowledge, fault: Fault, sheet: dict[str, object]) -> None:
    answer = diagnose(sheet_from_plain(sheet, file=fault.id), knowledge=knowledge)
    assert answer.faults[0].id == fault.id


@pytest.mark.system
@pytest.mark.parametrize(("fault", "sheet"), sheets(leads=False))
def test_evidence_against_a_fault_does_not_lead_to_it(
    knowledge: Knowledge, fault: Fault, sheet: dict[str, object]
) -> None:
    answer = diagnose(sheet_from_plain(sheet, file=fault.id), knowledge=knowledge)
    assert answer.faults[0].id != fault.id


BALANCED = {
    "measure": "winding_resistance",
    "state": "isolated",
    "value": ["1.06 ohm", "1.07 ohm", "1.06 ohm"],
    "temperature": "22 degC",
}
CHEAP = [
    (
        "fuse_blown",
        PLAIN,
        "hums_will_not_turn",
        {"fuse_blown": "yes", "hums": "yes", "shaft_turns_freely": "yes"},
    ),
    (
        "contactor_pole_open",
        PLAIN,
        "hums_will_not_turn",
        {"fuse_blown": "no", "contacts_burnt": "yes", "hums": "yes", "shaft_turns_freely": "yes"},
    ),
    (
        "protector_open",
        PLAIN,
        "will_not_start",
        {"contactor_pulls_in": "no", "overload_tripped": "yes", "hums": "no"},
    ),
    (
        "control_circuit_open",
        PLAIN,
        "will_not_start",
        {
            "contactor_pulls_in": "no",
            "overload_tripped": "no",
            "breaker_tripped": "no",
            "fuse_blown": "yes",
            "hums": "no",
        },
    ),
    (
        "interlock_open",
        PLAIN,
        "will_not_start",
        {
            "contactor_pulls_in": "no",
            "overload_tripped": "no",
            "breaker_tripped": "no",
            "fuse_blown": "no",
            "burnt_smell": "no",
            "hums": "no",
        },
    ),
    ("blower_stopped", VENTILATED, "runs_hot", {"cooling_fan_turns": "no", "cooling_air_blocked": "no"}),
]


@pytest.mark.parametrize(("cause", "machine", "complaint", "seen"), CHEAP, ids=[case[0] for case in CHEAP])
def test_a_look_at_the_gear_tells_the_cause(
    knowledge: Knowledge, cause: str, machine: dict[str, object], complaint: str, seen: dict[str, str]
) -> None:
    """Fuse, flag, contactor and fan are told apart before anything is uncoupled (common practice)."""
    readings = [BALANCED] if machine is PLAIN else []
    sheet = {
        "format": "1",
        "machine": machine,
        "complaint": complaint,
        "readings": readings,
        "observations": seen,
    }
    answer = diagnose(sheet_from_plain(sheet, file=cause), knowledge=knowledge)
    assert answer.faults[0].within[0].id == cause
