"""Taking in what another machine wrote: the union of two sets of entries, by id.

Merging twice changes nothing, and the order of merges does not matter. What is in
the other file is checked entry by entry; what is bad is reported and left out.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Iterable, Iterator
from datetime import UTC, datetime
from functools import partial
from itertools import islice
from pathlib import Path
from typing import Final, Literal

import msgspec

from casebook.book import Casebook
from casebook.entry import Entry, clean_line
from casebook.foreign import Item, count_items, kind_of_file, read_items
from casebook.store import TakenIn

Stage = Literal["taking in", "updating lists"]
Progress = Callable[[Stage, int, int], None]
"""Told which stage a merge is in, how much of it is done, and of how much; 0 is not known."""
_BATCH: Final = 2000
_REFUSALS_KEPT: Final = 200
_TURN_S: Final = 0.01  # between batches others get their turn to write


class Refusal(msgspec.Struct, frozen=True, kw_only=True):
    """One entry that was left out, and why; in words that are clean to show."""

    where: str
    why: str


class MergeReport(msgspec.Struct, kw_only=True):
    """What came of a merge. ``refusals`` holds the first of the ``refused`` ones."""

    source: str
    entries: int = 0
    new: int = 0
    known: int = 0
    refused: int = 0
    refusals: list[Refusal] = []
    cases: set[str] = set()

    def refuse(self, where: str, why: str) -> None:
        """Count and note one entry that is left out."""
        self.refused += 1
        if len(self.refusals) < _REFUSALS_KEPT:
            self.refusals.append(Refusal(where=clean_line(where)[:80], why=clean_line(why)[:300]))

    @property
    def says(self) -> str:
        """The report in one sentence."""
        cases = f"in {len(self.cases)} case{'s' if len(self.cases) != 1 else ''}"
        return (
            f"{clean_line(self.source)}: {self.new} new entries {cases},"
            f" {self.known} known before, {self.refused} left out"
        )


def merge_file(book: Casebook, path: Path, *, progress: Progress | None = None) -> MergeReport:
    """Merge another casebook, or entries as JSON Lines, into a casebook.

    ``progress(stage, done, of)`` is called between batches. Raises ``CasebookError`` when
    the file as a whole cannot be read; single bad entries are in the report.
    """
    expected = count_items(path) if progress is not None else 0
    return merge_items(book, read_items(path), source=path.name, expected=expected, progress=progress)


def is_sheet(path: Path) -> bool:
    """Whether a file is neither a casebook nor JSON Lines, so that it should be read as a case sheet."""
    return kind_of_file(path) == "sheet"


def merge_items(
    book: Casebook,
    items: Iterable[Item],
    *,
    source: str,
    expected: int = 0,
    progress: Progress | None = None,
) -> MergeReport:
    """Merge entries that were read from somewhere."""
    report = MergeReport(source=source)
    try:
        for batch in _batches(items):
            _take_in(book, batch, report)
            if progress is not None:
                progress("taking in", report.entries, max(expected, report.entries) if expected else 0)
            time.sleep(_TURN_S)
    finally:
        book.store.catch_up(partial(progress, "updating lists") if progress else None)
    if report.new or report.refused:
        _remember(book, report)
    return report


def _batches(items: Iterable[Item]) -> Iterator[list[Item]]:
    iterator = iter(items)
    while batch := list(islice(iterator, _BATCH)):
        yield batch


def _take_in(book: Casebook, items: list[Item], report: MergeReport) -> None:
    """Add what is new; report an entry whose id is known with another content."""
    fresh: dict[str, Entry] = {}
    with book.store.atomic():
        held = book.store.held(item.entry.id for item in items if item.entry is not None)
        for item in items:
            entry = item.entry
            if entry is None:
                report.refuse(item.where, item.why)
                continue
            known = held.get(entry.id) or fresh.get(entry.id)
            if known is None:
                fresh[entry.id] = entry
            elif known == entry or _from_one_sheet(known, entry):
                report.known += 1
            else:
                report.refuse(item.where, f"id {entry.id} is known here with another content, which stays")
        report.new += book.store.add(fresh.values(), fold_later=True)
    report.entries += len(items)
    report.cases.update(entry.case for entry in fresh.values())


def _from_one_sheet(known: Entry, entry: Entry) -> bool:
    """Whether two entries were made from the content of one sheet, each at the time it was taken in."""
    alike = (known.case, known.kind, known.body_json) == (entry.case, entry.kind, entry.body_json)
    return alike and known.id[14] == "8"  # the version of an id that is made from content


def _remember(book: Casebook, report: MergeReport) -> None:
    taken = TakenIn(
        taken_utc=datetime.now(UTC),
        source=clean_line(report.source)[:200],
        entries=report.entries,
        new=report.new,
        refused=report.refused,
    )
    book.store.note_taken_in(taken)
