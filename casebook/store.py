"""What a place that keeps entries can do. ``sqlite_store`` is the one that is shipped.

A second one (a server database, say) implements ``Store`` and passes the same tests.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from contextlib import AbstractContextManager
from datetime import datetime
from pathlib import Path
from typing import Protocol

import msgspec

from casebook.entry import Entry, clean_line


class CaseRow(msgspec.Struct, frozen=True, kw_only=True):
    """One case as a line of a list. ``place`` orders rows by last activity, newest highest."""

    place: int
    id: str
    number: str
    status: str
    opened_utc: datetime
    last_utc: datetime
    entries: int
    tag: str
    kind: str
    complaint: str
    suspect: str
    found: str
    confirmed: str
    persons: str
    matched: str = ""


class MachineRow(msgspec.Struct, frozen=True, kw_only=True):
    """One machine as a line of a list."""

    tag: str
    kind: str
    cases: int
    last_utc: datetime


class Changes(msgspec.Struct, frozen=True, kw_only=True):
    """The cases to which entries were added since a token, and the token for the next question."""

    token: int
    cases: tuple[str, ...] = ()


class Outcome(msgspec.Struct, frozen=True, kw_only=True):
    """What a closed case teaches: what was suspected last, and what was found."""

    case: str
    kind: str
    complaint: str
    found: str
    confirmed: str
    readings: int
    closed_utc: datetime
    minutes: float
    power_w: float | None = None
    odds: dict[str, float] = {}
    observations: dict[str, bool] = {}


class TakenIn(msgspec.Struct, frozen=True, kw_only=True):
    """One merge: which file, and what came of it."""

    taken_utc: datetime
    source: str
    entries: int
    new: int
    refused: int


class Store(Protocol):
    """Keeps entries, and answers quickly about cases."""

    notes: tuple[str, ...]
    """What the person should know about this file: read-only, slower journal, and why."""

    def atomic(self) -> AbstractContextManager[None]:
        """All that is added inside is kept, or nothing; may be nested."""

    def add(self, entries: Iterable[Entry], *, fold_later: bool = False) -> int:
        """Add entries, those already there left alone; return how many were new, safely on disk.

        With ``fold_later`` lists and search learn of them at the next ``catch_up``.
        """

    def catch_up(self, progress: Callable[[int, int], None] | None = None) -> None:
        """Bring lists and search up to date after ``fold_later``; ``progress(done, of)``."""

    def case_entries(self, case: str) -> tuple[Entry, ...]:
        """Return the entries of one case in the order in which they came."""

    def all_entries(self) -> Iterator[Entry]:
        """Yield every entry in the order in which they came, without holding them all."""

    def held(self, ids: Iterable[str]) -> dict[str, Entry]:
        """Return those of these entry ids that are there, with their entries."""

    def last_id(self, case: str) -> str | None:
        """Return the id of a case's last entry in reading order."""

    def find_cases(self, number: str) -> tuple[str, ...]:
        """Return the ids of cases whose full number begins so; at most 20."""

    def list_cases(self, *, limit: int = 50, before: int | None = None, status: str = "") -> list[CaseRow]:
        """Return cases, newest activity first; ``before`` is the ``place`` of the last row seen."""

    def search(self, text: str, *, limit: int = 50, before: int | None = None) -> list[CaseRow]:
        """Return cases that hold every word of a text (or a word beginning so), newest first."""

    def machines(self, start: str = "", *, limit: int = 20) -> list[MachineRow]:
        """Return machines whose tag begins so, by tag."""

    def machine_cases(self, tag: str) -> tuple[str, ...]:
        """Return the ids of a machine's cases, oldest activity first."""

    def outcomes(self, kind: str = "") -> Iterator[Outcome]:
        """Yield what each closed case teaches, of one machine kind or of all."""

    def note_taken_in(self, taken: TakenIn) -> None:
        """Remember that a file was merged."""

    def taken_in(self, *, limit: int = 20) -> list[TakenIn]:
        """Return the merges into this file, newest first."""

    def changed_since(self, token: int) -> Changes:
        """Return what came in since a token of an earlier answer; cheap when nothing did."""

    def count(self) -> int:
        """Return the number of entries."""

    def safe_copy(self, target: Path) -> None:
        """Write a whole and consistent copy to a new file, while others go on writing."""

    def close(self) -> None:
        """Let the file go."""


def machine_key(tag: str) -> str:
    """Return what two spellings of one tag have in common: case and spaces do not count."""
    return "".join(clean_line(tag).casefold().split())
