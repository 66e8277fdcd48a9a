"""Plain data out of a YAML text that nobody has to trust.

Every scalar stays the text that was typed (only ``null``, ``~`` and nothing at
all become None), so that ``12:30`` is no number of minutes and ``010`` is no 8.
Anchors, aliases, tags, duplicate keys, deep nesting, oversize and control
characters are refused, each with its line. The rule files are read with it too.
"""

from __future__ import annotations

import os
import re
from dataclasses import dataclass, field
from pathlib import Path
from typing import Final, TypeAlias

import yaml

from calc.errors import InputError, Problem, clip

Plain: TypeAlias = "str | list[Plain] | dict[str, Plain] | None"
Step: TypeAlias = "str | int"

_LOADER: Final = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
_NULLS: Final = frozenset({"", "~", "null", "Null", "NULL"})
# C0 and C1 except tab and line ends, marks that turn the writing direction, other line ends, half characters
_UNPRINTABLE: Final = re.compile(
    "[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\u2028\u2029\u200e\u200f\u202a-\u202e\u2066-\u2069\ufeff\ud800-\udfff]"
)


@dataclass(frozen=True)
class Limits:
    """How much a document may hold."""

    bytes: int = 1_000_000
    depth: int = 20
    nodes: int = 20_000


SHEET_LIMITS: Final = Limits()


@dataclass(frozen=True)
class Document:
    """Plain data, and the line (from 1) on which each part of it begins."""

    file: str
    data: Plain
    lines: dict[tuple[Step, ...], int]

    def line(self, path: tuple[Step, ...]) -> int | None:
        """Return the line of a part, or that of the nearest part around it."""
        for length in range(len(path), -1, -1):
            if (line := self.lines.get(path[:length])) is not None:
                return line
        return None


@dataclass
class _Open:
    """A mapping or list that is being filled."""

    path: tuple[Step, ...]
    into: list[Plain] | dict[str, Plain]
    key: str | None = None
    seen: dict[str, int] = field(default_factory=dict)

    def next_path(self) -> tuple[Step, ...]:
        step: Step = len(self.into) if isinstance(self.into, list) else str(self.key)
        return (*self.path, step)


def read_document(path: str | os.PathLike[str], *, limits: Limits = SHEET_LIMITS) -> Document:
    """Read a YAML file into plain data.

    Raises
    ------
    InputError
        If the file is not there, cannot be read, is too long, is no UTF-8 text, or
        is not the YAML that is allowed; ``problems`` has one entry.

    """
    file = clip(os.fspath(path), 400)
    try:
        with Path(path).open("rb") as stream:
            raw = stream.read(limits.bytes + 1)
    except FileNotFoundError:
        raise _wrong(file, "no such file", "the path of a file that is there") from None
    except IsADirectoryError:
        raise _wrong(file, "this is a folder", "the path of a file") from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else "no path of a file"
        raise _wrong(file, reason, "a file that can be read") from error
    return document_from_bytes(raw, file=file, limits=limits)


def document_from_bytes(raw: bytes, *, file: str, limits: Limits = SHEET_LIMITS) -> Document:
    """Turn the bytes of one document into plain data; raises ``InputError`` as ``read_document``."""
    return load_document(text_from_bytes(raw, file=file, limits=limits), file=file, limits=limits)


def text_from_bytes(raw: bytes, *, file: str, limits: Limits = SHEET_LIMITS) -> str:
    """Return the text of one document; raises ``InputError`` where it is too long or no UTF-8."""
    if len(raw) > limits.bytes:
        raise _wrong(file, f"longer than {limits.bytes} bytes", f"at most {limits.bytes} bytes")
    if raw[:2] in {b"\xff\xfe", b"\xfe\xff"}:
        raise _wrong(file, "UTF-16 text", "text saved as UTF-8")
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        raise _wrong(file, f"byte {raw[error.start]:#04x}", "text saved as UTF-8", line) from None


def load_document(text: str, *, file: str, limits: Limits = SHEET_LIMITS) -> Document:
    """Turn a YAML text into plain data with its lines.

    Parameters
    ----------
    text : str
        The document.
    file : str
        Its name in messages.
    limits : Limits
        Bytes, depth and nodes that are allowed.

    Raises
    ------
    InputError
        With one problem: the first thing in the text that is not allowed.

    """
    text = text.removeprefix("\ufeff")
    if len(text) > limits.bytes:
        raise _wrong(file, f"longer than {limits.bytes} characters", f"at most {limits.bytes} bytes")
    if found := _UNPRINTABLE.search(text):
        line = text.count("\n", 0, found.start()) + 1
        raise _wrong(file, f"control character U+{ord(found[0]):04X}", "printable text", line)
    build = _Builder(file, limits)
    try:
        for event in yaml.parse(text, Loader=_LOADER):
            build.take(event)
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark or error.context_mark
        line_at = mark.line + 1 if mark is not None else None
        raise _wrong(file, clip(error.problem or "no YAML", 120), "YAML text", line_at) from None
    except (yaml.YAMLError, RecursionError, ValueError) as error:
        raise _wrong(file, clip(error, 120), "YAML text") from None
    return Document(file, build.data, build.lines)


def _wrong(file: str, given: str, allowed: str, line: int | None = None, where: str = "") -> InputError:
    return InputError([Problem(file=file, where=where, given=given, allowed=allowed, line=line)])


def where(path: tuple[Step, ...]) -> str:
    """Write a path as people read it: ``readings[2].value``."""
    return "".join(f"[{step}]" if isinstance(step, int) else f".{step}" for step in path).lstrip(".")


def _line(event: yaml.Event) -> int:
    return event.start_mark.line + 1 if event.start_mark is not None else 1


class _Builder:
    """Builds plain data from the parser's events, without recursion."""

    def __init__(self, file: str, limits: Limits) -> None:
        self.file = file
        self.limits = limits
        self.data: Plain = None
        self.lines: dict[tuple[Step, ...], int] = {}
        self.stack: list[_Open] = []
        self.nodes = 0
        self.documents = 0

    def take(self, event: yaml.Event) -> None:
        """Add one event."""
        if isinstance(event, yaml.NodeEvent):
            self._check(event)
        if isinstance(event, yaml.ScalarEvent):
            self._scalar(event)
        elif isinstance(event, yaml.MappingStartEvent):
            self._begin(event, {})
        elif isinstance(event, yaml.SequenceStartEvent):
            self._begin(event, [])
        elif isinstance(event, yaml.CollectionEndEvent):
            self.stack.pop()
        elif isinstance(event, yaml.DocumentStartEvent):
            self.documents += 1
            if self.documents > 1:
                raise self._refuse(event, "a second document", "one document a file")

    def _check(self, event: yaml.NodeEvent) -> None:
        self.nodes += 1
        if self.nodes > self.limits.nodes:
            raise self._refuse(
                event, f"more than {self.limits.nodes} entries", f"at most {self.limits.nodes} entries"
            )
        if isinstance(event, yaml.AliasEvent):
            raise self._refuse(
                event, f"alias *{clip(event.anchor, 30)}", "every value written out, no aliases"
            )
        if event.anchor is not None:
            raise self._refuse(
                event, f"anchor &{clip(event.anchor, 30)}", "every value written out, no anchors"
            )
        if (tag := getattr(event, "tag", None)) is not None:
            raise self._refuse(event, f"tag {clip(tag, 40)}", "plain values, no tags")

    def _begin(self, event: yaml.Event, into: list[Plain] | dict[str, Plain]) -> None:
        if self.stack and isinstance(self.stack[-1].into, dict) and self.stack[-1].key is None:
            raise self._refuse(event, "a list or mapping as a field name", "a word as a field name")
        if len(self.stack) >= self.limits.depth:
            raise self._refuse(
                event, f"nested deeper than {self.limits.depth}", f"at most {self.limits.depth} levels"
            )
        path = self._place(event, into)
        self.stack.append(_Open(path, into))

    def _scalar(self, event: yaml.ScalarEvent) -> None:
        if found := _UNPRINTABLE.search(event.value):
            raise self._refuse(event, f"control character U+{ord(found[0]):04X}", "printable text")
        top = self.stack[-1] if self.stack else None
        if top is not None and isinstance(top.into, dict) and top.key is None:
            self._name(event, top)
            return
        plain = event.implicit[0] and event.value in _NULLS
        self._place(event, None if plain else event.value)

    def _name(self, event: yaml.ScalarEvent, top: _Open) -> None:
        line = _line(event)
        if event.value in top.seen:
            first = top.seen[event.value]
            raise self._refuse(
                event,
                f"{clip(event.value)} twice",
                f"each field once; the first is on line {first}",
                top.path,
            )
        top.seen[event.value] = line
        top.key = event.value
        self.lines[(*top.path, event.value)] = line

    def _place(self, event: yaml.Event, value: Plain) -> tuple[Step, ...]:
        """Put a value where it belongs, and return its path."""
        if not self.stack:
            self.data = value
            self.lines[()] = _line(event)
            return ()
        top = self.stack[-1]
        path = top.next_path()
        if isinstance(top.into, list):
            top.into.append(value)
            self.lines[path] = _line(event)
        else:
            top.into[str(top.key)] = value
            top.key = None
        return path

    def _refuse(self, event: yaml.Event, given: str, allowed: str, at: tuple[Step, ...] = ()) -> InputError:
        path = at or (self.stack[-1].path if self.stack else ())
        return _wrong(self.file, given, allowed, _line(event), where(path))
