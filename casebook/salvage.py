"""A damaged casebook: what of it can be read, and how to save that into a new one."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path
from typing import Any, Final

import msgspec

from casebook import foreign
from casebook.book import Casebook, open_casebook
from casebook.errors import CasebookError, NotACasebook
from casebook.foreign import Item
from casebook.merge import MergeReport, merge_items

_COLUMNS: Final = "id, case_id, person, time_utc, offset_minutes, kind, body_version, after, body, seq"
_SCAN_BEYOND: Final = 10_000_000


class Damage(msgspec.Struct, frozen=True, kw_only=True):
    """What a check of a file found: nothing, or lines in SQLite's words, and what can be read."""

    problems: tuple[str, ...] = ()
    readable: int = 0
    lost: int = 0

    @property
    def is_sound(self) -> bool:
        """Whether the file can be read in full."""
        return not self.problems and not self.lost


def examine(path: Path) -> Damage:
    """Check a casebook file from end to end, and count the entries that can be read."""
    problems = _integrity(path)
    readable = lost = 0
    for item in salvaged_items(path):
        readable += item.entry is not None
        lost += item.entry is None
    return Damage(problems=tuple(problems), readable=readable, lost=lost)


def salvage(path: Path, target: Path) -> MergeReport:
    """Save every entry that can be read into a new casebook; the damaged file is not touched."""
    if target.exists():
        raise CasebookError(f"{target} exists", advice="Name a new file; nothing is written over")
    with open_casebook(target) as book:
        return _save(book, path)


def _save(book: Casebook, path: Path) -> MergeReport:
    return merge_items(book, salvaged_items(path), source=path.name)


def _integrity(path: Path) -> list[str]:
    try:
        with closing(foreign.open_foreign(path)) as connection:
            rows = connection.execute("PRAGMA integrity_check(20)").fetchall()
    except sqlite3.Error as error:
        return [str(error)]
    return [str(row[0]) for row in rows if row[0] != "ok"]


def salvaged_items(path: Path) -> Iterator[Item]:
    """Yield every entry that can be read, by stepping over what cannot.

    The table is walked upwards; where a page is broken, on from the next number that can be
    read, found through the tree from above.
    """
    try:
        connection = foreign.open_foreign(path)
    except sqlite3.Error as error:
        raise NotACasebook(f"{path.name} cannot be read at all ({error})") from error
    with closing(connection):
        yield from _walk(connection)


def _walk(connection: sqlite3.Connection) -> Iterator[Item]:
    last = 0
    end = _highest(connection)
    while last < end:
        try:
            for row in connection.execute(
                f"SELECT {_COLUMNS} FROM entry WHERE seq > ? ORDER BY seq", (last,)
            ):
                last = row[-1]
                yield foreign.item_of_row(row)
        except sqlite3.DatabaseError as error:
            next_seq = _next_readable(connection, last, end)
            yield Item(f"entries {last + 1} to {next_seq - 1}", None, f"cannot be read ({error})")
            last = next_seq - 1
        else:
            return


def _highest(connection: sqlite3.Connection) -> int:
    """Return the highest number in the table, from the right edge of its tree, or of its indexes."""
    for ask in (
        "SELECT max(seq) FROM entry",
        "SELECT max(rowid) FROM entry INDEXED BY entry_by_case",
        "SELECT count(*) FROM entry INDEXED BY entry_by_case",
    ):
        try:
            found: Any = connection.execute(ask).fetchone()[0]
        except sqlite3.DatabaseError:
            continue
        return int(found or 0)
    return _SCAN_BEYOND


def _next_readable(connection: sqlite3.Connection, last: int, end: int) -> int:
    """Return the next number whose row can be read; ``end + 1`` if none can."""
    for seq in range(last + 1, end + 1):
        try:
            if connection.execute("SELECT length(body) FROM entry WHERE seq = ?", (seq,)).fetchone():
                return seq
        except sqlite3.DatabaseError:
            continue
    return end + 1
