"""Visits: what is answered, what is refused, and what may not be proposed."""

from benchmarks.graded import Case
from benchmarks.visits import through_shut_gate, visit_all

IR = {"measure": "insulation_resistance", "state": "isolated", "value": "5 Mohm"}
NEXT = [
    {"measure": "speed", "state": "no_load"},
    {"measure": "thermistor_resistance", "state": "isolated"},
    {"measure": "insulation_resistance", "state": "isolated"},
    {"observation": "hums"},
]


def case():
    sheet = {"format": 1, "machine": {"kind": "induction_3ph"}, "complaint": "routine_check"}
    speed = {"measure": "speed", "state": "loaded", "value": "1450 rpm"}
    truth = {
        "fault": "damp_insulation",
        "severity": 0.5,
        "readings": {"insulation_resistance@isolated": IR, "speed@loaded": speed},
        "observations": {"hums": False},
        "healthy_readings": {},
    }
    return Case("1", sheet, truth)


def tool(sheet):
    """Sure once insulation is read, and always asking for the same things."""
    p = 0.9 if sheet.get("readings") else 0.1
    faults = [{"id": "damp_insulation", "probability": p}, {"id": "healthy", "probability": 1 - p}]
    return {"faults": faults, "next": NEXT}


def test_the_first_proposal_that_can_be_had_is_answered_and_others_are_refused():
    found = visit_all([case()], tool)
    visit = found.visits[0]
    assert visit.sheet["readings"] == [IR]
    assert visit.sheet["observations"] == {"hums": False}
    assert (visit.taken, visit.reached) == (2, 1)
    # speed@no_load three times: before insulation, before hums, and when nothing else is left
    assert (visit.proposals, visit.refused) == (5, 3)


def test_measures_that_no_case_carries_cost_nothing():
    only = {"measure": "thermistor_resistance", "state": "isolated"}
    found = visit_all([case()], lambda sheet: {**tool(sheet), "next": [only]})
    assert found.visits[0].proposals == 0


def test_the_case_itself_stays_as_it_was():
    one = case()
    visit_all([one], tool)
    assert "readings" not in one.sheet


def test_accuracy_is_told_after_every_reading_also_of_visits_that_ended():
    assert visit_all([case()], tool).top1_after == (0.0, *[1.0] * 8)


def test_no_more_readings_are_taken_than_allowed():
    assert visit_all([case()], tool, most=1).visits[0].taken == 1


def test_an_energised_proposal_below_one_megohm_goes_through_a_shut_gate():
    answer = {"next": NEXT}
    low = {"complaint": "routine_check", "readings": [{**IR, "value": "0.9 Mohm"}]}
    assert through_shut_gate(low, answer) == 1
    assert through_shut_gate({**low, "readings": [IR]}, answer) == 0
    assert through_shut_gate({"complaint": "shock_from_frame"}, answer) == 1
