"""A casebook that is removed, moved or replaced while it is open: no entry goes where nobody finds it."""

import shutil
import sqlite3
import sys
from pathlib import Path

import pytest

from casebook import bodies as b
from casebook.book import Casebook, open_casebook
from casebook.errors import CasebookGone, NewerCasebook
from casebook.merge import merge_file

from .conftest import a_sheet, mode

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="there an open file cannot be removed")


def texts(book: Casebook, case: str) -> list[str]:
    return [note.what.text for note in book.case(case).notes]


def remove(path: Path) -> None:
    for end in ("", "-wal", "-shm"):
        Path(f"{path}{end}").unlink(missing_ok=True)


REMOVALS = {
    "all files": remove,
    "the file alone": Path.unlink,
    "the folder": lambda path: shutil.rmtree(path.parent),
    "moved": lambda path: shutil.move(path, path.with_name("archive.db")),
}


@pytest.mark.parametrize("how", REMOVALS)
def test_a_removed_casebook_is_put_back_whole(book: Casebook, path: Path, how: str):
    case = book.log_sheet(a_sheet(), "Ada")
    book.record(case, b.Note(text="before"), person="Ada")
    REMOVALS[how](path)
    book.record(case, b.Note(text="after"), person="Ada")
    assert "was removed while it was open; it was put back" in book.notes[0]
    book.record(case, b.Note(text="later"), person="Ada")
    with open_casebook(path) as another:
        assert texts(another, case) == texts(book, case) == ["before", "after", "later"]
        assert another.case(case).sheet == a_sheet()
        another.record(case, b.Note(text="of another"), person="Bo")
    assert texts(book, case)[-1] == "of another"
    assert mode(path) == 0o600
    assert sorted(file.name for file in path.parent.glob("casebook.db*")) == [
        "casebook.db", "casebook.db-shm", "casebook.db-wal",
    ]  # fmt: skip


def test_a_removed_casebook_that_cannot_be_put_back_says_so_and_reading_goes_on(book: Casebook, path: Path):
    case = book.log_sheet(a_sheet(), "Ada")
    shutil.rmtree(path.parent)
    path.parent.write_text("a file stands where the folder was", encoding="utf-8")
    with pytest.raises(CasebookGone, match=r"cannot be put back .* Nothing was written; what was"):
        book.record(case, b.Note(text="after"), person="Ada")
    assert book.case(case).sheet == a_sheet()
    path.parent.unlink()
    book.record(case, b.Note(text="after"), person="Ada")
    with open_casebook(path) as another:
        assert texts(another, case) == ["after"]


def test_nothing_of_a_replaced_casebook_is_lost_or_mixed(book: Casebook, path: Path, tmp_path: Path):
    case = book.log_sheet(a_sheet(), "Ada")
    with open_casebook(tmp_path / "other.db") as other:
        kept = other.log_sheet(a_sheet("M-7"), "Bo")
    shutil.copyfile(tmp_path / "other.db", tmp_path / "copy.db")
    (tmp_path / "copy.db").replace(path)
    with pytest.raises(CasebookGone, match=r"casebook-set-aside-.*plateside merge") as refused:
        book.record(case, b.Note(text="after"), person="Ada")
    (aside,) = path.parent.glob("casebook-set-aside-*.db")
    assert aside.name in str(refused.value)
    assert mode(aside) == 0o600
    with pytest.raises(CasebookGone):
        book.record(case, b.Note(text="after"), person="Ada")
    assert list(path.parent.glob("casebook-set-aside-*.db")) == [aside]
    book.close()
    with open_casebook(path) as again:
        assert [row.id for row in again.cases()] == [kept]
        merge_file(again, aside)
        assert again.case(case).sheet == a_sheet()


def test_a_casebook_that_is_moved_takes_its_newest_entries_along(book: Casebook, path: Path):
    case = book.log_sheet(a_sheet(), "Ada")
    path.rename(path.with_name("archive.db"))
    book.close()
    assert [file.name for file in path.parent.iterdir()] == ["archive.db"]
    with open_casebook(path.with_name("archive.db")) as moved:
        assert moved.case(case).sheet == a_sheet()


@pytest.mark.parametrize("end", ["-wal", "-shm"])
def test_a_journal_that_was_cleared_away_is_noticed(book: Casebook, path: Path, end: str):
    case = book.log_sheet(a_sheet(), "Ada")
    Path(f"{path}{end}").unlink()
    with pytest.raises(CasebookGone, match="journal, was replaced"):
        book.record(case, b.Note(text="after"), person="Ada")
    (aside,) = path.parent.glob("casebook-set-aside-*.db")
    with open_casebook(aside) as saved:
        assert saved.case(case).sheet == a_sheet()


def test_two_that_had_it_open_both_keep_their_entries(path: Path):
    with open_casebook(path) as one, open_casebook(path) as two:
        case = one.log_sheet(a_sheet(), "Ada")
        remove(path)
        one.record(case, b.Note(text="of one"), person="Ada")
        with pytest.raises(CasebookGone, match="plateside merge"):
            two.record(case, b.Note(text="of two"), person="Bo")
        assert texts(two, case) == []
    with open_casebook(path) as again:
        assert texts(again, case) == ["of one"]


def test_a_newer_program_that_changes_the_tables_meanwhile_stops_the_older_one(book: Casebook, path: Path):
    case = book.log_sheet(a_sheet(), "Ada")
    newer = sqlite3.connect(path)
    newer.execute("ALTER TABLE entry ADD COLUMN colour TEXT")
    newer.execute("PRAGMA user_version = 99")
    newer.commit()
    newer.close()
    with pytest.raises(NewerCasebook, match=r"meanwhile\. Update Plateside here"):
        book.record(case, b.Note(text="x"), person="Ada")
    assert book.case(case).sheet == a_sheet()


def test_looking_costs_no_entry(book: Casebook, path: Path):
    case = book.log_sheet(a_sheet(), "Ada")
    before = path.stat().st_ino
    for place in range(20):
        book.record(case, b.Note(text=str(place)), person="Ada")
    assert path.stat().st_ino == before
    assert len(texts(book, case)) == 20
