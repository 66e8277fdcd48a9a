"""Only confirmed faults teach; they shift the starting odds, and the shift can be shown."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from casebook import bodies as b
from casebook.book import Casebook
from casebook.learned import scoreboard, shifted_chance, shifted_odds, shifts, size_class

from . import makers
from .conftest import a_sheet

odds = st.dictionaries(makers.names, st.floats(1e-4, 1.0), min_size=1, max_size=8)
counts = st.dictionaries(makers.names, st.floats(0, 50), max_size=5)


def closed(
    book: Casebook, found: str, confirmed: str, shown: dict[str, float] | None = None, **sheet: object
) -> str:
    case = book.log_sheet(a_sheet(**sheet), "Ada")
    faults = tuple(b.ShownFault(id=fault, probability=p) for fault, p in (shown or {}).items())
    book.record(case, b.Shown(faults=faults), b.Closed(found=found, confirmed=confirmed), person="Ada")
    return case


def test_what_is_only_believed_teaches_nothing(book: Casebook):
    closed(book, "turn_short", "believed")
    closed(book, "bearing_defect", "teardown")
    closed(book, "bearing_defect", "repair", observations={"hums": True})
    learned = book.learned("induction_3ph", 7500.0)
    assert learned.faults == {"bearing_defect": 2.0}
    assert learned.cases == 2
    assert learned.observations["bearing_defect"]["hums"] == (1.0, 1.0)
    assert learned.complaints["bearing_defect"] == {"trips_under_load": 2.0}


def test_other_kinds_and_sizes_do_not_count(book: Casebook):
    closed(book, "overload", "repair")
    assert book.learned("dc_shunt").cases == 0
    assert book.learned("induction_3ph", 200e3).cases == 0
    assert book.learned("induction_3ph").cases == 1
    assert [size_class(power) for power in (None, 550.0, 7500.0, 200e3)] == [None, 0, 1, 3]


def test_two_faults_of_one_case_count_half_each(book: Casebook):
    closed(book, "overload+supply_voltage_unbalance", "repair")
    assert book.learned("induction_3ph").faults == {"overload": 0.5, "supply_voltage_unbalance": 0.5}


def test_a_corrected_closing_counts_as_corrected(book: Casebook):
    case = closed(book, "overload", "repair")
    closing = book.case(case).closed
    assert closing is not None
    book.correct(case, closing.entry.id, b.Closed(found="bearing_defect", confirmed="teardown"), person="Bo")
    assert book.learned("induction_3ph").faults == {"bearing_defect": 1.0}


def test_shifted_odds_are_the_mean_of_a_dirichlet_distribution():
    """Prior 5 * (0.5, 0.3, 0.2), three cases of b: (2.5, 4.5, 1.0) / 8."""
    shifted = shifted_odds({"a": 0.5, "b": 0.3, "other": 0.2}, {"b": 3.0}, weight=5)
    assert shifted == pytest.approx({"a": 2.5 / 8, "b": 4.5 / 8, "other": 1.0 / 8})


def test_a_refinement_counts_for_its_parent_and_an_unknown_fault_for_other():
    shipped = {"open_supply_line": 0.5, "other": 0.5}
    shifted = shifted_odds(shipped, {"fuse_blown": 5.0}, within={"fuse_blown": "open_supply_line"})
    assert shifted["open_supply_line"] == pytest.approx(0.75)
    assert shifted_odds(shipped, {"meteorite": 5.0})["other"] == pytest.approx(0.75)


@given(odds, counts)
def test_shifted_odds_sum_to_one_and_never_leave_a_fault_without_a_chance(shipped, counts):
    shifted = shifted_odds(shipped, counts)
    assert sum(shifted.values()) == pytest.approx(1.0)
    assert all(chance > 0 for chance in shifted.values())
    assert shifted.keys() == shipped.keys()


@given(odds)
def test_without_cases_the_shipped_odds_come_back(shipped):
    total = sum(shipped.values())
    assert shifted_odds(shipped, {}) == pytest.approx(
        {fault: chance / total for fault, chance in shipped.items()}
    )


@given(odds, st.floats(0.1, 40))
def test_a_case_of_a_fault_never_lowers_its_chance(shipped, cases):
    fault = min(shipped)
    assert shifted_odds(shipped, {fault: cases})[fault] >= shifted_odds(shipped, {})[fault] - 1e-12


def test_a_chance_of_an_observation_moves_by_its_counts():
    assert shifted_chance(0.2, yes=5, no=0, weight=5) == pytest.approx(0.6)


def test_the_shift_can_be_shown(book: Casebook):
    closed(book, "overload", "repair")
    shipped = {"overload": 0.2, "bearing_defect": 0.8}
    learned = book.learned("induction_3ph")
    moved = shifts(shipped, shifted_odds(shipped, learned.faults), learned)
    assert {shift.fault: round(shift.shifted, 4) for shift in moved} == {
        "overload": 0.3333,
        "bearing_defect": 0.6667,
    }


def test_the_scoreboard_says_how_often_the_first_suspect_was_right(book: Casebook):
    closed(book, "overload", "repair", {"overload": 0.8, "turn_short": 0.15, "other": 0.05})
    closed(book, "turn_short", "teardown", {"overload": 0.6, "turn_short": 0.3, "other": 0.1})
    closed(book, "a+overload", "repair", {"overload": 0.95, "a+overload": 0.05})
    closed(book, "overload", "believed", {"overload": 1.0})
    everything, one_kind = book.scoreboard()
    assert (everything.cases, everything.first_right, everything.first_right_in_part) == (3, 1, 2)
    assert everything.in_first_three == 3
    assert everything.first_right_share == pytest.approx(1 / 3)
    assert (one_kind.kind, one_kind.readings) == ("induction_3ph", 2)
    top = everything.reliability[-1]
    assert (top.low, top.shown, top.mean, top.found) == (0.9, 1, pytest.approx(0.95), 0.0)


def test_an_empty_casebook_has_no_scores():
    assert scoreboard([]) == []


def test_the_scoreboard_leaves_long_pauses_out_of_the_minutes(book: Casebook):
    at = makers.START
    case = book.log_sheet(a_sheet(), "Ada", at=at)
    shown = b.Shown(faults=(b.ShownFault(id="overload", probability=0.9),))
    for minutes in (10, 25, 25 + 600):
        book.record(case, shown, person="Ada", at=at + makers.timedelta(minutes=minutes))
    closing = b.Closed(found="overload", confirmed="repair")
    book.record(case, closing, person="Ada", at=at + makers.timedelta(minutes=640))
    assert book.scoreboard()[0].minutes == pytest.approx(40, abs=0.01)
