"""The casebook as one SQLite file.

Write-ahead log, synchronous FULL: when ``atomic`` is left, the entries are on the
disk. Writers take the lock at once (BEGIN IMMEDIATE) and wait for it, so that
several technicians can write to one file.
"""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from functools import partial
from pathlib import Path
from typing import Final

from casebook import heads, schema
from casebook.anchor import Anchor, put_back, set_aside
from casebook.check import check_entry
from casebook.entry import Entry
from casebook.errors import CasebookGone, NewerCasebook
from casebook.opening import connect, copy_whole, translated
from casebook.rows import INSERT, row_of_entry, stamp
from casebook.sqlite_reads import SqliteReads
from casebook.store import TakenIn

_CASES_AT_ONCE: Final = 200


class SqliteStore(SqliteReads):
    """A ``Store`` in one SQLite file. May be used from several threads."""

    def __init__(
        self, path: Path, *, group: bool = False, read_only: bool = False, timeout_s: float = 30.0
    ) -> None:
        """Open a casebook, or start one. Raises ``CasebookError`` with what to do."""
        self.path = path
        self._reconnect = partial(connect, path, group=group, read_only=read_only, timeout_s=timeout_s)
        opened = self._reconnect()
        self._connection = opened.connection
        self.notes = opened.notes
        self.read_only = opened.read_only
        self._lock = threading.RLock()
        self._depth = 0
        self._touched: dict[str, None] = {}  # cases to fold before the transaction ends
        self._later: dict[str, None] = {}  # cases to fold some time later
        self._private = opened.private
        self._anchor = None if self.read_only else Anchor(path)
        self._gone: CasebookGone | None = None
        if not self.read_only:
            self.catch_up()

    @contextmanager
    def atomic(self) -> Iterator[None]:
        """All that is added inside is kept, or nothing; may be nested."""
        with self._lock, translated(self.path):
            outermost = self._depth == 0
            self._begin()
            try:
                yield
                if outermost:
                    self._fold()
                self._end()
            except BaseException:
                self._undo(outermost=outermost)
                raise

    def _fold(self) -> None:
        heads.refresh(self._connection, self._touched)
        later = [(case,) for case in self._later if case not in self._touched]
        self._connection.executemany("INSERT OR IGNORE INTO stale VALUES (?)", later)

    def _begin(self) -> None:
        if self._depth:
            self._connection.execute(f"SAVEPOINT level{self._depth}")
        else:
            self._look()
            self._connection.execute("BEGIN IMMEDIATE")
            if self._connection.execute("PRAGMA user_version").fetchone()[0] > schema.VERSION:
                self._connection.execute("ROLLBACK")
                raise NewerCasebook(f"a newer Plateside has changed the tables of {self.path.name} meanwhile")
        self._depth += 1

    def _look(self) -> None:
        """See that the file still is the one that was opened; put it back where it was removed."""
        state = self._anchor.look() if self._anchor is not None else "here"
        if self._anchor is None or state == "here":
            return
        if state == "replaced":
            self._gone = self._gone or set_aside(self._connection, self.path)
            self._anchor.clear_away(self._connection)
            raise self._gone
        put_back(self._connection, self.path, self._anchor.mode)
        opened = self._reconnect()
        self._connection.close()
        self._connection, self._anchor = opened.connection, Anchor(self.path)
        said = f"{self.path.name} was removed while it was open; it was put back from what was held of it"
        self.notes = (said, *opened.notes)

    def _end(self) -> None:
        self._connection.execute("COMMIT" if self._depth == 1 else f"RELEASE level{self._depth - 1}")
        self._depth -= 1
        if self._depth == 0:
            self._forget()

    def _forget(self) -> None:
        self._touched.clear()
        self._later.clear()

    def _undo(self, *, outermost: bool) -> None:
        """Take back one level without hiding the error that led here."""
        self._depth -= 1
        try:
            if not outermost:
                self._connection.execute(f"ROLLBACK TO level{self._depth}")
                self._connection.execute(f"RELEASE level{self._depth}")
            elif self._connection.in_transaction:
                self._connection.execute("ROLLBACK")
        except sqlite3.Error:
            pass  # SQLite has rolled back by itself, as it does when the disk is full
        if outermost:
            self._forget()

    def add(self, entries: Iterable[Entry], *, fold_later: bool = False) -> int:
        """Add entries, those already there left alone; return how many were new, safely on disk.

        With ``fold_later`` lists and search learn of them at the next ``catch_up``.
        """
        new = 0
        with self.atomic():
            for entry in entries:
                check_entry(entry)
                if self._connection.execute(INSERT, row_of_entry(entry)).rowcount:
                    (self._later if fold_later else self._touched)[entry.case] = None
                    new += 1
        return new

    def catch_up(self, progress: Callable[[int, int], None] | None = None) -> None:
        """Bring lists and search up to date after ``fold_later``; ``progress(done, of)``."""
        waiting = int(self._rows("SELECT count(*) FROM stale", ())[0][0])
        done = 0
        while cases := [row[0] for row in self._rows("SELECT case_id FROM stale LIMIT ?", (_CASES_AT_ONCE,))]:
            with self.atomic():
                self._touched.update(dict.fromkeys(cases))
                self._connection.executemany("DELETE FROM stale WHERE case_id = ?", [(c,) for c in cases])
            done += len(cases)
            if progress is not None:
                progress(done, max(done, waiting))

    def note_taken_in(self, taken: TakenIn) -> None:
        """Remember that a file was merged."""
        values = (stamp(taken.taken_utc), taken.source, taken.entries, taken.new, taken.refused)
        with self.atomic():
            self._connection.execute("INSERT INTO taken_in VALUES (?,?,?,?,?)", values)

    def safe_copy(self, target: Path) -> None:
        """Write a whole and consistent copy to a new file, while others go on writing."""
        with self._reading():
            copy_whole(self._connection, target)

    def close(self) -> None:
        """Let the file go."""
        with self._lock:
            if self._anchor is not None:
                self._anchor.clear_away(self._connection)
            self._connection.close()
            if self._private is not None:
                self._private.cleanup()
