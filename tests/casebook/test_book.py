"""What a person does with a casebook: log, look up, list, search, correct."""

import time
from datetime import UTC, datetime, timedelta

import pytest

from calc.sheet import Machine
from casebook import bodies as b
from casebook.book import Casebook
from casebook.errors import BadEntry, UnknownCase
from rules.answer import Band, Diagnosis, Energise, FaultOdds, Finding

from .conftest import a_sheet
from .makers import START


def test_a_logged_sheet_folds_to_the_same_sheet(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    assert book.case(case).sheet == a_sheet()


def test_a_case_is_found_by_its_number_in_any_spelling(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    number = book.number(case)
    assert number.startswith("C-") and len(number) == 8
    assert book.case(number).id == case
    assert book.case(number.lower()[2:]).id == case
    assert book.cases()[0].number == number


def test_an_unknown_number_is_named(book: Casebook):
    with pytest.raises(UnknownCase, match="no case 'C-ZZZZ'"):
        book.case("C-ZZZZ")


def test_the_list_shows_the_newest_activity_first_and_pages(book: Casebook):
    cases = [book.log_sheet(a_sheet(f"P-{n}"), "Ada") for n in range(5)]
    book.record(cases[0], b.Note(text="seen again"), person="Bo")
    rows = book.cases(limit=2)
    assert [row.id for row in rows] == [cases[0], cases[4]]
    assert [row.id for row in book.cases(limit=9, before=rows[-1].place)] == cases[3:0:-1]
    assert rows[0].persons == "Ada, Bo"


@pytest.mark.parametrize(
    "typed",
    ["p-1", "P104", "7.5", "trips", "SHAFT turns", "grease pump-sid", "14.9", "clos teardown Ada", "bearing"],
)
def test_a_case_is_found_by_the_beginnings_of_its_words(book: Casebook, typed: str):
    case = book.log_sheet(a_sheet(), "Ada")
    book.log_sheet(a_sheet("M-7", complaint="noisy", readings=(), observations={}), "Cy")
    book.record(
        case,
        b.Note(text="grease on the pump-side"),
        b.Closed(found="bearing_defect", confirmed="teardown", done="new bearing, closed; teardown by shop"),
        person="Ada",
    )
    assert case in {row.id for row in book.search(typed)}


@pytest.mark.parametrize(
    "typed",
    ['"', "a AND", "NEAR(", "tag:x OR", "*", "-", "^zz", "{zz}", "z\ud800z", "a\0b", "'; DROP", "\ud800"],
)
def test_no_typed_text_is_search_syntax(book: Casebook, typed: str):
    book.log_sheet(a_sheet(), "Ada")
    assert book.search(typed) == []


def test_a_correction_replaces_and_a_strike_removes(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    first = book.case(case).readings[0]
    better = b.ReadingTaken(reading=a_sheet().readings[1])
    book.correct(case, first.entry.id, better, person="Bo", why="wrong clamp")
    assert book.case(case).readings[0].what == better
    strike = book.correct(case, first.entry.id, None, person="Bo")
    assert len(book.case(case).readings) == 1
    book.correct(case, strike.id, None, person="Ada", why="it was right")
    assert book.case(case).readings[0].what == better
    assert len(book.case(case).lines) == len(book.case(case).sheet.readings) + 9


def test_a_case_closes_and_opens_again(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    book.record(case, b.Closed(found="overload", confirmed="repair"), person="Ada")
    assert book.case(case).status == "closed"
    assert book.cases(status="open") == []
    book.record(case, b.Reopened(why="tripped again"), person="Bo")
    assert book.case(case).status == "open"
    assert book.case(case).closed is None
    assert [row.id for row in book.cases(status="open")] == [case]


def test_a_nameless_entry_is_refused_and_nothing_is_written(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    before = book.store.count()
    with pytest.raises(BadEntry, match="person"):
        book.record(case, b.Note(text="x"), person=" \t")
    assert book.store.count() == before


def test_control_codes_never_reach_the_log(book: Casebook):
    case = book.log_sheet(a_sheet("P\x1b[31m-1"), "A\x9bda\u202e")
    book.record(case, b.Note(text="one\x07\ntwo\r\nthree\x1b]0;x\x07"), person="Ada")
    told = book.case(case)
    assert told.tag == "P\ufffd[31m-1"
    assert told.persons[0] == "A\ufffdda\ufffd"
    assert told.notes[0].what.text == "one\ufffd\ntwo\nthree\ufffd]0;x\ufffd"


def test_a_screen_learns_which_cases_changed(book: Casebook):
    first = book.log_sheet(a_sheet(), "Ada")
    token = book.changed_since(0).token
    assert book.changed_since(token).cases == ()
    second = book.log_sheet(a_sheet(), "Bo")
    news = book.changed_since(token)
    assert news.cases == (second,)
    assert first in book.changed_since(0).cases
    assert book.changed_since(news.token).cases == ()


def test_what_is_known_of_a_machine_is_what_was_said_last(book: Casebook):
    assert book.machine("P-104") is None
    plate = a_sheet().machine.nameplate
    book.log_sheet(a_sheet(), "Ada", at=START)
    bare = Machine(kind="induction_3ph", tag="p-104", starter="star_delta")
    book.log_sheet(a_sheet(machine=bare), "Bo", at=START + timedelta(days=1))
    assert book.machine("P-104") == Machine(
        kind="induction_3ph", tag="p-104", nameplate=plate, starter="star_delta", mount="rigid"
    )


def test_another_kind_under_the_same_tag_is_another_machine(book: Casebook):
    book.log_sheet(a_sheet(), "Ada", at=START)
    other = Machine(kind="dc_shunt", tag="P-104")
    book.log_sheet(a_sheet(machine=other), "Bo", at=START + timedelta(days=1))
    assert book.machine("P-104") == other


def test_a_machine_without_a_tag_is_not_known_again(book: Casebook):
    book.log_sheet(a_sheet(machine=Machine(kind="dc_shunt")), "Ada")
    assert book.machine(" ") is None


def test_a_case_from_a_clock_in_the_future_does_not_lead_the_list_for_ever(book: Casebook):
    future = book.log_sheet(a_sheet("F-1"), "Ada", at=datetime.now(UTC) + timedelta(days=3650))
    today = book.log_sheet(a_sheet(), "Ada")
    assert [row.id for row in book.cases()] == [today, future]


def test_a_thousand_cases_of_one_moment_are_all_listed(book: Casebook):
    bodies = [b.Opened(kind="induction_3ph", complaint="noisy")]
    with book.store.atomic():
        cases = {book.open_case(bodies, person="Ada", at=START) for _ in range(1000)}
    assert {row.id for row in book.cases(limit=2000)} == cases


def test_what_the_engine_said_is_kept_as_it_was(book: Casebook):
    said = Diagnosis(
        expected=(Band(measure="speed", state="loaded", low=1440.0, mid=1455.0, high=1470.0, unit="rpm"),),
        faults=(
            FaultOdds(
                id="ground_fault",
                probability=0.7,
                within=(FaultOdds(id="winding_ground_fault", probability=0.6),),
            ),
            FaultOdds(id="other", probability=0.3),
        ),
        findings=(Finding(id="insulation_below_minimum", verdict="stop", says="0.4 Mohm", source="IEEE 43"),),
        energise=Energise(gate="shut", needs=("insulation_resistance",), because=("0.4 Mohm",)),
    )
    case = book.log_sheet(a_sheet(), "Ada")
    book.record(case, b.Shown.of(said, program="0.1.0"), person="Ada")
    told = book.case(case).shown
    assert told is not None
    assert told.what.expected[0].high == 1470.0
    assert told.what.faults[0].within[0].id == "winding_ground_fault"
    assert told.what.findings[0].source == "IEEE 43"
    assert told.what.energise == b.ShownGate(
        gate="shut", needs=("insulation_resistance",), because=("0.4 Mohm",)
    )
    assert book.cases()[0].suspect == "ground_fault"


def test_machines_are_offered_by_the_beginning_of_their_tag(book: Casebook):
    for tag in ("P-104", "p-104", "P-105", "M-1"):
        book.log_sheet(a_sheet(tag), "Ada")
        time.sleep(0.001)
    machines = book.machines("p-1")
    assert [(machine.tag, machine.cases) for machine in machines] == [("p-104", 2), ("P-105", 1)]
    assert len(book.machine_cases("P-104")) == 2


@pytest.mark.parametrize("year", [1969, 2200])
def test_a_clock_far_from_the_truth_is_told_and_nothing_is_written(book: Casebook, year: int):
    with pytest.raises(BadEntry, match=r"time_utc is .*; it must be a time from 1970 to 2199; is the clock"):
        book.log_sheet(a_sheet(), "Ada", at=datetime(year, 7, 1, tzinfo=UTC))
    assert book.store.count() == 0


def test_a_clock_that_was_set_back_changes_no_order(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada", at=datetime(2026, 3, 2, 9, 0, tzinfo=UTC))
    for hour, text in ((9, "first"), (7, "second"), (5, "third")):
        book.record(case, b.Note(text=text), person="Ada", at=datetime(2026, 3, 2, hour, 5, tzinfo=UTC))
    assert [note.what.text for note in book.case(case).notes] == ["first", "second", "third"]
