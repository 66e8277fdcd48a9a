"""What is asked of a casebook file: cases, lists, search, machines, outcomes, changes."""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any, Final, TypeVar

import msgspec

from casebook import heads
from casebook.entry import Entry
from casebook.opening import translated
from casebook.rows import COLUMNS, entry_of_row, moment_of
from casebook.search import query_of
from casebook.store import CaseRow, Changes, MachineRow, Outcome, TakenIn, machine_key

_ROW_COLUMNS: Final = (
    "h.place, h.case_id, h.number, h.status, h.opened_utc, h.last_utc, h.entries, h.tag, h.kind,"
    " h.complaint, h.suspect, h.found, h.confirmed, h.persons"
)
T = TypeVar("T")
_END: Final = 2**62
_BATCH: Final = 1000


class SqliteReads:
    """The questions of a ``Store``, answered from a SQLite connection."""

    path: Path
    _connection: sqlite3.Connection
    _lock: threading.RLock

    def case_entries(self, case: str) -> tuple[Entry, ...]:
        """Return the entries of one case in the order in which they came."""
        with self._reading():
            return heads.entries_of_case(self._connection, case)

    def all_entries(self) -> Iterator[Entry]:
        """Yield every entry in the order in which they came, without holding them all."""
        last = 0
        ask = f"SELECT {COLUMNS}, seq FROM entry WHERE seq > ? ORDER BY seq LIMIT ?"
        while rows := self._made(lambda row: (entry_of_row(row[:-1]), row[-1]), ask, (last, _BATCH)):
            yield from (entry for entry, _ in rows)
            last = rows[-1][1]

    def held(self, ids: Iterable[str]) -> dict[str, Entry]:
        """Return those of these entry ids that are there, with their entries."""
        with self._reading():
            ask = f"SELECT {COLUMNS} FROM entry WHERE id = ?"
            rows = [self._connection.execute(ask, (one,)).fetchone() for one in ids]
            return {row[0]: entry_of_row(row) for row in rows if row}

    def taken_in(self, *, limit: int = 20) -> list[TakenIn]:
        """Return the merges into this file, newest first."""
        ask = "SELECT taken_utc, source, entries, new, refused FROM taken_in ORDER BY rowid DESC LIMIT ?"
        return self._made(_taken_of_row, ask, (limit,))

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
        return self._made(_machine_of_row, ask, (key, key + "\U0010ffff", limit))

    def machine_cases(self, tag: str) -> tuple[str, ...]:
        """Return the ids of a machine's cases, oldest activity first."""
        ask = "SELECT case_id FROM case_head WHERE machine_key = ? ORDER BY place"
        return tuple(row[0] for row in self._rows(ask, (machine_key(tag),)))

    def outcomes(self, kind: str = "") -> Iterator[Outcome]:
        """Yield what each closed case teaches, of one machine kind or of all."""
        last = ""
        ask = (
            "SELECT case_id, closed_utc, kind, power_w, complaint, found, confirmed, readings, minutes,"
            " odds, observations FROM outcome"
            " WHERE case_id > ? AND (kind = ? OR ? = '') ORDER BY case_id LIMIT ?"
        )
        while outcomes := self._made(_outcome_of_row, ask, (last, kind, kind, _BATCH)):
            yield from outcomes
            last = outcomes[-1].case

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

    @contextmanager
    def _reading(self) -> Iterator[None]:
        with self._lock, translated(self.path):
            yield

    def _rows(self, ask: str, values: tuple[object, ...]) -> list[tuple[Any, ...]]:
        with self._reading():
            return self._connection.execute(ask, values).fetchall()

    def _made(self, make: Callable[[tuple[Any, ...]], T], ask: str, values: tuple[object, ...]) -> list[T]:
        """Return what is made of each row; a row that makes no sense is told as damage."""
        with self._reading():
            return [make(row) for row in self._connection.execute(ask, values)]

    def _case_rows(self, rows: list[tuple[Any, ...]]) -> list[CaseRow]:
        with self._reading():
            return [heads.case_row(self._connection, row) for row in rows]


def _machine_of_row(row: tuple[Any, ...]) -> MachineRow:
    return MachineRow(tag=row[0], kind=row[1], cases=row[2], last_utc=moment_of(row[3]))


def _taken_of_row(row: tuple[Any, ...]) -> TakenIn:
    return TakenIn(taken_utc=moment_of(row[0]), source=row[1], entries=row[2], new=row[3], refused=row[4])


def _outcome_of_row(row: tuple[Any, ...]) -> Outcome:
    return Outcome(
        case=row[0],
        closed_utc=moment_of(row[1]),
        kind=row[2],
        power_w=row[3],
        complaint=row[4],
        found=row[5],
        confirmed=row[6],
        readings=row[7],
        minutes=row[8],
        odds=msgspec.json.decode(row[9], type=dict[str, float]),
        observations=msgspec.json.decode(row[10], type=dict[str, bool]),
    )
