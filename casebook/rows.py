"""Entries as rows of the table ``entry``, and back."""

from __future__ import annotations

from datetime import UTC, datetime
from typing import Any, Final

import msgspec

from casebook.entry import Entry
from casebook.errors import BadRow

COLUMNS: Final = "id, case_id, person, time_utc, offset_minutes, kind, body_version, after, body"
INSERT: Final = f"INSERT INTO entry ({COLUMNS}) VALUES (?,?,?,?,?,?,?,?,?) ON CONFLICT (id) DO NOTHING"
_ROW: Final = tuple[str, str, str, str, int, str, int, str | None, str]  # as in COLUMNS


def stamp(moment: datetime) -> str:
    """Return a moment as ISO 8601 in UTC, always 27 characters, so that text sorts as time."""
    return moment.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%S.%fZ").rjust(27, "0")


def moment_of(text: str) -> datetime:
    """Return the aware moment that a stamp says. Raises ``BadRow``."""
    try:
        return datetime.fromisoformat(text)
    except (ValueError, TypeError) as error:
        raise BadRow(f"{text!r:.40} is no time") from error


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
    """Return the entry that a row holds. Raises ``BadRow``."""
    try:
        one = msgspec.convert(row, type=_ROW)
    except msgspec.ValidationError as error:
        raise BadRow(f"a row holds no entry ({error})") from error
    return Entry(
        id=one[0],
        case=one[1],
        person=one[2],
        time_utc=moment_of(one[3]),
        offset_minutes=one[4],
        kind=one[5],
        body_version=one[6],
        after=one[7],
        body_json=one[8],
    )
