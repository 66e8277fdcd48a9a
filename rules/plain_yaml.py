"""Read a rule file as plain data in which every scalar is text, and remember where each part stood.

YAML's own guesses (``12:30`` as 750, ``010`` as 8, ``no`` as false) never happen:
what a word means is decided by the type of the field that it fills.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import yaml

from calc.errors import Problem

Path = tuple[str | int, ...]

_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
_NOTHING = frozenset({"", "~", "null", "Null", "NULL"})
_DEPTH = 40


@dataclass(frozen=True)
class Document:
    """A rule file: mappings, lists and text, and the line of every part (counted from 1)."""

    file: str
    plain: object
    lines: dict[Path, int]

    def line(self, path: Path) -> int | None:
        """Return the line of a part, or of the nearest part around it."""
        for length in range(len(path), -1, -1):
            if path[:length] in self.lines:
                return self.lines[path[:length]]
        return None


def read_document(text: str, *, file: str) -> tuple[Document, list[Problem]]:
    """Return the plain data of a rule file, and all that is wrong with its form.

    Refused, each by name and line: text that is no YAML, a second document, a key
    that is given twice, a key that is not text, a tag, an anchor, an alias, and
    nesting deeper than 40.
    """
    reader = _Reader(file)
    try:
        events = yaml.parse(text, Loader=_LOADER)
        plain = reader.document(iter(events))
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark or error.context_mark
        line = None if mark is None else mark.line + 1
        reader.problems.append(Problem(file, "", error.problem or "", "it must be YAML", line))
        plain = None
    except (yaml.YAMLError, ValueError) as error:
        reader.problems.append(Problem(file, "", str(error).split("\n")[0], "it must be YAML", None))
        plain = None
    return Document(file, plain, reader.lines), reader.problems


class _Reader:
    """Builds plain data from YAML events, noting problems as it goes."""

    def __init__(self, file: str) -> None:
        self.file = file
        self.lines: dict[Path, int] = {}
        self.problems: list[Problem] = []

    def document(self, events: Iterator[yaml.Event]) -> object:
        """Read the only document of the file; an empty file is None."""
        plain: object = None
        seen = 0
        for event in events:
            if isinstance(event, yaml.DocumentStartEvent):
                seen += 1
                if seen > 1:
                    self._refuse((), event, "a second document", "one document in a file")
                    break
                plain = self._node(next(events), events, ())
        return plain

    def _node(self, event: yaml.Event, events: Iterator[yaml.Event], path: Path) -> object:
        self.lines[path] = _line_of(event)
        self._look_at_form(event, path)
        if isinstance(event, yaml.ScalarEvent):
            return None if event.style is None and event.value in _NOTHING else event.value
        if isinstance(event, yaml.MappingStartEvent):
            return self._mapping(events, path)
        if isinstance(event, yaml.SequenceStartEvent):
            return self._sequence(events, path)
        return None

    def _mapping(self, events: Iterator[yaml.Event], path: Path) -> dict[str, object]:
        plain: dict[str, object] = {}
        for event in events:
            if isinstance(event, yaml.MappingEndEvent):
                break
            if not isinstance(event, yaml.ScalarEvent):
                self._refuse(path, event, "a list or mapping as key", "a key must be a word")
                self._node(event, events, (*path, "?"))
                self._node(next(events), events, (*path, "?"))
                continue
            self._look_at_form(event, path)
            key = event.value
            if key in plain:
                self._refuse((*path, key), event, "given twice", "each key once")
            plain[key] = self._node(next(events), events, (*path, key))
            self.lines[(*path, key)] = _line_of(event)
        return plain

    def _sequence(self, events: Iterator[yaml.Event], path: Path) -> list[object]:
        plain: list[object] = []
        for event in events:
            if isinstance(event, yaml.SequenceEndEvent):
                break
            plain.append(self._node(event, events, (*path, len(plain))))
        return plain

    def _look_at_form(self, event: yaml.Event, path: Path) -> None:
        if len(path) > _DEPTH:
            raise yaml.YAMLError(f"nested deeper than {_DEPTH}")
        anchor = getattr(event, "anchor", None)
        if anchor:
            what = f"alias *{anchor}" if isinstance(event, yaml.AliasEvent) else f"anchor &{anchor}"
            self._refuse(path, event, what, "write it out; no anchors or aliases")
        tag = getattr(event, "tag", None)
        if tag and tag != "!":
            self._refuse(path, event, f"tag {tag}", "no tags")

    def _refuse(self, path: Path, event: yaml.Event, given: str, allowed: str) -> None:
        line = _line_of(event)
        self.problems.append(Problem(self.file, spell(path), given, allowed, line))


def _line_of(event: yaml.Event) -> int:
    return event.start_mark.line + 1 if event.start_mark is not None else 1


def spell(path: Path) -> str:
    """Write a path as people do: ``bands[1].verdict``."""
    text = ""
    for part in path:
        text += f"[{part + 1}]" if isinstance(part, int) else f".{part}" if text else part
    return text
