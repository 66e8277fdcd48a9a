"""The file itself: append-only, whole or not at all, shared by several programs."""

import sqlite3
from pathlib import Path

import pytest

from casebook import bodies as b
from casebook.book import Casebook, open_casebook
from casebook.errors import (
    CasebookBusy,
    CasebookError,
)

from .conftest import a_sheet, mode


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE entry SET person = 'Mallory'",
        "DELETE FROM entry",
        "INSERT OR REPLACE INTO entry SELECT * FROM entry LIMIT 1",
        "REPLACE INTO entry SELECT seq, id, case_id, 'Mallory', time_utc, offset_minutes, kind, body_version,"
        " after, body FROM entry",
    ],
)
def test_entries_are_never_changed_or_deleted(book: Casebook, statement: str):
    book.log_sheet(a_sheet(), "Ada")
    before = list(book.store.all_entries())
    with pytest.raises(sqlite3.IntegrityError, match="write a correction"):
        book.store._connection.execute(statement)
    assert list(book.store.all_entries()) == before


def test_every_entry_is_synced_to_the_disk(book: Casebook):
    ask = book.store._connection.execute
    assert ask("PRAGMA journal_mode").fetchone()[0] == "wal"
    assert ask("PRAGMA synchronous").fetchone()[0] == 2  # FULL


def test_an_error_inside_takes_all_back_and_is_not_hidden(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    before = book.store.count()
    with pytest.raises(ZeroDivisionError), book.store.atomic():
        book.record(case, b.Note(text="one"), person="Ada")
        1 / 0  # noqa: B018
    assert book.store.count() == before
    assert book.case(case).notes == ()
    assert book.search("one") == []


def test_an_inner_error_takes_only_the_inner_part_back(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    with book.store.atomic():
        book.record(case, b.Note(text="kept"), person="Ada")
        with pytest.raises(ZeroDivisionError), book.store.atomic():
            book.log_sheet(a_sheet("gone"), "Ada")
            1 / 0  # noqa: B018
    assert [note.what.text for note in book.case(case).notes] == ["kept"]
    assert [row.tag for row in book.cases()] == ["P-104"]


def test_a_safe_copy_is_whole_and_writes_over_nothing(book: Casebook, tmp_path: Path):
    case = book.log_sheet(a_sheet(), "Ada")
    book.safe_copy(tmp_path / "copy.db")
    assert mode(tmp_path / "copy.db") == 0o600
    with open_casebook(tmp_path / "copy.db") as copy:
        assert copy.case(case).sheet == a_sheet()
    with pytest.raises(CasebookError, match="exists"):
        book.safe_copy(tmp_path / "copy.db")


def test_a_locked_file_is_named_and_nothing_is_written(path: Path):
    with open_casebook(path, timeout_s=0.1) as book:
        case = book.log_sheet(a_sheet(), "Ada")
        other = sqlite3.connect(path, isolation_level=None)
        other.execute("BEGIN IMMEDIATE")
        with pytest.raises(CasebookBusy, match="held by another program"):
            book.record(case, b.Note(text="waits"), person="Ada")
        assert book.case(case).sheet == a_sheet()  # reading goes on
        other.execute("ROLLBACK")
        book.record(case, b.Note(text="goes"), person="Ada")
        assert len(book.case(case).notes) == 1


def test_two_screens_see_each_other(path: Path):
    with open_casebook(path) as one, open_casebook(path) as two:
        token = two.changed_since(0).token
        case = one.log_sheet(a_sheet(), "Ada")
        assert two.changed_since(token).cases == (case,)
        two.record(case, b.Note(text="seen"), person="Bo")
        assert one.case(case).persons == ("Ada", "Bo")
