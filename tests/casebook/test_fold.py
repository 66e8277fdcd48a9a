"""A case depends on the set of its entries alone, and reads in the order in which it happened."""

import math
from datetime import timedelta

import msgspec
from hypothesis import given
from hypothesis import strategies as st

from casebook import bodies as b
from casebook.entry import (
    Entry,
    canonical_json,
    decode_body,
    encode_body,
    id_from_content,
    make_entry,
    new_id,
)
from casebook.fold import fold_case
from casebook.numbers import ALPHABET, full_number, read_number, shown_number
from casebook.order import in_order

from . import makers

CASE = id_from_content("a case")


def note(text: str, seconds: float, after: Entry | None = None, person: str = "Ada") -> Entry:
    return make_entry(
        b.Note(text=text),
        case=CASE,
        person=person,
        after=after.id if after else None,
        at=makers.START + timedelta(seconds=seconds),
    )


@given(makers.sheets())
def test_a_sheet_comes_back_from_its_bodies(sheet):
    entries: list[Entry] = []
    for body in b.bodies_of_sheet(sheet):
        entries.append(make_entry(body, case=CASE, person="Ada", after=entries[-1].id if entries else None))
    assert repr(fold_case(entries).sheet) == repr(sheet)  # repr, because nan is not equal to itself


@given(makers.entry_sets(cases=1), st.randoms())
def test_the_order_of_arrival_does_not_matter(entries, random):
    shuffled = random.sample(entries, len(entries))
    assert repr(fold_case(shuffled)) == repr(fold_case(entries))
    assert repr(fold_case([*shuffled, *entries])) == repr(fold_case(entries))


@given(makers.entry_sets(cases=1))
def test_every_entry_stands_once_in_the_case(entries):
    lines = fold_case(entries).lines
    assert sorted(line.entry.id for line in lines) == sorted(entry.id for entry in entries)


def test_a_clock_that_is_set_back_does_not_turn_the_order():
    first = note("first", 0)
    second = note("second", -3600, after=first)
    third = note("third", -3000, after=second)
    case = fold_case([third, second, first])
    assert [logged.what.text for logged in case.notes] == ["first", "second", "third"]
    assert [line.clock_set_back for line in case.lines] == [False, True, True]


def test_two_laptops_on_one_case_read_as_one_sequence_by_time():
    start = note("start", 0)
    ours = note("ours, 10 s", 10, after=start)
    ours_later = note("ours, 30 s", 30, after=ours)
    theirs = note("theirs, 20 s", 20, after=start, person="Bo")
    case = fold_case([theirs, ours_later, start, ours])
    assert [n.what.text for n in case.notes] == ["start", "ours, 10 s", "theirs, 20 s", "ours, 30 s"]


def test_entries_that_wait_for_each_other_still_come_out():
    one = note("one", 0)
    two = note("two", 1, after=one)
    one = msgspec.structs.replace(one, after=two.id)
    assert [entry.id for entry in in_order([two, one])] == [one.id, two.id]


def test_the_newest_correction_holds():
    wrong = note("wrong", 0)
    fixes = [
        make_entry(
            b.Correction(names=wrong.id, instead={"text": text}), case=CASE, person="Bo", at=makers.START
        )
        for text in ("better", "right")
    ]
    later = msgspec.structs.replace(fixes[1], time_utc=makers.START + timedelta(seconds=9))
    case = fold_case([later, wrong, fixes[0]])
    assert case.notes[0].what.text == "right"
    assert case.lines[0].corrected_by == later.id
    assert case.notes[0].entry.body == b.Note(text="wrong")


def test_an_open_circuit_and_an_unread_value_survive_the_log():
    value = makers.Value(text="open", number=math.inf, kind="open", unit="ohm")
    unread = makers.Value(text="", number=math.nan, kind="missing", unit="ohm")
    body = b.ReadingTaken(
        reading=makers.Reading(measure="winding_resistance", state="isolated", values=(value, unread))
    )
    back = decode_body("reading", encode_body(body))
    assert isinstance(back, b.ReadingTaken)
    assert back.reading.numbers[0] == math.inf and math.isnan(back.reading.numbers[1])


@given(makers.some_bodies)
def test_canonical_json_is_stable(body):
    text = encode_body(body)
    assert canonical_json(msgspec.json.decode(text)) == text


def test_an_unknown_kind_is_kept_as_words():
    body = decode_body("ultrasound", '{"image":"none","level_db":38.5}')
    assert body == b.Words(data={"image": "none", "level_db": 38.5})


def test_a_later_field_in_a_known_body_does_not_hide_it():
    assert decode_body("note", '{"text":"hum","mood":"bad"}') == b.Note(text="hum")


def test_case_numbers_are_readable_and_unique_enough():
    numbers = {full_number(new_id()) for _ in range(5000)}
    assert len({number[:6] for number in numbers}) > 4990  # of 2**30; 12 pairs alike would be one in 10**9
    assert all(character in ALPHABET for number in numbers for character in number)


@given(st.uuids(version=4).map(str))
def test_a_shown_number_is_read_back(case):
    full = full_number(case)
    assert full.startswith(read_number(shown_number(full)) or "?")


def test_a_number_grows_where_a_neighbour_begins_alike():
    assert shown_number("7K3F9QXM0000") == "C-7K3F9Q"
    assert shown_number("7K3F9QXM0000", ("7K3F9QXZ0000",)) == "C-7K3F9QXM"


def test_letters_that_look_like_digits_are_read_as_such():
    assert read_number(" c-1lio ") == "1110"
    assert read_number("C-U") is None
    assert read_number("../etc") is None
