"""Reading a table of entries that may be damaged: row by row, stepping over what cannot be read."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from typing import Any, Final, NamedTuple

_COLUMNS: Final = "id, case_id, person, time_utc, offset_minutes, kind, body_version, after, body, seq"
_ABOVE: Final = f"SELECT {_COLUMNS} FROM entry WHERE seq > ? ORDER BY seq"
_LONGEST_GAP: Final = 200_000


class Gap(NamedTuple):
    """Numbers of rows that cannot be read, both ends included; ``last`` None is "to the end"."""

    first: int
    last: int | None
    why: str

    @property
    def where(self) -> str:
        """The place in words."""
        if self.last == self.first:
            return f"entry {self.first}"
        return f"entries {self.first} to {self.last if self.last is not None else 'the last'}"


def walk(connection: sqlite3.Connection) -> Iterator[tuple[Any, ...] | Gap]:
    """Yield rows of ``entry``, their number last, in rising order, and a ``Gap`` for what cannot be read."""
    last = 0
    while True:
        try:
            for row in connection.execute(_ABOVE, (last,)):
                last = row[-1]
                yield row
        except sqlite3.DatabaseError:
            pass  # the row before the bad one is lost with it: look at each alone
        else:
            return
        gap: Gap | None = None
        for found in _one_by_one(connection, last):
            yield found
            if isinstance(found, Gap):
                gap = found
            else:
                last = found[-1]
        if gap is None or gap.last is None:
            return
        last = gap.last


def _one_by_one(connection: sqlite3.Connection, last: int) -> Iterator[tuple[Any, ...] | Gap]:
    """Yield single rows up to the first that cannot be read, then the gap that it begins."""
    while True:
        try:
            row = connection.execute(f"{_ABOVE} LIMIT 1", (last,)).fetchone()
        except sqlite3.DatabaseError as error:
            after = _next_readable(connection, last)
            yield Gap(last + 1, None if after is None else after - 1, str(error))
            return
        if row is None:
            return
        last = row[-1]
        yield row


def _next_readable(connection: sqlite3.Connection, last: int) -> int | None:
    """Return the next number whose row can be read; None if none can within a long way."""
    end = _highest(connection)
    for seq in range(last + 1, last + 1 + _LONGEST_GAP):
        if end is not None and seq > end:
            return None
        try:
            if connection.execute(f"SELECT {_COLUMNS} FROM entry WHERE seq = ?", (seq,)).fetchone():
                return seq
        except sqlite3.DatabaseError:
            continue
    return None


def _highest(connection: sqlite3.Connection) -> int | None:
    """Return the highest number in the table, from the right edge of its tree or from an index."""
    for ask in ("SELECT max(seq) FROM entry", "SELECT max(rowid) FROM entry INDEXED BY entry_by_case"):
        try:
            found = connection.execute(ask).fetchone()[0]
        except sqlite3.DatabaseError:
            continue
        return int(found or 0)
    return None
