"""The shop's own confirmed cases shift odds and chances; they never open the gate."""

import msgspec
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from calc.quantities import STATES
from rules.diagnosing import diagnose
from rules.gate import gate
from rules.learned import Counts, shifts, with_counts
from rules.weigh.posterior import faults_of
from rules.weigh.settings import weighing

from .makers import case, insulation, shipped, windings
from .test_gate_properties import sheets

KNOWN = shipped()
KINDS = ("induction_3ph", "induction_1ph", "dc_shunt", "dc_series", "dc_permanent_magnet")
WEIGHT = weighing().learned_weight
SETTINGS = settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])

names = st.sampled_from(
    [*KNOWN.faults, *(part.id for fault in KNOWN.faults.values() for part in fault.within), "meteorite"]
)
cases = st.floats(0.0, 200.0)
answers = st.dictionaries(st.sampled_from([*KNOWN.observations, "unheard_of"]), st.tuples(cases, cases))
told = st.dictionaries(st.sampled_from([*KNOWN.complaints, "unheard_of"]), cases)
counts = st.builds(
    Counts,
    faults=st.dictionaries(names, cases, max_size=6),
    complaints=st.dictionaries(names, told, max_size=4),
    observations=st.dictionaries(names, answers, max_size=4),
)
kinds = st.sampled_from(KINDS)


def odds(knowledge, kind):
    return {fault.id: fault.odds[kind] for fault in faults_of(knowledge, kind)}


def shares(knowledge, kind):
    found = odds(knowledge, kind)
    return {fault: one / sum(found.values()) for fault, one in found.items()}


def without_odds(knowledge, kind):
    return [msgspec.structs.replace(fault, odds={}) for fault in faults_of(knowledge, kind)]


@pytest.mark.parametrize("kind", KINDS)
def test_without_counts_nothing_changes(kind):
    assert with_counts(KNOWN, kind, Counts()) is KNOWN
    assert with_counts(KNOWN, kind, Counts(faults={"overload": 0.0})) is KNOWN
    assert shifts(KNOWN, kind, Counts()) == ()


@given(kinds, st.dictionaries(st.sampled_from(["meteorite", "lightning"]), cases), told, answers)
def test_a_fault_that_is_not_known_changes_nothing(kind, faults, complaints, observations):
    unknown = Counts(
        faults=faults, complaints={"meteorite": complaints}, observations={"meteorite": observations}
    )
    assert with_counts(KNOWN, kind, unknown) is KNOWN


def test_a_kind_without_faults_is_left_alone():
    assert with_counts(KNOWN, "universal", Counts(faults={"overload": 9.0})) is KNOWN


@SETTINGS
@given(kinds, counts)
def test_odds_stay_a_distribution_on_the_shipped_scale(kind, given_counts):
    """The scale matters because "something else" has its starting odds on it."""
    before, after = odds(KNOWN, kind), odds(with_counts(KNOWN, kind, given_counts), kind)
    assert after.keys() == before.keys()
    assert all(one > 0.0 for one in after.values())
    assert sum(after.values()) == pytest.approx(sum(before.values()))


@SETTINGS
@given(kinds, counts)
def test_chances_stay_chances(kind, given_counts):
    for fault in faults_of(with_counts(KNOWN, kind, given_counts), kind):
        assert all(0.0 <= chance <= 1.0 for chance in fault.observations.values())
        assert all(0.0 <= chance <= 1.0 for chance in fault.complaints.values())
    for before, after in zip(
        faults_of(KNOWN, kind), faults_of(with_counts(KNOWN, kind, given_counts), kind), strict=True
    ):
        assert sum(after.complaints.values()) <= max(sum(before.complaints.values()), 1.0) + 1e-9


@SETTINGS
@given(kinds, counts)
def test_only_the_kind_that_was_counted_changes(kind, given_counts):
    after = with_counts(KNOWN, kind, given_counts)
    for other in set(KINDS) - {kind}:
        assert odds(after, other) == odds(KNOWN, other)
        assert without_odds(after, other) == without_odds(KNOWN, other)
    for name in set(msgspec.structs.asdict(KNOWN)) - {"faults"}:
        assert getattr(after, name) is getattr(KNOWN, name)


@pytest.mark.parametrize("kind", KINDS)
def test_what_is_shipped_weighs_as_that_many_cases(kind):
    """With as many cases as the shipped table weighs, the share lies half way: mean of a Dirichlet."""
    before = shares(KNOWN, kind)
    after = shares(with_counts(KNOWN, kind, Counts(faults={"bearing_defect": WEIGHT})), kind)
    for fault, share in before.items():
        wanted = 0.5 * share + (0.5 if fault == "bearing_defect" else 0.0)
        assert after[fault] == pytest.approx(wanted)


def test_a_chance_moves_by_its_answers_from_the_shipped_one():
    """Mean of a Beta distribution: (weight * shipped + yes) / (weight + yes + no)."""
    fault = next(f for f in faults_of(KNOWN, "induction_3ph") if f.id == "bearing_defect")
    shipped_chance = fault.observations["bearing_noise"]
    seen = Counts(
        faults={"bearing_defect": 4.0},
        observations={"bearing_defect": {"bearing_noise": (1.0, 3.0)}},
        complaints={"bearing_defect": {"runs_slow": 4.0}},
    )
    found = with_counts(KNOWN, "induction_3ph", seen)
    after = next(f for f in faults_of(found, "induction_3ph") if f.id == "bearing_defect")
    assert after.observations["bearing_noise"] == pytest.approx(
        (WEIGHT * shipped_chance + 1.0) / (WEIGHT + 4.0)
    )
    assert after.complaints["runs_slow"] == pytest.approx(
        (WEIGHT * fault.complaints.get("runs_slow", 0.0) + 4.0) / (WEIGHT + 4.0)
    )
    assert after.complaints["noisy_or_vibrating"] < fault.complaints["noisy_or_vibrating"]


@SETTINGS
@given(kinds, counts, st.data(), st.floats(0.5, 40.0))
def test_one_more_case_of_a_fault_never_lowers_its_share(kind, given_counts, data, more):
    fault = data.draw(st.sampled_from(sorted(odds(KNOWN, kind))))
    before = shares(with_counts(KNOWN, kind, given_counts), kind)[fault]
    added = {**given_counts.faults, fault: given_counts.faults.get(fault, 0.0) + more}
    after = with_counts(KNOWN, kind, msgspec.structs.replace(given_counts, faults=added))
    assert shares(after, kind)[fault] >= before - 1e-12


def test_a_cause_counts_for_the_fault_that_holds_it():
    cause = Counts(
        faults={"fuse_blown": 3.0},
        complaints={"fuse_blown": {"will_not_start": 3.0}},
        observations={"fuse_blown": {"hums": (2.0, 1.0)}},
    )
    fault = Counts(
        faults={"open_supply_line": 3.0},
        complaints={"open_supply_line": {"will_not_start": 3.0}},
        observations={"open_supply_line": {"hums": (2.0, 1.0)}},
    )
    kind = "induction_3ph"
    assert with_counts(KNOWN, kind, cause) == with_counts(KNOWN, kind, fault)
    assert (
        shares(with_counts(KNOWN, kind, cause), kind)["open_supply_line"]
        > shares(KNOWN, kind)["open_supply_line"]
    )


@SETTINGS
@given(kinds, counts)
def test_what_is_shown_of_a_shift_is_what_was_shifted(kind, given_counts):
    before, after = shares(KNOWN, kind), shares(with_counts(KNOWN, kind, given_counts), kind)
    shown = {one.fault: one for one in shifts(KNOWN, kind, given_counts) if not one.about}
    for fault, share in before.items():
        if abs(after[fault] - share) > 1e-9:
            assert shown[fault].before == pytest.approx(share)
            assert shown[fault].after == pytest.approx(after[fault])
        else:
            assert fault not in shown
    assert sum(one.after - one.before for one in shown.values()) == pytest.approx(0.0, abs=1e-6)


@SETTINGS
@given(sheets, kinds, counts)
def test_counts_leave_the_gate_of_a_sheet_exactly_as_shut_as_it_was(sheet, kind, given_counts):
    after = with_counts(KNOWN, kind, given_counts)
    assert gate(sheet, after) == gate(sheet, KNOWN)


@pytest.mark.parametrize(
    "sheet",
    [
        case("routine_check"),
        case("trips_under_load", insulation(), windings(), seen={"overload_tripped": True}),
        case("runs_hot", insulation("0.4 Mohm")),
        case("shock_from_frame"),
    ],
    ids=lambda sheet: sheet.complaint,
)
def test_a_thousand_sound_machines_on_record_open_no_gate(sheet):
    """Learned odds may shut a line as a suspect would; what recorded entries keep shut stays shut."""
    sound = with_counts(KNOWN, "induction_3ph", Counts(faults={"healthy": 1000.0}))
    alone = gate(sheet, KNOWN)
    weighed = diagnose(sheet, knowledge=sound)
    assert next(f for f in weighed.faults if f.id == "healthy").probability > 0.0
    still = {line.id for line in weighed.energise.lines if line.status != "cleared"}
    assert {line.id for line in alone.energise.lines if line.status != "cleared"} <= still
    assert alone.energise.gate == "no_finding_forbids" or weighed.energise.gate == "shut"
    state = gate(sheet, sound, suspects={f.id: f.probability for f in weighed.faults})
    assert all(state.forbids(name) for name in STATES if alone.forbids(name))


def test_confirmed_cases_move_the_answer_their_way():
    sheet = case("noisy_or_vibrating")
    before = {f.id: f.probability for f in diagnose(sheet, knowledge=KNOWN).faults}
    own = Counts(faults={"misalignment": 20.0}, complaints={"misalignment": {"noisy_or_vibrating": 20.0}})
    after = {
        f.id: f.probability
        for f in diagnose(sheet, knowledge=with_counts(KNOWN, "induction_3ph", own)).faults
    }
    assert after["misalignment"] > before["misalignment"]
    assert sum(after.values()) == pytest.approx(1.0)
