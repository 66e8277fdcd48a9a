"""What an entry must be like to be taken in, whoever wrote it.

Ids that this program does not know are taken; text that could steer a terminal,
bodies of absurd size or depth, and times out of this world are not.
"""

from __future__ import annotations

import re
from datetime import UTC, datetime
from typing import Final

import msgspec

from casebook.bodies import BODY_OF_KIND, BODY_VERSION, Words
from casebook.entry import MAX_KIND, MAX_PERSON, Entry, steers_terminal
from casebook.errors import BadEntry

MAX_BODY: Final = 256 * 1024
MAX_DEPTH: Final = 16
FIRST: Final = datetime(1970, 1, 1, tzinfo=UTC)
LAST: Final = datetime(2200, 1, 1, tzinfo=UTC)
MAX_OFFSET: Final = 14 * 60  # the easternmost civil time is UTC+14

# RFC 9562: version 7 from the clock, version 8 made from content; lower case, with hyphens.
_ID: Final = re.compile(r"[0-9a-f]{8}-[0-9a-f]{4}-[78][0-9a-f]{3}-[89ab][0-9a-f]{3}-[0-9a-f]{12}")
_KIND: Final = re.compile(r"[a-z][a-z0-9_]*")


def check_entry(entry: Entry) -> None:
    """Raise ``BadEntry`` with the field, what was given and what is allowed."""
    _check_id("id", entry.id)
    _check_id("case", entry.case)
    if entry.after is not None:
        _check_id("after", entry.after)
    if not _KIND.fullmatch(entry.kind) or len(entry.kind) > MAX_KIND:
        raise BadEntry("kind", entry.kind, f"small letters and underscores, at most {MAX_KIND}")
    if not entry.person.strip() or len(entry.person) > MAX_PERSON or _unclean(entry.person, line=True):
        raise BadEntry("person", entry.person, f"a name of 1 to {MAX_PERSON} printable characters")
    if entry.time_utc.tzinfo is None or not FIRST <= entry.time_utc < LAST:
        allowed = "a time from 1970 to 2199; is the clock right?"
        raise BadEntry("time_utc", entry.time_utc.isoformat(), allowed)
    if abs(entry.offset_minutes) > MAX_OFFSET:
        raise BadEntry("offset_minutes", entry.offset_minutes, f"-{MAX_OFFSET} to {MAX_OFFSET}")
    if not 1 <= entry.body_version < 10_000:
        raise BadEntry("body_version", entry.body_version, "1 to 9999")
    _check_body(entry)


def _check_id(field: str, given: str) -> None:
    if not _ID.fullmatch(given):
        raise BadEntry(field, given, "a UUID of version 7 or 8 in small letters")


def _check_body(entry: Entry) -> None:
    if len(entry.body_json) > MAX_BODY or len(entry.body_json.encode(errors="replace")) > MAX_BODY:
        raise BadEntry("body", f"{len(entry.body_json)} characters", f"at most {MAX_BODY} bytes of JSON")
    known = entry.kind in BODY_OF_KIND and entry.body_version == BODY_VERSION
    if known and _plainly_clean(entry.body_json) and not isinstance(entry.body, Words):
        return
    try:
        data = msgspec.json.decode(entry.body_json)
    except (msgspec.DecodeError, RecursionError, ValueError) as error:
        raise BadEntry("body", entry.body_json, f"JSON ({error})") from error
    if not isinstance(data, dict):
        raise BadEntry("body", entry.body_json, "a JSON object")
    _check_inside(data, 1)
    if known and isinstance(entry.body, Words):
        raise BadEntry("body", entry.body_json, f"the fields of an entry of kind {entry.kind}")


def _plainly_clean(body_json: str) -> bool:
    """Whether a glance shows that no text inside can steer a terminal, and that it is not deep."""
    if not (body_json.isascii() and body_json.isprintable()) or "\\" in body_json:
        return False
    return body_json.count("{") + body_json.count("[") <= MAX_DEPTH


def _check_inside(data: object, depth: int) -> None:
    """Refuse nesting beyond ``MAX_DEPTH`` and text that could steer a terminal."""
    if depth > MAX_DEPTH:
        raise BadEntry("body", f"nested {depth} deep", f"at most {MAX_DEPTH} deep")
    if isinstance(data, str):
        if _unclean(data):
            raise BadEntry("body", data, "text without control characters")
    elif isinstance(data, dict):
        for key, value in data.items():
            if _unclean(key, line=True):
                raise BadEntry("body", key, "names without control characters")
            _check_inside(value, depth + 1)
    elif isinstance(data, list):
        for value in data:
            _check_inside(value, depth + 1)


def _unclean(text: str, *, line: bool = False) -> bool:
    if text.isascii() and text.isprintable():
        return False
    return any(steers_terminal(character) or (line and character in "\n\t") for character in text)
