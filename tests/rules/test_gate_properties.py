"""What must hold of the gate whatever stands in a sheet or in a rule file."""

import math

import msgspec
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from calc.quantities import ENERGISED_STATES, KINDS, MEASURES, STATES
from calc.sheet import CaseSheet, Machine, Nameplate, Reading, Supply, Value
from rules.gate import gate
from rules.gate_checks import CHECKS
from rules.knowledge import Knowledge

from .makers import shipped

INSULATION = [
    "insulation_resistance", "insulation_resistance_30s", "insulation_resistance_10min",
    "insulation_between_phases", "cable_insulation_resistance", "field_insulation_resistance",
]  # fmt: skip
KNOWN = shipped()
SETTINGS = settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.too_slow])

numbers = st.one_of(
    st.floats(allow_nan=True, allow_infinity=True),
    st.sampled_from([0.0, -1.0, 1e6, 999_999.0, 350e6, 5e9, 1.9, 400.0, 14.9, math.nan, math.inf]),
)


@st.composite
def values(draw, number=numbers):
    return Value(
        text=draw(st.text(max_size=8)),
        number=draw(number),
        resolution=draw(st.floats(0.0, 10.0)),
        kind=draw(st.sampled_from(["exact", "open", "above", "below", "range", "missing"])),
    )


@st.composite
def readings(draw):
    measure = draw(st.sampled_from([*MEASURES, *INSULATION * 3, "no_such_measure"]))
    return Reading(
        measure=measure,
        state=draw(st.sampled_from([*STATES, "isolated", "isolated", "asleep"])),
        values=tuple(draw(st.lists(values(), max_size=4))),
        temperature=draw(st.none() | values()),
    )


low_readings = st.builds(
    lambda measure, state, text, number: Reading(
        measure=measure, state=state, values=(Value(text=text, number=number),)
    ),
    st.sampled_from(INSULATION),
    st.sampled_from(list(STATES)),
    st.text(max_size=8),
    st.floats(max_value=1e6, exclude_max=True, allow_nan=False),
)

plates = st.fixed_dictionaries(
    {}, optional={name: values() for name in ("power", "voltage", "current", "frequency", "speed", "poles")}
).map(lambda fields: Nameplate(**fields))

machines = st.builds(
    Machine,
    kind=st.sampled_from([*KINDS, "no_such_kind"]),
    nameplate=plates,
    supply=st.builds(Supply, source=st.none() | st.sampled_from(["mains", "inverter", "battery"])),
    load_type=st.none() | st.sampled_from(["hoist", "fan"]),
    starter=st.none() | st.sampled_from(["direct", "star_delta"]),
)

sheets = st.builds(
    CaseSheet,
    machine=machines,
    complaint=st.sampled_from([*KNOWN.complaints, "a_complaint_of_the_shop"]),
    readings=st.lists(readings(), max_size=8).map(tuple),
    observations=st.dictionaries(st.sampled_from([*KNOWN.observations, "other"]), st.booleans(), max_size=12),
)

suspects = st.dictionaries(st.sampled_from(list(KNOWN.faults)), st.floats(allow_nan=True), max_size=4)


@st.composite
def mutated_rules(draw) -> Knowledge:
    """The shipped rules after somebody has torn holes into gate lines, limits and complaints."""
    gates = {}
    for name, rule in KNOWN.gates.items():
        if draw(st.booleans()):
            gates[name] = msgspec.structs.replace(
                rule,
                guards=tuple(draw(st.lists(st.sampled_from([*STATES, "asleep"]), max_size=3))),
                clears=tuple(draw(st.lists(st.sampled_from([*CHECKS, "looks_nice"]), max_size=2))),
                asks=tuple(
                    draw(st.lists(st.sampled_from([*rule.asks, "@", "speed@loaded", "x"]), max_size=2))
                ),
                found_running_clears=True,
                overload_trip_clears=True,
                suspects={},
            )
    limits = {
        name: msgspec.structs.replace(limit, shuts=(), status="retired") if draw(st.booleans()) else limit
        for name, limit in KNOWN.limits.items()
        if not name.startswith("starts") and draw(st.booleans())
    }
    complaints = {
        name: msgspec.structs.replace(entry, stop=False, runs="yes")
        for name, entry in KNOWN.complaints.items()
    }
    return msgspec.structs.replace(KNOWN, gates=gates, limits=limits, complaints=complaints)


def all_shut(sheet, knowledge, odds=None) -> bool:
    state = gate(sheet, knowledge, suspects=odds)
    return all(state.forbids(name) for name in ENERGISED_STATES) and state.energise.gate == "shut"


@SETTINGS
@given(sheets, low_readings, st.integers(0, 8), suspects)
def test_low_insulation_on_record_shuts_every_energised_state_whatever_else_is_there(sheet, low, at, odds):
    with_low = msgspec.structs.replace(sheet, readings=(*sheet.readings[:at], low, *sheet.readings[at:]))
    assert all_shut(with_low, KNOWN, odds)


@SETTINGS
@given(sheets, low_readings, mutated_rules())
def test_no_rule_file_can_open_the_gate_over_low_insulation(sheet, low, knowledge):
    assert all_shut(msgspec.structs.replace(sheet, readings=(*sheet.readings, low)), knowledge)


@SETTINGS
@given(sheets, st.sampled_from(["shock_from_frame", "smoke_or_burning"]), mutated_rules(), suspects)
def test_no_rule_file_can_open_the_gate_over_a_complaint_that_means_stop(sheet, complaint, knowledge, odds):
    stopped = msgspec.structs.replace(sheet, complaint=complaint)
    assert all_shut(stopped, knowledge, odds)
    assert all_shut(stopped, KNOWN, odds)


@SETTINGS
@given(sheets, suspects)
def test_odds_only_ever_shut(sheet, odds):
    without, with_odds = gate(sheet, KNOWN), gate(sheet, KNOWN, suspects=odds)
    for state in STATES:
        assert with_odds.forbids(state) or not without.forbids(state)


@SETTINGS
@given(sheets)
def test_the_whole_answer_agrees_with_its_states(sheet):
    state = gate(sheet, KNOWN)
    is_open = state.energise.gate == "no_finding_forbids"
    assert is_open is not any(state.forbids(name) for name in ("standby", "starting", "loaded"))
    assert not (is_open and state.energise.because)
    assert all(state.lines_for(name) for name in ENERGISED_STATES if state.forbids(name))
    assert state.forbids("stalled")


@SETTINGS
@given(sheets, suspects)
def test_what_forbids_is_said_once_and_nothing_that_forbids_is_left_out(sheet, odds):
    energise = gate(sheet, KNOWN, suspects=odds).energise
    assert len(set(energise.because)) == len(energise.because)
    said = {line.because for line in energise.lines if line.status == "forbids"}
    assert all(energise.because) and set(energise.because) <= said
    standby = [one for one in gate(sheet, KNOWN, suspects=odds).shut if one.states & {"standby", "loaded"}]
    assert {one.line.because for one in standby if one.line.status == "forbids"} <= set(energise.because)


@SETTINGS
@given(sheets)
def test_a_stop_or_a_no_is_never_outvoted_by_more_readings(sheet):
    answers = {**sheet.observations, "shaft_turns_freely": False, "turns_freely_uncoupled": False}
    state = gate(msgspec.structs.replace(sheet, observations=answers), KNOWN)
    assert all(state.forbids(name) for name in ENERGISED_STATES - {"standby"})


@SETTINGS
@given(sheets, mutated_rules())
def test_no_sheet_and_no_rule_raises(sheet, knowledge):
    state = gate(sheet, knowledge)
    assert state.energise.gate in {"shut", "no_finding_forbids"}


@SETTINGS
@given(sheets)
def test_the_same_sheet_gets_the_same_answer(sheet):
    assert gate(sheet, KNOWN) == gate(sheet, KNOWN)
