"""Checks on the rules as a whole: one small class each, with an issue type of its own."""

from __future__ import annotations

from collections.abc import Iterator
from typing import ClassVar, Final, Protocol

import msgspec

from calc.errors import Problem
from rules.knowledge import Entry, Knowledge
from rules.plain_yaml import Path

SECTIONS: Final = ("faults", "observations", "complaints", "readings", "limits", "hazards", "gates")


class Mistaken(msgspec.Struct, frozen=True):
    """What a check found: the issue, the entry, the field, what was given, what is allowed."""

    issue: type[Problem]
    section: str
    entry: str
    path: Path
    given: str
    allowed: str


class Check(Protocol):
    """One check on the rules as a whole."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield what is wrong."""


def all_mistakes(knowledge: Knowledge) -> Iterator[Mistaken]:
    """Yield everything that any check finds."""
    for check in CHECK_LIST:
        yield from check.look(knowledge)


def _entries(knowledge: Knowledge) -> Iterator[tuple[str, Entry]]:
    for section in SECTIONS:
        for entry in getattr(knowledge, section).values():
            yield section, entry


class MissingSource(Problem):
    """An entry does not say where it comes from."""


class SourceCheck:
    """Every entry names its source, if only "from memory" or "common practice"."""

    issue: ClassVar = MissingSource

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield entries with a blank source or name."""
        for section, entry in _entries(knowledge):
            for field in ("source", "name"):
                if not getattr(entry, field).strip():
                    yield Mistaken(self.issue, section, entry.id, (field,), "blank", "it must say something")


CHECK_LIST: Final[tuple[Check, ...]] = (SourceCheck(),)
