"""Merging is the union of two sets of entries: any order, any number of times, the same result."""

import io
import shutil
import tempfile
from collections.abc import Iterable
from pathlib import Path

import msgspec
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from hypothesis.stateful import Bundle, RuleBasedStateMachine, invariant, rule

from casebook import bodies as b
from casebook.book import Casebook, open_casebook
from casebook.entry import Entry
from casebook.errors import CasebookError
from casebook.exchange import export_lines
from casebook.fold import fold_case
from casebook.foreign import Item
from casebook.merge import merge_file, merge_items
from casebook.sqlite_store import SqliteStore
from casebook.wire import entry_of_line

from . import makers
from .conftest import a_sheet

FEW = settings(max_examples=15, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])


def filled(entries: Iterable[Entry]) -> Casebook:
    folder = Path(tempfile.mkdtemp(prefix="plateside-test-"))
    book = Casebook(SqliteStore(folder / "casebook.db"))
    book.store.add(entries)
    return book


def drop(*books: Casebook) -> None:
    for book in books:
        book.close()
        shutil.rmtree(book.store.path.parent)


def held(book: Casebook) -> set[Entry]:
    return set(book.store.all_entries())


def told(book: Casebook) -> list[object]:
    """What lists say, without the place in them (two cases of one moment may stand either way)."""
    return sorted(str(msgspec.structs.asdict(row) | {"place": 0}) for row in book.cases(limit=1000))


@FEW
@given(makers.entry_sets(), st.data())
def test_merging_is_commutative_associative_and_idempotent(entries, data):
    def part(name):
        return data.draw(st.lists(st.sampled_from(entries), unique_by=lambda entry: entry.id), label=name)

    one, two, three = (part(name) for name in "abc")
    left, right = filled(one), filled(three)
    other, last = filled(two), filled(three)
    merge_file(left, other.store.path)
    merge_file(left, last.store.path)  # (a + b) + c
    merge_file(right, other.store.path)
    first = filled(one)
    merge_file(right, first.store.path)  # c + b + a
    try:
        assert held(left) == held(right) == {*one, *two, *three}
        assert told(left) == told(right)
        again = merge_file(left, right.store.path)
        assert (again.new, again.refused) == (0, 0)
        assert held(left) == held(right)
    finally:
        drop(left, right, other, last, first)


class ThreeLaptops(RuleBasedStateMachine):
    """Three casebooks that are written to and merged in any order, against plain sets of entries."""

    cases = Bundle("cases")

    def __init__(self):
        super().__init__()
        self.books = [filled([]) for _ in range(3)]
        self.sets: list[set[Entry]] = [set(), set(), set()]

    @rule(target=cases, book=st.integers(0, 2), person=makers.persons)
    def log(self, book, person):
        case = self.books[book].log_sheet(a_sheet(), person)
        self.sets[book].update(self.books[book].store.case_entries(case))
        return case

    @rule(book=st.integers(0, 2), case=cases, body=makers.some_bodies, person=makers.persons)
    def record(self, book, case, body, person):
        if not isinstance(body, b.Words):
            self.sets[book].update(self.books[book].record(case, body, person=person))

    @rule(book=st.integers(0, 2), case=cases, place=st.integers(0, 9), person=makers.persons)
    def strike(self, book, case, place, person):
        mine = sorted((entry for entry in self.sets[book] if entry.case == case), key=lambda entry: entry.id)
        if mine:
            named = mine[place % len(mine)].id
            self.sets[book].add(self.books[book].correct(case, named, None, person=person))

    @rule(into=st.integers(0, 2), other=st.integers(0, 2))
    def merge_a_casebook(self, into, other):
        if into != other:
            merge_file(self.books[into], self.books[other].store.path)
            self.sets[into] |= self.sets[other]

    @rule(into=st.integers(0, 2), other=st.integers(0, 2))
    def merge_lines(self, into, other):
        folder = self.books[other].store.path.parent
        lines = folder / "export.jsonl"
        with lines.open("wb") as file:
            export_lines(self.books[other], file)
        merge_file(self.books[into], lines)
        self.sets[into] |= self.sets[other]

    @invariant()
    def each_casebook_holds_its_set_and_tells_its_fold(self):
        for book, entries in zip(self.books, self.sets, strict=True):
            assert held(book) == entries
            for case in {entry.case for entry in entries}:
                expected = fold_case(entry for entry in entries if entry.case == case)
                assert repr(book.case(case)) == repr(expected)
            assert len(book.cases(limit=10_000)) == len({entry.case for entry in entries})

    def teardown(self):
        drop(*self.books)


TestThreeLaptops = ThreeLaptops.TestCase
TestThreeLaptops.settings = settings(max_examples=10, stateful_step_count=12, deadline=None)


def test_a_known_id_with_another_content_is_reported_and_stays_as_it_was(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    entry = book.store.case_entries(case)[0]
    forged = msgspec.structs.replace(entry, person="Mallory")
    report = merge_items(book, [Item("line 1", forged), Item("line 2", entry)], source="other")
    assert (report.new, report.known, report.refused) == (0, 1, 1)
    assert "another content" in report.refusals[0].why
    assert book.store.case_entries(case)[0] == entry


def test_one_bad_line_is_left_out_and_the_others_come_in(book: Casebook, tmp_path: Path):
    with open_casebook(tmp_path / "other.db") as other:
        other.log_sheet(a_sheet(), "Bo")
        with (tmp_path / "x.jsonl").open("wb") as file:
            count = export_lines(other, file)
            file.write(b'{"id": 7}\n\n')
    progress: list[tuple[str, int, int]] = []
    report = merge_file(book, tmp_path / "x.jsonl", progress=lambda *at: progress.append(at))
    assert (report.new, report.refused) == (count, 1)
    assert report.refusals[0].where == f"line {count + 1}"
    assert ("taking in", count + 1, count + 2) in progress  # the blank line was counted, too
    assert progress[-1] == ("updating lists", 1, 1)
    assert report.says == f"x.jsonl: {count} new entries in 1 case, 0 known before, 1 left out"


def test_the_merge_itself_is_remembered_once(book: Casebook, tmp_path: Path):
    with open_casebook(tmp_path / "other.db") as other:
        other.log_sheet(a_sheet(), "Bo")
    merge_file(book, tmp_path / "other.db")
    merge_file(book, tmp_path / "other.db")
    assert [taken.source for taken in book.store.taken_in()] == ["other.db"]


def test_entries_still_in_the_other_journal_are_merged(book: Casebook, tmp_path: Path):
    with open_casebook(tmp_path / "other.db") as other:
        case = other.log_sheet(a_sheet(), "Bo")
        assert (tmp_path / "other.db-wal").stat().st_size > 0
        merge_file(book, tmp_path / "other.db")
    assert book.case(case).sheet == a_sheet()


def test_a_merge_that_was_cut_short_is_finished_at_the_next_opening(path: Path):
    with open_casebook(path) as book:
        made = io.BytesIO()
        case = book.log_sheet(a_sheet(), "Ada")
        export_lines(book, made)
    other = path.with_name("other.db")
    with open_casebook(other) as book:
        book.store.add([entry_of_line(line) for line in made.getvalue().splitlines()], fold_later=True)
        assert book.cases() == []
    with open_casebook(other) as book:
        assert [row.id for row in book.cases()] == [case]


@pytest.mark.parametrize("what", ["folder", "missing"])
def test_what_is_no_file_is_refused_in_words(book: Casebook, tmp_path: Path, what: str):
    with pytest.raises(CasebookError, match="cannot be read"):
        merge_file(book, tmp_path if what == "folder" else tmp_path / "nothing")
