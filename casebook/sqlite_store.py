"""The casebook as one SQLite file.

Write-ahead log, synchronous FULL: when ``atomic`` is left, the entries are on the
disk. Writers take the lock at once (BEGIN IMMEDIATE) and wait for it, so that
several technicians can write to one file.
"""

from __future__ import annotations

import os
import sqlite3
import threading
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any, Final

import msgspec

from casebook import heads
from casebook.check import check_entry
from casebook.entry import Entry
from casebook.opening import connect, translated
from casebook.rows import INSERT, entry_of_row, moment_of, row_of_entry
from casebook.search import query_of
from casebook.store import CaseRow, Changes, MachineRow, Outcome, machine_key

_ENTRY_COLUMNS: Final = "id, case_id, person, time_utc, offset_minutes, kind, body_version, after, body"
_ROW_COLUMNS: Final = (
    "h.place, h.case_id, h.number, h.status, h.opened_utc, h.last_utc, h.entries, h.tag, h.kind,"
    " h.complaint, h.suspect, h.found, h.confirmed, h.persons"
)
_END: Final = 2**62
_BATCH: Final = 1000


class SqliteStore:
    """A ``Store`` in one SQLite file. May be used from several threads."""

    def __init__(
        self, path: Path, *, group: bool = False, read_only: bool = False, timeout_s: float = 30.0
    ) -> None:
        """Open a casebook, or start one. Raises ``CasebookError`` with what to do."""
        self.path = path
        opened = connect(path, group=group, read_only=read_only, timeout_s=timeout_s)
        self._connection = opened.connection
        self.notes = opened.notes
        self.read_only = opened.read_only
        self._lock = threading.RLock()
        self._depth = 0
        self._touched: dict[str, None] = {}

    @contextmanager
    def atomic(self) -> Iterator[None]:
        """All that is added inside is kept, or nothing; may be nested."""
        with self._lock, translated(self.path):
            outermost = self._depth == 0
            self._begin()
            try:
                yield
                if outermost:
                    heads.refresh(self._connection, self._touched)
                self._end()
            except BaseException:
                self._undo(outermost=outermost)
                raise

    def _begin(self) -> None:
        self._connection.execute("BEGIN IMMEDIATE" if self._depth == 0 else f"SAVEPOINT level{self._depth}")
        self._depth += 1

    def _end(self) -> None:
        self._connection.execute("COMMIT" if self._depth == 1 else f"RELEASE level{self._depth - 1}")
        self._depth -= 1
        if self._depth == 0:
            self._touched.clear()

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
            self._touched.clear()

    def add(self, entries: Iterable[Entry]) -> int:
        """Add entries, those already there left alone; return how many were new, safely on disk."""
        new = 0
        with self.atomic():
            for entry in entries:
                check_entry(entry)
                if self._connection.execute(INSERT, row_of_entry(entry)).rowcount:
                    self._touched[entry.case] = None
                    new += 1
        return new

    def case_entries(self, case: str) -> tuple[Entry, ...]:
        """Return the entries of one case in the order in which they came."""
        with self._reading():
            return heads.entries_of_case(self._connection, case)

    def all_entries(self) -> Iterator[Entry]:
        """Yield every entry in the order in which they came, without holding them all."""
        last = 0
        while rows := self._rows(
            f"SELECT seq, {_ENTRY_COLUMNS} FROM entry WHERE seq > ? ORDER BY seq LIMIT ?", (last, _BATCH)
        ):
            for row in rows:
                yield entry_of_row(row[1:])
            last = rows[-1][0]

    def held_ids(self, ids: Iterable[str]) -> set[str]:
        """Return which of these entry ids are there."""
        with self._reading():
            ask = "SELECT 1 FROM entry WHERE id = ?"
            return {one for one in ids if self._connection.execute(ask, (one,)).fetchone()}

    def last_id(self, case: str) -> str | None:
        """Return the id of a case's last entry in reading order."""
        rows = self._rows("SELECT last_id FROM case_head WHERE case_id = ?", (case,))
        return rows[0][0] if rows else None

    def find_cases(self, number: str) -> tuple[str, ...]:
        """Return the ids of cases whose full number begins so; at most 20."""
        ask = "SELECT case_id FROM case_head WHERE number >= ? AND number < ? ORDER BY number LIMIT 20"
        return tuple(row[0] for row in self._rows(ask, (number, number + "\x7f")))

    def list_cases(self, *, limit: int = 50, before: int | None = None, status: str = "") -> list[CaseRow]:
        """Return cases, newest activity first; ``before`` is the ``place`` of the last row seen."""
        by_status = "h.status = ? AND" if status else "? = '' AND"
        ask = (
            f"SELECT {_ROW_COLUMNS}, '' FROM case_head h"
            f" WHERE {by_status} h.place < ? ORDER BY h.place DESC LIMIT ?"
        )
        return self._case_rows(self._rows(ask, (status, before or _END, limit)))

    def search(self, text: str, *, limit: int = 50, before: int | None = None) -> list[CaseRow]:
        """Return cases that hold every word of a text (or a word beginning so), newest first."""
        query = query_of(text)
        if query is None:
            return self.list_cases(limit=limit, before=before) if not text.strip() else []
        ask = (
            f"SELECT {_ROW_COLUMNS}, snippet(case_text, -1, '', '', '…', 10)"
            " FROM case_text JOIN case_head h ON h.place = case_text.rowid"
            " WHERE case_text MATCH ? AND case_text.rowid < ? ORDER BY case_text.rowid DESC LIMIT ?"
        )
        return self._case_rows(self._rows(ask, (query, before or _END, limit)))

    def machines(self, start: str = "", *, limit: int = 20) -> list[MachineRow]:
        """Return machines whose tag begins so, by tag."""
        key = machine_key(start)
        ask = (
            "SELECT tag, kind, count(*), max(last_utc) FROM case_head"
            " WHERE machine_key >= ? AND machine_key < ? AND machine_key <> ''"
            " GROUP BY machine_key ORDER BY machine_key LIMIT ?"
        )
        return [
            MachineRow(tag=tag, kind=kind, cases=cases, last_utc=moment_of(last))
            for tag, kind, cases, last in self._rows(ask, (key, key + "\U0010ffff", limit))
        ]

    def machine_cases(self, tag: str) -> tuple[str, ...]:
        """Return the ids of a machine's cases, oldest activity first."""
        ask = "SELECT case_id FROM case_head WHERE machine_key = ? ORDER BY place"
        return tuple(row[0] for row in self._rows(ask, (machine_key(tag),)))

    def outcomes(self) -> Iterator[Outcome]:
        """Yield what each closed case teaches."""
        last = ""
        ask = (
            "SELECT case_id, kind, power_w, complaint, found, confirmed, readings, minutes, odds,"
            " observations FROM outcome WHERE case_id > ? ORDER BY case_id LIMIT ?"
        )
        while rows := self._rows(ask, (last, _BATCH)):
            yield from (_outcome_of_row(row) for row in rows)
            last = rows[-1][0]

    def changed_since(self, token: int) -> Changes:
        """Return what came in since a token of an earlier answer; cheap when nothing did."""
        newest = self._rows("SELECT coalesce(max(seq), 0) FROM entry", ())[0][0]
        if newest <= token:
            return Changes(token=newest)
        rows = self._rows("SELECT DISTINCT case_id FROM entry WHERE seq > ? AND seq <= ?", (token, newest))
        return Changes(token=newest, cases=tuple(row[0] for row in rows))

    def count(self) -> int:
        """Return the number of entries."""
        return int(self._rows("SELECT count(*) FROM entry", ())[0][0])

    def safe_copy(self, target: Path) -> None:
        """Write a whole and consistent copy to a new file, while others go on writing."""
        if target.exists():
            raise FileExistsError(target)
        with self._reading():
            os.close(os.open(target, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o600))
            self._connection.execute("VACUUM INTO ?", (str(target),))

    def close(self) -> None:
        """Let the file go."""
        with self._lock:
            self._connection.close()

    @contextmanager
    def _reading(self) -> Iterator[None]:
        with self._lock, translated(self.path):
            yield

    def _rows(self, ask: str, values: tuple[object, ...]) -> list[tuple[Any, ...]]:
        with self._reading():
            return self._connection.execute(ask, values).fetchall()

    def _case_rows(self, rows: list[tuple[Any, ...]]) -> list[CaseRow]:
        with self._reading():
            return [heads.case_row(self._connection, row) for row in rows]


def _outcome_of_row(row: tuple[Any, ...]) -> Outcome:
    return Outcome(
        case=row[0],
        kind=row[1],
        power_w=row[2],
        complaint=row[3],
        found=row[4],
        confirmed=row[5],
        readings=row[6],
        minutes=row[7],
        odds=msgspec.json.decode(row[8], type=dict[str, float]),
        observations=msgspec.json.decode(row[9], type=dict[str, bool]),
    )
