"""A damaged casebook: what of it can be read, and how to save that into a new one."""

from __future__ import annotations

from contextlib import closing
from pathlib import Path

import msgspec

from casebook.book import open_casebook
from casebook.errors import CasebookError
from casebook.foreign import open_foreign, read_items
from casebook.merge import MergeReport, merge_items
from casebook.walk import UNREADABLE


class Damage(msgspec.Struct, frozen=True, kw_only=True):
    """What a check of a file found: nothing, or lines in SQLite's words, and what can be read."""

    problems: tuple[str, ...] = ()
    readable: int = 0
    unreadable: tuple[str, ...] = ()

    @property
    def is_sound(self) -> bool:
        """Whether the file can be read in full."""
        return not self.problems and not self.unreadable


def examine(path: Path) -> Damage:
    """Check a casebook file from end to end, and count the entries that can be read."""
    problems = _integrity(path)
    readable = 0
    unreadable: list[str] = []
    try:
        for item in read_items(path):
            if item.entry is not None:
                readable += 1
            else:
                unreadable.append(f"{item.where}: {item.why}")
    except CasebookError as error:
        problems.append(str(error))
    return Damage(problems=tuple(problems), readable=readable, unreadable=tuple(unreadable))


def _integrity(path: Path) -> list[str]:
    try:
        with closing(open_foreign(path)) as connection:
            rows = connection.execute("PRAGMA integrity_check(20)").fetchall()
    except (*UNREADABLE, CasebookError) as error:
        return [str(error)]
    return [str(row[0]) for row in rows if row[0] != "ok"]


def salvage(path: Path, target: Path) -> MergeReport:
    """Save every entry that can be read into a new casebook; the damaged file is not touched."""
    if target.exists():
        raise CasebookError(f"{target} exists", advice="Name a new file; nothing is written over")
    items = read_items(path)
    with open_casebook(target) as book:
        return merge_items(book, items, source=path.name)
