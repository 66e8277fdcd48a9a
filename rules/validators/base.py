"""What every check on the rules shares: the form of a complaint, and walking over entries."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Final, Protocol

import msgspec

from calc.errors import Problem
from rules.decoding import Steps, did_you_mean
from rules.knowledge import Entry, Knowledge

SECTIONS: Final = ("faults", "observations", "complaints", "readings", "limits", "hazards", "gates")


class Issue(Problem):
    """A problem of the rules as a whole."""


class Mistaken(msgspec.Struct, frozen=True):
    """What a check found: the issue, the entry, the field, what was given, what is allowed."""

    issue: type[Issue]
    section: str
    entry: str
    path: Steps
    given: str
    allowed: str


class Check(Protocol):
    """One check on the rules as a whole."""

    def look(self, knowledge: Knowledge) -> Iterator[Mistaken]:
        """Yield what is wrong."""


class Use(msgspec.Struct, frozen=True):
    """One place where an entry names something: section, entry, path, and the name."""

    section: str
    entry: str
    path: Steps
    name: str


def every_entry(knowledge: Knowledge) -> Iterator[tuple[str, Entry]]:
    """Yield every entry with its section."""
    for section in SECTIONS:
        for entry in getattr(knowledge, section).values():
            yield section, entry


def uses(knowledge: Knowledge, *fields: str) -> Iterator[Use]:
    """Yield the names in fields such as ``faults.cautions``: of a list, or the keys of a mapping."""
    for field in fields:
        section, _, name = field.partition(".")
        for entry in getattr(knowledge, section).values():
            yield from named(section, entry.id, (name,), getattr(entry, name))


def named(
    section: str, entry: str, path: Steps, names: Iterable[str] | Mapping[str, object]
) -> Iterator[Use]:
    """Yield a use for every name of a list, or for every key of a mapping."""
    for index, name in enumerate(names):
        part: str | int = name if isinstance(names, Mapping) else index
        yield Use(section, entry, (*path, part), name)


def unknown(issue: type[Issue], found: Iterable[Use], known: Iterable[str]) -> Iterator[Mistaken]:
    """Yield a complaint for every name that is not known."""
    words = set(known)
    for use in found:
        if use.name not in words:
            allowed = did_you_mean(use.name, words)
            yield Mistaken(issue, use.section, use.entry, use.path, use.name, allowed)
