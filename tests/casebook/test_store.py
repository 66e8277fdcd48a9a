"""The file itself: append-only, private, versioned, and honest when something is wrong with it."""

import os
import shutil
import sqlite3
import stat
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from casebook import bodies as b
from casebook import place, schema
from casebook.book import Casebook, open_casebook
from casebook.errors import (
    CasebookBusy,
    CasebookError,
    DamagedCasebook,
    NewerCasebook,
    NoPermission,
    NotACasebook,
)
from casebook.salvage import examine, salvage
from casebook.sqlite_store import SqliteStore

from .conftest import a_sheet

FIXTURES = Path(__file__).with_name("fixtures")
NOBODY = 65534


def mode(path: Path) -> int:
    return stat.S_IMODE(path.stat().st_mode)


@pytest.fixture
def public() -> Iterator[Path]:
    """A folder that every user can enter."""
    folder = Path(tempfile.mkdtemp(prefix="plateside-test-"))
    folder.chmod(0o755)
    yield folder
    shutil.rmtree(folder)


def as_somebody_else(act: Callable[[], str]) -> str:
    """Return what a function returns when a user without special rights calls it."""
    if os.geteuid() != 0:
        return act()
    reader, writer = os.pipe()
    child = os.fork()
    if child == 0:
        try:
            os.setgid(NOBODY)
            os.setuid(NOBODY)
            said = act()
        except BaseException as error:
            said = f"{type(error).__name__}: {error}"
        os.write(writer, said.encode())
        os._exit(0)
    os.close(writer)
    os.waitpid(child, 0)
    with os.fdopen(reader) as pipe:
        return pipe.read()


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


def test_a_casebook_is_readable_by_its_owner_only(path: Path):
    old = os.umask(0)
    try:
        with open_casebook(path) as book:
            book.log_sheet(a_sheet(), "Ada")
            assert mode(path.parent) == 0o700
            assert {mode(file) for file in path.parent.iterdir()} == {0o600}
            assert {file.name for file in path.parent.iterdir()} == {
                "casebook.db", "casebook.db-wal", "casebook.db-shm",
            }  # fmt: skip
    finally:
        os.umask(old)


def test_a_groups_casebook_lets_the_group_write_all_its_files(path: Path):
    old = os.umask(0o077)
    try:
        with open_casebook(path, group=True) as book:
            book.log_sheet(a_sheet(), "Ada")
            assert path.parent.stat().st_mode & stat.S_ISGID
            assert mode(path.parent) == 0o2770
            assert {mode(file) for file in path.parent.iterdir()} == {0o660}
    finally:
        os.umask(old)


def test_a_casebook_that_everybody_can_read_is_mentioned(path: Path):
    with open_casebook(path):
        pass
    path.chmod(0o644)
    with open_casebook(path) as book:
        assert book.notes == ("casebook.db can be read by everybody on this machine (mode 644)",)


def test_the_casebook_is_where_the_environment_says(monkeypatch: pytest.MonkeyPatch, tmp_path: Path):
    monkeypatch.setenv("PLATESIDE_CASEBOOK", str(tmp_path / "shop.db"))
    assert place.default_path() == tmp_path / "shop.db"
    monkeypatch.delenv("PLATESIDE_CASEBOOK")
    monkeypatch.setenv("XDG_DATA_HOME", str(tmp_path))
    assert place.default_path().name == "casebook.db"


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


@pytest.mark.parametrize("journal", [True, False])
def test_a_read_only_folder_is_read_and_said_so(public: Path, journal: bool):
    folder = public / "shelf"
    with open_casebook(folder / "casebook.db") as book:
        case = book.log_sheet(a_sheet(), "Ada")
        if journal:  # a copy taken while it was open: the entries are in the journal alone
            keep = {name: (folder / name).read_bytes() for name in ("casebook.db", "casebook.db-wal")}
    if journal:
        for name, content in keep.items():
            (folder / name).write_bytes(content)
    for file in folder.iterdir():
        file.chmod(0o444)
    folder.chmod(0o555)

    def read() -> str:
        with open_casebook(folder / "casebook.db") as book:
            assert book.case(case).sheet == a_sheet()
            assert book.search("trips")[0].id == case
            try:
                book.log_sheet(a_sheet(), "Ada")
            except NoPermission:
                return "; ".join(book.notes)
            return "written"

    try:
        said = as_somebody_else(read)
    finally:
        folder.chmod(0o755)
    assert "casebook.db may not be written by you: read only" in said


def test_a_folder_without_permission_is_named(public: Path):
    shut = public / "shut"
    shut.mkdir(mode=0o500)
    shut.chmod(0o555)

    def start() -> str:
        with pytest.raises(NoPermission) as refused:
            SqliteStore(shut / "sub" / "casebook.db")
        return str(refused.value)

    assert "cannot be made" in as_somebody_else(start)


def test_reading_only_starts_no_file(tmp_path: Path):
    with (
        pytest.raises(CasebookError, match="there is no casebook"),
        open_casebook(tmp_path / "x", read_only=True),
    ):
        pass
    assert not (tmp_path / "x").exists()


def test_a_shared_file_system_gets_a_journal_that_works_there(path: Path, monkeypatch: pytest.MonkeyPatch):
    monkeypatch.setattr(place, "_file_system", lambda _: "nfs4")
    with open_casebook(path) as book:
        case = book.log_sheet(a_sheet(), "Ada")
        assert book.store._connection.execute("PRAGMA journal_mode").fetchone()[0] == "delete"
        assert "shared file system (nfs4)" in book.notes[0]
        assert book.case(case).sheet == a_sheet()


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


def leaf_pages(path: Path, size: int) -> list[int]:
    """Pages, from 0, that hold rows of the log: leaves of a table (13) with the text of bodies."""
    raw = path.read_bytes()
    pages = [raw[at : at + size] for at in range(0, len(raw), size)]
    return [n for n, page in enumerate(pages) if page[0] == 13 and b'"reading":{' in page]


def test_of_a_damaged_casebook_the_rest_is_saved(path: Path, tmp_path: Path):
    count = damaged(path)
    found = examine(path)
    assert not found.is_sound
    assert count - 40 < found.readable < count
    report = salvage(path, tmp_path / "saved.db")
    assert report.new == found.readable
    assert report.refused >= 1
    assert "cannot be read" in report.refusals[0].why
    with open_casebook(tmp_path / "saved.db") as saved:
        assert saved.case(saved.cases()[0].id).sheet == a_sheet("P-59")
    assert examine(tmp_path / "saved.db").is_sound


def test_using_a_damaged_casebook_says_what_to_do(path: Path):
    damaged(path)
    with open_casebook(path) as book, pytest.raises(DamagedCasebook, match="salvage"):
        list(book.store.all_entries())
