"""Reading a table of entries that may be damaged: row by row, stepping over what cannot be read."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from typing import Any, Final, NamedTuple

from casebook.rows import COLUMNS

_ABOVE: Final = f"SELECT {COLUMNS}, seq FROM entry WHERE seq > ? ORDER BY seq"
_ONE: Final = f"SELECT {COLUMNS}, seq FROM entry WHERE seq = ?"
_LONGEST_GAP: Final = 200_000

UNREADABLE: Final = (sqlite3.DatabaseError, UnicodeDecodeError)
"""What comes of a damaged page: SQLite's error, or an error whose own text is damaged."""

Row = tuple[Any, ...]


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


def walk(connection: sqlite3.Connection) -> Iterator[Row | Gap]:
    """Yield rows of ``entry``, their number last, in rising order, and a ``Gap`` for what cannot be read.

    A damaged tree may send the reader in circles: what does not rise is not followed.
    """
    last: int | None = 0
    while last is not None:
        why = ""
        try:
            for row in connection.execute(_ABOVE, (last,)):
                if not isinstance(row[-1], int) or row[-1] <= last:
                    why = "its rows are out of order"
                    break
                last = row[-1]
                yield row
            else:
                return
        except UNREADABLE as error:
            why = str(error)
        # The row before the bad one may have been lost with it: go on by single numbers.
        row_after = _next_readable(connection, last)
        after = None if row_after is None else int(row_after[-1])
        if after != last + 1 and not (after is None and last == _highest(connection)):
            yield Gap(last + 1, None if after is None else after - 1, why)
        if row_after is not None:
            yield row_after
        last = after


def _next_readable(connection: sqlite3.Connection, last: int) -> Row | None:
    """Return the next row that can be read by its number; None if none can within a long way."""
    end = _highest(connection)
    for seq in range(last + 1, last + 1 + _LONGEST_GAP):
        if end is not None and seq > end:
            return None
        try:
            row = connection.execute(_ONE, (seq,)).fetchone()
        except UNREADABLE:
            continue
        if row is not None and row[-1] == seq:
            return tuple(row)
    return None


def _highest(connection: sqlite3.Connection) -> int | None:
    """Return the highest number in the table, from the right edge of its tree or from an index."""
    for ask in ("SELECT max(seq) FROM entry", "SELECT max(rowid) FROM entry INDEXED BY entry_by_case"):
        try:
            found = connection.execute(ask).fetchone()[0]
        except UNREADABLE:
            continue
        return int(found or 0)
    return None
