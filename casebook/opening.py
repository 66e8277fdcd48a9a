"""Opening a casebook file: journal, version, migrations, and errors in words."""

from __future__ import annotations

import os
import shutil
import sqlite3
import time
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Final, NamedTuple

import msgspec

from casebook import heads, place, schema
from casebook.errors import (
    BadRow,
    CasebookBusy,
    CasebookError,
    DamagedCasebook,
    DiskFails,
    DiskFull,
    NewerCasebook,
    NoPermission,
    NotACasebook,
)
from casebook.rows import stamp

_REBUILD_BATCH: Final = 500


class Opened(NamedTuple):
    """A connection that is ready for use, and what the person should know about it."""

    connection: sqlite3.Connection
    read_only: bool
    notes: tuple[str, ...]
    private: TemporaryDirectory[str] | None = None
    """The folder of a private copy, where reading needs one; to be removed after use."""


def connect(path: Path, *, group: bool, read_only: bool, timeout_s: float) -> Opened:
    """Open or start a casebook. Raises ``CasebookError`` with what to do."""
    try:
        return _connect(path, group=group, read_only=read_only, timeout_s=timeout_s)
    except PermissionError as error:
        raise NoPermission(f"{path} may not be reached by you") from error
    except OSError as error:
        raise CasebookError(f"{path} cannot be used: {error.strerror}") from error


def _connect(path: Path, *, group: bool, read_only: bool, timeout_s: float) -> Opened:
    if read_only or (path.exists() and not place.is_writable(path)):
        return _open_to_read(path, asked=read_only)
    place.prepare(path, group=group)
    with translated(path):
        connection = _connection(path, "mode=rw", timeout_s)
        try:
            version = _check_version(connection, path)
            notes = [_choose_journal(connection, path, timeout_s), place.privacy_note(path)]
            connection.execute("PRAGMA synchronous = FULL")
            connection.execute("PRAGMA recursive_triggers = ON")  # REPLACE must not slip past the triggers
            if version < schema.VERSION:
                notes.append(_migrate(connection, path, version))
        except BaseException:
            connection.close()
            raise
    return Opened(connection, False, tuple(note for note in notes if note))


def _connection(path: Path, options: str, timeout_s: float) -> sqlite3.Connection:
    return sqlite3.connect(
        place.uri(path, options),
        uri=True,
        timeout=timeout_s,
        isolation_level=None,
        check_same_thread=False,
    )


def _check_version(connection: sqlite3.Connection, path: Path) -> int:
    """Return the version of the file's tables; 0 is a new file."""
    mark = connection.execute("PRAGMA application_id").fetchone()[0]
    version = int(connection.execute("PRAGMA user_version").fetchone()[0])
    empty = connection.execute("SELECT count(*) FROM sqlite_master").fetchone()[0] == 0
    if mark != schema.APPLICATION_ID and not (mark == 0 and empty):
        raise NotACasebook(f"{path} is a database, but no casebook")
    if version > schema.VERSION:
        raise NewerCasebook(
            f"{path} has tables of version {version}; this Plateside knows them up to {schema.VERSION}"
        )
    return version


def _choose_journal(connection: sqlite3.Connection, path: Path, timeout_s: float) -> str:
    """Use a write-ahead log where it can work; return why not, where it cannot."""
    shared = place.shared_file_system(path)
    if shared:
        _set_journal(connection, "DELETE", timeout_s)
        return f"{path.name} lies on a shared file system ({shared}): one person at a time, and slower"
    if _set_journal(connection, "WAL", timeout_s) != "wal":
        _set_journal(connection, "DELETE", timeout_s)
        return f"the file system of {path.name} cannot share memory: one person at a time, and slower"
    return ""


def _set_journal(connection: sqlite3.Connection, mode: str, timeout_s: float) -> str:
    """Set the journal; wait while another process opens the file at the same moment."""
    deadline = time.monotonic() + timeout_s
    while True:
        try:
            now = str(connection.execute("PRAGMA journal_mode").fetchone()[0])
            if now == mode.lower():
                return now
            return str(connection.execute(f"PRAGMA journal_mode = {mode}").fetchone()[0])
        except sqlite3.OperationalError as error:
            busy = (error.sqlite_errorcode & 0xFF) in {sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED}
            if not busy or time.monotonic() > deadline:
                raise
            time.sleep(0.02)


def _migrate(connection: sqlite3.Connection, path: Path, version: int) -> str:
    """Bring the tables to this program's version; each step and its record are one transaction.

    A file that holds anything is copied first; returns the sentence that says so.
    """
    copied = _copy_before(connection, path) if version else ""
    for step in schema.MIGRATIONS:
        connection.execute("BEGIN IMMEDIATE")
        try:
            if connection.execute("PRAGMA user_version").fetchone()[0] < step.version:
                _apply(connection, step)
            connection.execute("COMMIT")
        except BaseException:
            if connection.in_transaction:
                connection.execute("ROLLBACK")
            raise
    return copied


def _copy_before(connection: sqlite3.Connection, path: Path) -> str:
    moment = datetime.now(UTC).strftime("%Y%m%dT%H%M%SZ")
    target = path.with_name(
        f"{path.stem}-before-version-{schema.VERSION}-{moment}-{os.getpid()}{path.suffix}"
    )
    copy_whole(connection, target)
    return f"the tables were brought up to date; the casebook as it was is in {target.name}"


def copy_whole(connection: sqlite3.Connection, target: Path) -> None:
    """Write a consistent copy to a new file that only its owner can read."""
    try:
        os.close(os.open(target, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o600))
    except FileExistsError as error:
        raise CasebookError(f"{target} exists", advice="Name a new file; nothing is written over") from error
    except OSError as error:
        raise CasebookError(f"{target} cannot be written: {error.strerror}") from error
    try:
        connection.execute("VACUUM INTO ?", (str(target),))
    except BaseException:
        target.unlink(missing_ok=True)
        raise


def _apply(connection: sqlite3.Connection, step: schema.Migration) -> None:
    for statement in step.statements:
        connection.execute(statement)
    if step.rebuild:
        rebuild(connection)
    connection.execute(
        "INSERT INTO migration VALUES (?, ?, ?)", (step.version, step.name, stamp(datetime.now(UTC)))
    )
    connection.execute(f"PRAGMA user_version = {step.version:d}")
    connection.execute(f"PRAGMA application_id = {schema.APPLICATION_ID:d}")


def rebuild(connection: sqlite3.Connection) -> None:
    """Make every derived row anew from the entries, inside the caller's transaction."""
    connection.execute("DELETE FROM case_head")
    connection.execute("DELETE FROM outcome")
    last = ""
    ask = "SELECT DISTINCT case_id FROM entry WHERE case_id > ? ORDER BY case_id LIMIT ?"
    while cases := [row[0] for row in connection.execute(ask, (last, _REBUILD_BATCH))]:
        heads.refresh(connection, cases)
        last = cases[-1]


def _open_to_read(path: Path, *, asked: bool) -> Opened:
    """Open without any right to write; an older file, or one with a journal, as a private copy."""
    if not path.exists():
        raise CasebookError(f"there is no casebook {path}")
    place.refuse_other_files(path)
    why = "opened to read only" if asked else f"{path.name} may not be written by you: read only"
    with translated(path):
        connection = _try_to_read(path, "mode=ro")
        if connection is None and not _journal_holds_entries(path):
            # Without a right to write in the folder SQLite cannot share the file with writers.
            connection, why = _try_to_read(path, "immutable=1"), f"{why}, as it is now"
        if connection is not None and _check_version(connection, path) == schema.VERSION:
            return Opened(connection, True, (why,))
        if connection is not None:
            connection.close()
        return _open_private_copy(path, f"{why}, as it is now")


def _try_to_read(path: Path, options: str) -> sqlite3.Connection | None:
    connection = _connection(path, options, 5.0)
    try:
        connection.execute("SELECT count(*) FROM sqlite_master").fetchone()
    except sqlite3.OperationalError:
        connection.close()
        return None
    return connection


def _journal_holds_entries(path: Path) -> bool:
    journal = Path(f"{path}-wal")
    return journal.exists() and journal.stat().st_size > 0


def _open_private_copy(path: Path, why: str) -> Opened:
    folder = TemporaryDirectory(prefix="plateside-")
    copy = Path(folder.name) / "copy.db"
    try:
        shutil.copyfile(path, copy)
        if _journal_holds_entries(path):
            shutil.copyfile(f"{path}-wal", f"{copy}-wal")
        opened = connect(copy, group=False, read_only=False, timeout_s=5.0)
        opened.connection.execute("PRAGMA query_only = ON")
    except BaseException as error:
        folder.cleanup()
        if isinstance(error, OSError):
            raise CasebookError(f"{path.name} could not be copied to be read: {error.strerror}") from error
        raise
    return Opened(opened.connection, True, (why,), folder)


@contextmanager
def translated(path: Path) -> Iterator[None]:
    """Turn what SQLite says into what a person can act on."""
    try:
        yield
    except sqlite3.Error as error:
        raise _in_words(error, path) from error
    except (UnicodeDecodeError, BadRow, msgspec.DecodeError) as error:
        raise DamagedCasebook(f"{path} is damaged ({error})") from error


_READ_ONLY: Final = {
    sqlite3.SQLITE_READONLY, sqlite3.SQLITE_PERM, sqlite3.SQLITE_CANTOPEN, sqlite3.SQLITE_AUTH,
}  # fmt: skip


def _in_words(error: sqlite3.Error, path: Path) -> CasebookError:
    code = (getattr(error, "sqlite_errorcode", None) or 0) & 0xFF
    known: dict[int, tuple[type[CasebookError], str]] = {
        sqlite3.SQLITE_FULL: (DiskFull, f"the disk that holds {path.name} is full"),
        sqlite3.SQLITE_IOERR: (DiskFails, f"the disk that holds {path.name} does not obey ({error})"),
        sqlite3.SQLITE_NOTADB: (NotACasebook, f"{path} is no casebook"),
        sqlite3.SQLITE_CORRUPT: (DamagedCasebook, f"{path} is damaged ({error})"),
        **dict.fromkeys(
            (sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED),
            (CasebookBusy, f"{path.name} is held by another program"),
        ),
        **dict.fromkeys(_READ_ONLY, (NoPermission, f"{path} may not be written, or not be opened, by you")),
    }
    kind, what = known.get(code, (CasebookError, f"{path} could not be used ({error})"))
    return kind(what)
