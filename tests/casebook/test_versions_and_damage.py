"""Files of other programs, other versions, and damaged ones."""

import contextlib
import sqlite3
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from casebook import bodies as b
from casebook import schema
from casebook.book import open_casebook
from casebook.errors import (
    CasebookError,
    DamagedCasebook,
    NewerCasebook,
    NotACasebook,
)
from casebook.salvage import salvage

from .conftest import a_sheet, is_sound, mode

FIXTURES = Path(__file__).with_name("fixtures")


@pytest.mark.parametrize("content", [b"format: 1\nmachine: {}\n", b"SQLite format 3\0" + b"\1" * 5000])
def test_what_is_no_casebook_is_left_alone(tmp_path: Path, content: bytes):
    (tmp_path / "x").write_bytes(content)
    with pytest.raises(CasebookError), open_casebook(tmp_path / "x"):
        pass
    assert (tmp_path / "x").read_bytes() == content


def test_another_programs_database_is_left_alone(tmp_path: Path):
    sqlite3.connect(tmp_path / "x.db").execute("CREATE TABLE stock (part TEXT)").connection.commit()
    with pytest.raises(NotACasebook, match="no casebook"), open_casebook(tmp_path / "x.db"):
        pass


def test_a_folder_is_no_casebook(tmp_path: Path):
    with pytest.raises(NotACasebook, match="is a folder"), open_casebook(tmp_path):
        pass


def test_a_newer_casebook_is_refused_politely_and_not_touched(path: Path):
    with open_casebook(path) as book:
        book.store._connection.execute("PRAGMA user_version = 99")
    before = path.read_bytes()
    with pytest.raises(NewerCasebook, match=r"version 99; .* Update Plateside here"), open_casebook(path):
        pass
    assert path.read_bytes() == before


@pytest.mark.parametrize("fixture", sorted(FIXTURES.glob("v*.sql")), ids=lambda file: file.stem)
def test_a_casebook_of_every_earlier_version_is_brought_up_to_date(tmp_path: Path, fixture: Path):
    path = tmp_path / "casebook.db"
    connection = sqlite3.connect(path)
    connection.executescript(fixture.read_text(encoding="utf-8"))
    before = connection.execute("SELECT * FROM entry ORDER BY seq").fetchall()
    connection.close()
    with open_casebook(path) as book:
        assert "casebook as it was is in casebook-before-version-" in book.notes[0] + book.notes[-1]
        assert {row.tag: row.status for row in book.cases()} == {"P-104": "closed", "M-7": "open"}
        assert book.search("grease pump")[0].tag == "P-104"
        assert book.case(book.cases()[0].id).sheet == a_sheet("M-7")
        assert [outcome.found for outcome in book.store.outcomes()] == ["bearing_defect"]
        ask = book.store._connection.execute
        assert ask("SELECT * FROM entry ORDER BY seq").fetchall() == before
        versions = [row[0] for row in ask("SELECT version FROM migration ORDER BY version")]
        assert versions == list(range(1, schema.VERSION + 1))
        book.log_sheet(a_sheet(), "Ada")
    (copy,) = tmp_path.glob("casebook-before-version-*.db")
    assert mode(copy) == 0o600
    kept = sqlite3.connect(copy)
    assert kept.execute("SELECT * FROM entry ORDER BY seq").fetchall() == before
    assert kept.execute("PRAGMA user_version").fetchone()[0] == int(fixture.stem[1:])


def test_there_is_a_fixture_of_every_earlier_version():
    assert {int(file.stem[1:]) for file in FIXTURES.glob("v*.sql")} == set(range(1, schema.VERSION))


def test_a_migration_that_fails_leaves_the_file_as_it_was(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    path = tmp_path / "casebook.db"
    connection = sqlite3.connect(path)
    connection.executescript((FIXTURES / "v1.sql").read_text(encoding="utf-8"))
    connection.close()
    broken = schema.Migration(version=2, name="broken", statements=("DROP TABLE outcome", "NO SQL"))
    monkeypatch.setattr(schema, "MIGRATIONS", (schema.MIGRATIONS[0], broken))
    with pytest.raises(CasebookError, match="syntax error"), open_casebook(path):
        pass
    connection = sqlite3.connect(path)
    assert connection.execute("PRAGMA user_version").fetchone()[0] == 1
    assert connection.execute("SELECT count(*) FROM outcome").fetchone()[0] == 1


def damaged(path: Path, cases: int = 60) -> int:
    """Fill a casebook, overwrite one page in the middle of its entries, and return how many there were."""
    with open_casebook(path) as book:
        for place_ in range(cases):
            book.log_sheet(a_sheet(f"P-{place_}"), "Ada")
        count = book.store.count()
    connection = sqlite3.connect(path)
    connection.execute("PRAGMA journal_mode = DELETE")
    size = connection.execute("PRAGMA page_size").fetchone()[0]
    pages = leaf_pages(path, size)
    connection.close()
    with path.open("r+b") as file:
        file.seek(pages[len(pages) // 2] * size)
        file.write(b"\x5a" * size)
    return count


def use_with_bytes_changed(folder: Path, data: st.DataObject) -> None:
    """Everything that screens do, on a casebook with bytes changed: it works, or it is said in words."""
    path = folder / "casebook.db"
    with open_casebook(path) as book:
        case = book.log_sheet(a_sheet(), "Ada")
        book.record(case, b.Closed(found="overload", confirmed="repair"), person="Ada")
    raw = bytearray(path.read_bytes())
    for _ in range(data.draw(st.integers(1, 30))):
        raw[data.draw(st.integers(0, len(raw) - 1))] = data.draw(st.integers(0, 255))
    path.write_bytes(raw)
    try:
        with open_casebook(path, timeout_s=0.5) as book:
            for use in (
                book.cases, book.scoreboard, book.machines, lambda: book.case(case),
                lambda: book.search("trips"), lambda: book.history("P-104"),
                lambda: book.record(case, b.Note(text="x"), person="Ada"),
                lambda: book.log_sheet(a_sheet(), "Bo"), lambda: list(book.store.all_entries()),
            ):  # fmt: skip
                with contextlib.suppress(CasebookError):
                    use()
    except CasebookError as error:
        assert str(error)


@settings(max_examples=30, deadline=None)
@given(st.data())
def test_a_casebook_with_some_bytes_changed_works_or_says_why(tmp_path_factory, data):
    use_with_bytes_changed(tmp_path_factory.mktemp("damage"), data)


@pytest.mark.long
@settings(max_examples=600, deadline=None)
@given(st.data())
def test_a_casebook_with_bytes_changed_at_random_works_or_says_why(tmp_path_factory, data):
    use_with_bytes_changed(tmp_path_factory.mktemp("damage"), data)


def leaf_pages(path: Path, size: int) -> list[int]:
    """Pages, from 0, that hold rows of the log: leaves of a table (13) with the text of bodies."""
    raw = path.read_bytes()
    pages = [raw[at : at + size] for at in range(0, len(raw), size)]
    return [n for n, page in enumerate(pages) if page[0] == 13 and b'"reading":{' in page]


def test_of_a_damaged_casebook_the_rest_is_saved(path: Path, tmp_path: Path):
    count = damaged(path)
    report = salvage(path, tmp_path / "saved.db")
    assert count - 40 < report.new < count
    assert report.refused >= 1
    assert "cannot be read" in report.refusals[0].why
    with open_casebook(tmp_path / "saved.db") as saved:
        assert saved.case(saved.cases()[0].id).sheet == a_sheet("P-59")
    assert is_sound(tmp_path / "saved.db")


def test_using_a_damaged_casebook_says_what_to_do(path: Path):
    damaged(path)
    with open_casebook(path) as book, pytest.raises(DamagedCasebook, match="salvage"):
        list(book.store.all_entries())
