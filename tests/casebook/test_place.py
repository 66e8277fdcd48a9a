"""Where a casebook lies: private, shared with a group, or only to be read."""

import os
import shutil
import stat
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from casebook import place
from casebook.book import open_casebook
from casebook.errors import (
    CasebookError,
    NoPermission,
)
from casebook.sqlite_store import SqliteStore

from .conftest import a_sheet, mode

NOBODY = 65534


@pytest.fixture
def public() -> Iterator[Path]:
    """A folder that every user can enter."""
    folder = Path(tempfile.mkdtemp(prefix="plateside-test-"))
    folder.chmod(0o755)
    yield folder
    shutil.rmtree(folder)


def as_somebody_else(act: Callable[[], str], *, user: int = NOBODY, group: int = NOBODY) -> str:
    """Return what a function returns when a user without special rights calls it."""
    if os.geteuid() != 0:
        return act()
    reader, writer = os.pipe()
    child = os.fork()
    if child == 0:
        try:
            os.setgroups([])
            os.setgid(group)
            os.setuid(user)
            os.umask(0o077)
            said = act()
        except BaseException as error:
            said = f"{type(error).__name__}: {error}"
        os.write(writer, said.encode())
        os._exit(0)
    os.close(writer)
    os.waitpid(child, 0)
    with os.fdopen(reader) as pipe:
        return pipe.read()


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


def test_two_people_of_one_group_write_to_one_casebook(public: Path):
    shop = public / "shop"
    shop.mkdir()
    shop.chmod(0o2770)
    if os.geteuid() == 0:
        os.chown(shop, 1001, 5000)

    def write() -> str:
        with open_casebook(shop / "casebook.db", group=True) as book:
            book.log_sheet(a_sheet(), f"user {os.geteuid()}")
            return str(len(book.cases()))

    assert as_somebody_else(write, user=1001, group=5000) == "1"
    assert as_somebody_else(write, user=1002, group=5000) == "2"
    if os.geteuid() == 0:
        assert "NoPermission" in as_somebody_else(write, user=1003, group=5001)


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


@pytest.mark.parametrize("name", ["x" * 300, "file/below.db"])
def test_a_name_that_cannot_be_is_refused_in_words(tmp_path: Path, name: str):
    (tmp_path / "file").write_text("", encoding="utf-8")
    with pytest.raises(CasebookError, match="cannot be"), open_casebook(tmp_path / name):
        pass


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
