"""Only confirmed faults teach; they are counted by kind and size, and the odds that were shown are scored."""

import pytest

from calc.sheet import Machine
from casebook import bodies as b
from casebook.book import Casebook
from casebook.learned import scoreboard, size_class

from . import makers
from .conftest import a_sheet


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


def test_the_case_at_hand_is_no_evidence_for_itself(book: Casebook):
    case = closed(book, "overload", "repair")
    closed(book, "bearing_defect", "repair")
    assert book.learned("induction_3ph", leave_out=case).faults == {"bearing_defect": 1.0}


def test_counts_by_kind_and_size_add_up_to_those_of_the_kind(book: Casebook):
    closed(book, "overload", "repair")
    closed(book, "overload+turn_short", "teardown")
    closed(book, "bearing_defect", "believed")
    unknown = Machine(kind="induction_3ph", tag="M-9")
    closed(book, "bearing_defect", "repair", machine=unknown)
    closed(book, "open_field", "repair", machine=Machine(kind="dc_shunt"))
    groups = {(one.kind, one.size): one for one in book.learned_groups()}
    assert list(groups) == [("dc_shunt", None), ("induction_3ph", None), ("induction_3ph", 1)]
    assert groups["induction_3ph", None].faults == {"overload": 1.5, "turn_short": 0.5, "bearing_defect": 1.0}
    assert groups["induction_3ph", 1] == book.learned("induction_3ph", 7500.0)
    assert book.learned_groups("dc_shunt") == [book.learned("dc_shunt")]


def test_the_scoreboard_says_how_often_the_first_suspect_was_right(book: Casebook):
    closed(book, "overload", "repair", {"overload": 0.8, "turn_short": 0.15, "other": 0.05})
    closed(book, "turn_short", "teardown", {"overload": 0.6, "turn_short": 0.3, "other": 0.1})
    closed(book, "a+overload", "repair", {"overload": 0.95, "a+overload": 0.05})
    closed(book, "overload", "believed", {"overload": 1.0})
    everything, one_kind = book.scoreboard()
    assert (everything.cases, everything.first_right, everything.first_right_in_part) == (3, 1, 2)
    assert everything.in_first_three == 3
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
