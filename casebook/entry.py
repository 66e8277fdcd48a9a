"""One entry of the log: immutable, with an id that no other machine will give.

An entry is stored as it came: its body stays the JSON text, so that fields and
kinds that this program does not know survive storing, export and merge.
"""

from __future__ import annotations

import hashlib
import math
import unicodedata
from datetime import UTC, datetime, timedelta, timezone
from typing import Any, Final

import msgspec
import uuid_utils

from casebook.bodies import BODY_OF_KIND, BODY_VERSION, KIND_OF_BODY, Body, Words

MAX_PERSON: Final = 80
MAX_KIND: Final = 40
_KEPT_CONTROLS: Final = frozenset("\n\t")
# Control, surrogate, line and paragraph separators; and the direction marks that can hide text.
_BAD_CATEGORIES: Final = frozenset({"Cc", "Cs", "Zl", "Zp"})
_BAD_MARKS: Final = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069\u200e\u200f\u061c")


class Entry(msgspec.Struct, frozen=True, kw_only=True):
    """One line of the log.

    ``after`` is the id of the last entry of the case that its writer had seen; it
    keeps the order right when a clock was set back. ``body_json`` is canonical
    JSON (sorted keys). ``time_utc`` is aware and in UTC; ``offset_minutes`` is the
    writer's local time east of it.
    """

    id: str
    case: str
    person: str
    time_utc: datetime
    offset_minutes: int
    kind: str
    body_json: str
    body_version: int = BODY_VERSION
    after: str | None = None

    @property
    def body(self) -> Body:
        """The body as its type; ``Words`` where this program has none, or cannot read it."""
        return decode_body(self.kind, self.body_json)

    @property
    def time_local(self) -> datetime:
        """The moment on the writer's own clock."""
        return self.time_utc.astimezone(timezone(timedelta(minutes=self.offset_minutes)))


def new_id() -> str:
    """Return a new UUIDv7 (RFC 9562) as text: ids sort by the time at which they were made."""
    return str(uuid_utils.uuid7())


def id_from_content(*parts: str) -> str:
    """Return a UUIDv8 (RFC 9562) made from text alone: the same text gives the same id anywhere."""
    digest = bytearray(hashlib.sha256("\x1f".join(parts).encode()).digest()[:16])
    digest[6] = (digest[6] & 0x0F) | 0x80
    digest[8] = (digest[8] & 0x3F) | 0x80
    return str(uuid_utils.UUID(bytes=bytes(digest)))


def make_entry(
    body: Body,
    *,
    case: str,
    person: str,
    after: str | None = None,
    at: datetime | None = None,
    entry_id: str | None = None,
    kind: str | None = None,
) -> Entry:
    """Return a new entry for a body, stamped now (or ``at``, an aware time); ``Words`` need a ``kind``."""
    local = at if at is not None else datetime.now().astimezone()
    offset = local.utcoffset() or timedelta()
    return Entry(
        id=entry_id or new_id(),
        case=case,
        person=clean_line(person)[:MAX_PERSON],
        time_utc=local.astimezone(UTC),
        offset_minutes=round(offset.total_seconds() / 60),
        kind=kind or KIND_OF_BODY[type(body)],
        body_json=encode_body(body),
        after=after,
    )


def encode_body(body: Body) -> str:
    """Return a body as canonical JSON; what is not said, and what is no finite number, is left out."""
    data = body.data if isinstance(body, Words) else msgspec.to_builtins(body)
    return canonical_json(_speak(data))


def canonical_json(data: Any) -> str:  # noqa: ANN401  (any JSON value)
    """Return JSON with sorted keys, so that equal content is equal text."""
    return msgspec.json.encode(data, order="deterministic").decode()


def decode_body(kind: str, body_json: str) -> Body:
    """Return a body as the type of its kind, or as ``Words``; never raises."""
    body_type = BODY_OF_KIND.get(kind)
    try:
        if body_type is not None:
            return msgspec.json.decode(body_json, type=body_type)
    except msgspec.ValidationError:
        pass  # an open circuit has no number in JSON, or the writer's type is newer
    except (msgspec.DecodeError, RecursionError):
        return Words(data={"unreadable": body_json})
    return _decode_slowly(body_type, body_json)


def _decode_slowly(body_type: type[Body] | None, body_json: str) -> Body:
    try:
        data = msgspec.json.decode(body_json)
    except (msgspec.DecodeError, RecursionError):
        return Words(data={"unreadable": body_json})
    if body_type is not None:
        try:
            return msgspec.convert(_restore(data), type=body_type)
        except msgspec.ValidationError:
            pass
    return Words(data=data if isinstance(data, dict) else {"value": data})


def _speak(data: Any) -> Any:  # noqa: ANN401
    """Drop what JSON cannot say (nan, inf), what is None, and characters that steer a terminal."""
    if isinstance(data, dict):
        spoken = {clean_line(str(key)): _speak(value) for key, value in data.items()}
        return {key: value for key, value in spoken.items() if value is not None}
    if isinstance(data, list | tuple):
        return [_speak(value) for value in data]
    if isinstance(data, str):
        return clean_text(data)
    if isinstance(data, float) and not math.isfinite(data):
        return None
    return data


def _restore(data: Any) -> Any:  # noqa: ANN401
    """Give back the number that JSON could not say: an open circuit is inf, an unread value nan."""
    if isinstance(data, dict):
        whole = {key: _restore(value) for key, value in data.items()}
        if "number" not in whole and isinstance(whole.get("text"), str) and "kind" in whole:
            whole["number"] = math.inf if whole["kind"] in {"open", "above"} else math.nan
        return whole
    return [_restore(value) for value in data] if isinstance(data, list) else data


def steers_terminal(character: str) -> bool:
    """Whether a character is a control code or a direction mark, and no line feed or tab."""
    if character in _KEPT_CONTROLS:
        return False
    return character in _BAD_MARKS or unicodedata.category(character) in _BAD_CATEGORIES


def clean_text(text: str) -> str:
    """Return text with every character that could steer a terminal replaced by U+FFFD."""
    if text.isascii() and text.isprintable():
        return text
    return "".join("\ufffd" if steers_terminal(c) else c for c in text.replace("\r\n", "\n"))


def clean_line(text: str) -> str:
    """Return text as one clean line, without space at its ends."""
    return " ".join(clean_text(text).split())
