"""What is proposed next: only what the gate, the state, the kit and the record allow."""

from functools import cache

import msgspec
import pytest

from calc.errors import InputError
from calc.kinds import MODELS
from calc.quantities import DC_KINDS, ENERGISED_STATES, RUNNING_STATES
from calc.sheet_io import sheet_from_plain
from rules.gate import gate, situation_of
from rules.weigh.settings import weighing
from tests.rules.makers import case, insulation, reading, shipped, windings

from .cases import answer, kits, nonsense, simulated

KINDS_HERE = sorted(MODELS)
STOPS = ("shock_from_frame", "smoke_or_burning")


@cache
def sheets():
    """Some fifty sheets of anything, all kinds with a model."""
    found = []
    for seed in range(5000, 5070):
        try:
            found.append(sheet_from_plain(nonsense(seed, wild=0.0, kinds=tuple(KINDS_HERE))))
        except InputError:
            continue
    return found


@cache
def answered():
    return [(sheet, answer(sheet)) for sheet in sheets()]


def states_of(item):
    """States in which an item could be had."""
    if item.state:
        return {item.state}
    states = set(shipped().observations[item.observation].states)
    return {"isolated"} if states & {"any", "isolated"} else states


def gate_of(sheet, found):
    return gate(sheet, shipped(), suspects={f.id: f.probability for f in found.faults})


def test_the_sample_is_worth_asking():
    assert len(answered()) > 30
    assert sum(len(found.next) for _, found in answered()) > 200


def test_nothing_is_proposed_in_a_state_that_the_gate_forbids():
    for sheet, found in answered():
        state = gate_of(sheet, found)
        for item in found.next:
            assert any(not state.forbids(name) for name in states_of(item)), (sheet, item.key)


def test_nothing_is_proposed_that_needs_a_start_which_the_gate_forbids():
    for sheet, found in answered():
        state = gate_of(sheet, found)
        for item in found.next:
            # What runs with its load now is read as it runs; every other running state takes a start.
            runs_so = item.state == "loaded" and situation_of(sheet, shipped()) == "found_running"
            must_start = (
                item.state in RUNNING_STATES
                and not runs_so
                and not any(r.state == item.state for r in sheet.readings)
            )
            assert not (must_start and state.forbids("starting")), (sheet.complaint, item.key)


@pytest.mark.parametrize("kind", KINDS_HERE)
@pytest.mark.parametrize("complaint", STOPS)
def test_after_a_complaint_that_means_stop_nothing_energised_is_proposed(kind, complaint):
    found = answer(case(complaint, kind=kind, nameplate={}))
    assert found.energise.gate == "shut"
    for item in found.next:
        assert states_of(item) - ENERGISED_STATES, item.key


def test_over_low_insulation_nothing_energised_is_proposed_whatever_else_is_known():
    for sheet in sheets()[::4]:
        low = msgspec.structs.replace(sheet, readings=(*sheet.readings, insulation("0.7 Mohm")))
        for item in answer(low).next:
            assert states_of(item) - ENERGISED_STATES, (low, item.key)


def test_nothing_is_proposed_twice():
    for sheet, found in answered():
        taken = {r.key for r in sheet.readings} | set(sheet.observations)
        keys = [item.key for item in found.next]
        assert not taken & set(keys)
        assert len(set(keys)) == len(keys)


def test_nothing_is_proposed_that_the_kit_cannot_read():
    rules = shipped().readings
    for sheet, found in answered():
        for item in found.next:
            if item.measure and sheet.kit is not None:
                assert (set(sheet.kit) | {"eyes"}) & set(rules[item.measure].instruments), item.key


@pytest.mark.parametrize("tool", sorted(kits()))
def test_one_tool_alone_is_all_that_is_asked_for(tool):
    sheet = msgspec.structs.replace(case("runs_hot"), kit=(tool,))
    for item in answer(sheet).next:
        assert not item.measure or {tool, "eyes"} & set(shipped().readings[item.measure].instruments)


def test_an_empty_kit_leaves_eyes_and_ears():
    sheet = msgspec.structs.replace(case("noisy_or_vibrating"), kit=())
    found = answer(sheet).next
    assert found
    assert all(not i.measure or "eyes" in shipped().readings[i.measure].instruments for i in found)


def test_a_stall_is_never_arranged():
    assert not [i for _, found in answered() for i in found.next if i.state == "stalled"]


def test_a_series_motor_is_never_uncoupled():
    for sheet, found in answered():
        if sheet.machine.kind == "dc_series":
            assert not [i for i in found.next if i.state == "no_load"]


def test_only_measures_of_the_kind_are_proposed():
    for sheet, found in answered():
        for item in found.next:
            if item.measure:
                rule = shipped().readings[item.measure]
                assert {"any", sheet.machine.kind} & set(rule.kinds), item.key
                assert sheet.machine.kind in DC_KINDS or not item.measure.startswith(
                    ("armature", "field", "brush")
                )


def test_every_proposal_says_where_the_leads_go_what_it_costs_and_what_it_brings():
    for _, found in answered():
        for item in found.next:
            assert item.leads
            assert item.minutes > 0.0
            assert item.why
            tells = item.gain_bits >= weighing().proposal.least_bits * 0.99
            assert tells or item.why.startswith("needed before energising"), item.key


def test_it_stops_when_nothing_is_worth_its_minutes():
    readings = [*simulated(2, "open_phase").readings, insulation("900 Mohm")]
    found = answer(msgspec.structs.replace(simulated(2, "open_phase"), readings=tuple(readings)))
    assert found.faults[0].probability > 0.97
    assert len(found.next) <= 3


def test_a_motor_that_does_not_start_is_first_looked_at_where_it_costs_little():
    found = answer(case("will_not_start"))
    assert found.next
    assert found.next[0].minutes <= 5.0
    assert all(states_of(item) & {"isolated", "standby"} for item in found.next[:3])


def test_a_reading_brings_the_values_to_expect():
    sheet = case(
        "trips_under_load", insulation("350 Mohm"), windings(), reading("speed", "loaded", "1455 rpm")
    )
    asked = [item for item in answer(sheet).next if item.measure == "line_current"]
    assert asked
    assert all("A" in item.expect for item in asked)


def test_a_proposed_reading_tells_two_suspects_apart_and_expects_different_values_of_them():
    proposed = 0
    for _, found in answered():
        names = {f.name for f in found.faults}
        for item in found.next:
            if not item.gain_bits or item.observation:
                continue
            parts = dict(part.split(": ", 1) for part in item.expect.split("; ") if ": " in part)
            one, other = parts
            assert item.why == f"tells {one} from {other}"
            assert {one, other} <= names
            assert parts[one] != parts[other], item.key
            proposed += 1
    assert proposed > 20
