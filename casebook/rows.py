"""Entries as rows of the table ``entry``, and back."""

from __future__ import annotations

from datetime import UTC, datetime
from typing import Any, Final

from casebook.entry import Entry

INSERT: Final = (
    "INSERT INTO entry (id, case_id, person, time_utc, offset_minutes, kind, body_version, after, body)"
    " VALUES (?,?,?,?,?,?,?,?,?) ON CONFLICT (id) DO NOTHING"
)


def stamp(moment: datetime) -> str:
    """Return a moment as ISO 8601 in UTC, always 27 characters, so that text sorts as time."""
    return moment.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%S.%fZ").rjust(27, "0")


def moment_of(text: str) -> datetime:
    """Return the aware moment that a stamp says."""
    return datetime.fromisoformat(text)


def row_of_entry(entry: Entry) -> tuple[object, ...]:
    """Return an entry as the values of ``INSERT``."""
    return (
        entry.id,
        entry.case,
        entry.person,
        stamp(entry.time_utc),
        entry.offset_minutes,
        entry.kind,
        entry.body_version,
        entry.after,
        entry.body_json,
    )


def entry_of_row(row: tuple[Any, ...]) -> Entry:
    """Return the entry that a row holds."""
    return Entry(
        id=row[0],
        case=row[1],
        person=row[2],
        time_utc=moment_of(row[3]),
        offset_minutes=row[4],
        kind=row[5],
        body_version=row[6],
        after=row[7],
        body_json=row[8],
    )
