"""The derived row of a case: what lists, search, learning and machines ask for without folding."""

from __future__ import annotations

import sqlite3
import time
from collections.abc import Iterable
from datetime import datetime
from itertools import pairwise
from typing import Any, Final

from casebook.entry import Entry, canonical_json
from casebook.fold import Case, fold_case
from casebook.numbers import full_number, shown_number
from casebook.rows import COLUMNS, entry_of_row, moment_of, stamp
from casebook.search import bare_tag, plate_text, words_text
from casebook.store import CaseRow, machine_key

_ENTRIES: Final = f"SELECT {COLUMNS} FROM entry WHERE case_id = ? ORDER BY seq"
_HEAD: Final = (
    "INSERT INTO case_head (place, case_id, number, status, opened_utc, last_utc, last_id, entries, tag,"
    " machine_key, kind, complaint, suspect, found, confirmed, persons, plate, words)"
    " VALUES (?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?,?)"
)
_OUTCOME: Final = "INSERT INTO outcome VALUES (?,?,?,?,?,?,?,?,?,?,?)"
_PLACES_PER_MICROSECOND: Final = 256
AWAY_MINUTES: Final = 60.0
"""A longer gap between two lines of a case was spent elsewhere."""


def entries_of_case(connection: sqlite3.Connection, case: str) -> tuple[Entry, ...]:
    """Return the entries of one case in the order in which they came."""
    return tuple(entry_of_row(row) for row in connection.execute(_ENTRIES, (case,)))


def refresh(connection: sqlite3.Connection, cases: Iterable[str]) -> None:
    """Make the derived rows of some cases anew, inside the caller's transaction."""
    held = [entries_of_case(connection, case) for case in cases]
    folded = [fold_case(entries) for entries in held if entries]
    # Oldest first: the full-text index takes rows in rising order most cheaply.
    for case in sorted(folded, key=lambda case: (case.last_utc, case.id)):
        _replace(connection, case)


def _replace(connection: sqlite3.Connection, case: Case) -> None:
    connection.execute("DELETE FROM case_head WHERE case_id = ?", (case.id,))
    connection.execute("DELETE FROM outcome WHERE case_id = ?", (case.id,))
    connection.execute(_HEAD, _head(case, _free_place(connection, _latest(case))))
    if case.closed is not None:
        connection.execute(_OUTCOME, _outcome(case))


def _latest(case: Case) -> datetime:
    return max(line.entry.time_utc for line in case.lines)


def _free_place(connection: sqlite3.Connection, moment: datetime) -> int:
    """Return an unused place for a moment; one in the future counts as now, not to lead the list."""
    microseconds = min(int(moment.timestamp() * 1e6), time.time_ns() // 1000)
    place = microseconds * _PLACES_PER_MICROSECOND
    width = _PLACES_PER_MICROSECOND
    ask = "SELECT coalesce(max(place) + 1, ?1) FROM case_head WHERE place >= ?1 AND place < ?1 + ?2"
    while (free := int(connection.execute(ask, (place, width)).fetchone()[0])) >= place + width:
        width *= 2  # a crowd at one moment, as in a file with one time for all
    return free


def _head(case: Case, place: int) -> tuple[object, ...]:
    closed = case.closed.what if case.closed else None
    return (
        place,
        case.id,
        full_number(case.id),
        case.status,
        stamp(case.opened_utc),
        stamp(case.last_utc),
        case.last_id,
        len(case.lines),
        case.tag,
        machine_key(case.tag),
        case.machine.kind,
        case.complaint,
        suspect(case),
        closed.found if closed else "",
        closed.confirmed if closed else "",
        ", ".join(case.persons),
        f"{plate_text(case.machine.nameplate)} {bare_tag(case.tag)}".strip(),
        words_text(case),
    )


def suspect(case: Case) -> str:
    """Return the fault that the case points to: concluded, else the first of the last odds shown."""
    if case.conclusion is not None:
        return case.conclusion.what.fault
    faults = case.shown.what.faults if case.shown else ()
    return faults[0].id if faults else ""


def worked_minutes(case: Case) -> float:
    """Return the minutes spent on a case: from line to line, gaps longer than ``AWAY_MINUTES`` left out."""
    times = [line.entry.time_utc for line in case.lines]
    gaps = [abs((later - earlier).total_seconds()) / 60 for earlier, later in pairwise(times)]
    return sum(gap for gap in gaps if gap <= AWAY_MINUTES)


def _outcome(case: Case) -> tuple[object, ...]:
    assert case.closed is not None
    closed = case.closed.what
    odds = {fault.id: fault.probability for fault in case.shown.what.faults} if case.shown else {}
    return (
        case.id,
        stamp(case.closed.time_utc),
        case.machine.kind,
        case.machine.nameplate.number("power"),
        case.complaint,
        closed.found,
        closed.confirmed,
        len(case.readings),
        worked_minutes(case),
        canonical_json(odds),
        canonical_json(case.observations),
    )


def case_row(connection: sqlite3.Connection, row: tuple[Any, ...]) -> CaseRow:
    """Return a list row; its number is as long as its neighbours in this casebook ask for."""
    full = row[2]
    before = connection.execute(
        "SELECT number FROM case_head WHERE number < ? ORDER BY number DESC LIMIT 1", (full,)
    ).fetchone()
    after = connection.execute(
        "SELECT number FROM case_head WHERE number > ? ORDER BY number LIMIT 1", (full,)
    ).fetchone()
    neighbours = tuple(found[0] for found in (before, after) if found)
    return CaseRow(
        place=row[0],
        id=row[1],
        number=shown_number(full, neighbours),
        status=row[3],
        opened_utc=moment_of(row[4]),
        last_utc=moment_of(row[5]),
        entries=row[6],
        tag=row[7],
        kind=row[8],
        complaint=row[9],
        suspect=row[10],
        found=row[11],
        confirmed=row[12],
        persons=row[13],
        matched=row[14],
    )
