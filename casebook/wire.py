"""Entries as JSON Lines: one entry a line, the form in which casebooks are exchanged."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from datetime import UTC, datetime
from typing import Any, BinaryIO, Final

import msgspec

from casebook.check import check_entry
from casebook.entry import Entry, canonical_json
from casebook.errors import BadEntry
from casebook.rows import stamp

MAX_LINE: Final = 1024 * 1024
# controls, line separators, marks that turn the writing direction: as ``casebook.entry.steers_terminal``
_STEERS: Final = re.compile("[\x00-\x1f\x7f-\x9f\u061c\u200e\u200f\u2028\u2029\u202a-\u202e\u2066-\u2069]")


class WireEntry(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """One line. A field that this program does not know is refused, not dropped."""

    id: str
    case: str
    person: str
    time_utc: datetime
    offset_minutes: int
    kind: str
    body: dict[str, Any]
    body_version: int = 1
    after: str | None = None


def line_of_entry(entry: Entry) -> bytes:
    """Return an entry as one line of JSON, with its end; what could steer a terminal is written as its code.

    A casebook that is damaged, or that a stranger made, may hold such characters.
    """
    head = {
        "id": entry.id,
        "case": entry.case,
        "after": entry.after,
        "person": entry.person,
        "time_utc": stamp(entry.time_utc),
        "offset_minutes": entry.offset_minutes,
        "kind": entry.kind,
        "body_version": entry.body_version,
        "body": msgspec.Raw(entry.body_json.encode()),
    }
    line = msgspec.json.encode(head)
    text = line.decode()
    if not text.isprintable():
        line = _STEERS.sub(lambda found: f"\\u{ord(found[0]):04x}", text).encode()
    return line + b"\n"


def entry_of_line(line: bytes) -> Entry:
    """Return the checked entry of one line. Raises ``BadEntry``."""
    if len(line) > MAX_LINE:
        raise BadEntry("line", f"{len(line)} bytes", f"at most {MAX_LINE} bytes")
    try:
        wire = msgspec.json.decode(line, type=WireEntry)
        body_json = canonical_json(wire.body)
    except (msgspec.DecodeError, RecursionError, ValueError, OverflowError) as error:
        raise BadEntry("line", line[:40].decode(errors="replace"), f"an entry as JSON ({error})") from error
    if wire.time_utc.tzinfo is None:
        raise BadEntry("time_utc", wire.time_utc.isoformat(), "a time with its zone")
    return _checked(wire, body_json)


def _checked(wire: WireEntry, body_json: str) -> Entry:
    try:
        time_utc = wire.time_utc.astimezone(UTC)
    except OverflowError as error:
        raise BadEntry("time_utc", wire.time_utc.isoformat(), "a time from 1970 to 2199") from error
    entry = Entry(
        id=wire.id,
        case=wire.case,
        person=wire.person,
        time_utc=time_utc,
        offset_minutes=wire.offset_minutes,
        kind=wire.kind,
        body_json=body_json,
        body_version=wire.body_version,
        after=wire.after,
    )
    check_entry(entry)
    return entry


def write_lines(entries: Iterable[Entry], file: BinaryIO) -> int:
    """Write entries to a binary file; return how many."""
    count = 0
    for entry in entries:
        file.write(line_of_entry(entry))
        count += 1
    return count


def read_lines(file: BinaryIO) -> Iterator[tuple[int, bytes]]:
    """Yield number and bytes of each line that is not blank, however long a hostile line is.

    Of a line beyond ``MAX_LINE`` only the beginning is held, one byte more than is allowed.
    """
    number = 0
    while piece := file.readline(MAX_LINE + 2):
        number += 1
        line = piece.rstrip(b"\r\n")
        while not piece.endswith(b"\n") and (piece := file.readline(MAX_LINE)):
            pass
        if line.strip():
            yield number, line
