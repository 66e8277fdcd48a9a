"""Load all of ``rules/``, and a shop's own folders, into one :class:`~rules.knowledge.Knowledge`.

A rule file is a mapping of section names to lists of entries (``faults: [...]``); a
plain list takes its section from the folder or the name of the file. What is wrong is
collected over all files and raised as one :class:`~calc.errors.InputError`.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Iterator, Sequence
from itertools import chain, islice
from pathlib import Path
from typing import Final

import msgspec

from calc.errors import InputError, Problem
from calc.safe_yaml import Document, Limits, load_document, text_from_bytes
from calc.safe_yaml import where as spell
from rules import cache
from rules.decoding import Steps, decode, did_you_mean
from rules.knowledge import (
    Complaint,
    Entry,
    Fault,
    GateRule,
    Hazard,
    Knowledge,
    Limit,
    Observation,
    ReadingRule,
)
from rules.loosening import loosened_by
from rules.spelling_out import spelled_out
from rules.validators import Mistaken, all_mistakes

SHIPPED: Final = Path(__file__).resolve().parent

SECTIONS: Final[dict[str, type[Entry]]] = {
    "faults": Fault,
    "observations": Observation,
    "complaints": Complaint,
    "readings": ReadingRule,
    "limits": Limit,
    "hazards": Hazard,
    "gates": GateRule,
}
RULE_LIMITS: Final = Limits(bytes=2_000_000, depth=20, nodes=100_000)
MOST_FILES: Final = 500
"""Rule files that a shop's folder may hold."""
MOST_BYTES: Final = 4_000_000
"""Text that a folder may hold in all: some ten times what is shipped."""
MOST_ENTRIES: Final = 20_000
"""Entries that a folder may hold in all, each row of a table counted."""
MOST_PROBLEMS: Final = 200
"""Mistakes of one file that are told."""
_ALSO_CALLED: Final = {"cautions": "hazards"}

Entries = dict[str, dict[str, Entry]]


@dataclasses.dataclass(frozen=True)
class Place:
    """Where an entry was written."""

    folder: int
    document: Document
    path: Steps


Places = dict[tuple[str, str], Place]


def load_knowledge(*, extra_folders: Sequence[Path] = ()) -> Knowledge:
    """Return everything that the rule files say.

    Parameters
    ----------
    extra_folders : sequence of Path
        A shop's own rules. Each adds entries, or overrides shipped ones by id; where it
        loosens a limit, a caution or the gate, ``Knowledge.loosened`` says so.

    Raises
    ------
    InputError
        With every problem of every file: file, line, entry and field, given, allowed.

    """
    texts, problems = read_texts(extra_folders)
    if not problems:
        key = cache.key_of(texts, extra_folders)
        if (kept := cache.read(key)) is not None:
            return kept
        knowledge, problems = build(texts, extra_folders=extra_folders)
        if not problems:
            cache.write(key, knowledge)
            return knowledge
    raise InputError(problems)


Texts = list[tuple[int, Path, str]]
"""Folder (0 is the shipped one), file, and the text in it."""


def read_texts(extra_folders: Sequence[Path]) -> tuple[Texts, list[Problem]]:
    """Read every rule file; folders and files that cannot be read are problems."""
    texts: Texts = []
    problems: list[Problem] = []
    for number, folder in enumerate((SHIPPED, *extra_folders)):
        if not folder.is_dir():
            problems.append(Problem(str(folder), "", "no such folder", "a folder of rule files"))
            continue
        files = _rule_files(folder, shipped=number == 0)
        if len(files) > MOST_FILES:
            given = f"more than {MOST_FILES} rule files"
            problems.append(Problem(str(folder), "", given, f"at most {MOST_FILES} in a folder"))
            continue
        room = MOST_BYTES
        for file in files:
            try:
                texts.append((number, file, _read(file)))
                room -= len(texts[-1][2])
                if room < 0:
                    given = f"more than {MOST_BYTES} bytes in all"
                    problems.append(Problem(str(file), "", given, f"at most {MOST_BYTES} in a folder"))
                    break
            except OSError as error:
                problems.append(Problem(str(file), "", error.strerror or "unreadable", "a readable file"))
            except InputError as error:
                problems += error.problems
    return texts, problems


def _read(file: Path) -> str:
    """Return the text of a rule file, never more of it than is allowed."""
    if not file.is_file():  # a pipe or a device would be read for ever
        raise InputError([Problem(str(file), "", "no ordinary file", "a file of rules")])
    with file.open("rb") as stream:
        return text_from_bytes(stream.read(RULE_LIMITS.bytes + 1), file=str(file), limits=RULE_LIMITS)


def _rule_files(folder: Path, *, shipped: bool) -> list[Path]:
    """Return the rule files of a folder in their order; of a shop's folder one more than is allowed."""
    if not shipped:
        found = (path for pattern in ("*.yaml", "*.yml") for path in folder.rglob(pattern))
        return sorted(islice(found, MOST_FILES + 1))
    sections = (sorted((folder / section).rglob("*.yaml")) for section in sorted(SECTIONS))
    return [*sorted(folder.glob("*.yaml")), *chain.from_iterable(sections)]


def build(
    texts: Texts, *, extra_folders: Sequence[Path] = (), thorough: bool = False
) -> tuple[Knowledge, list[Problem]]:
    """Decode and check rule texts; return what could be decoded, and every problem.

    With ``thorough`` also what can be loaded but is left to do: examples, effects, words.
    """
    entries: Entries = {section: {} for section in SECTIONS}
    places: Places = {}
    problems: list[Problem] = []
    loosened: list[str] = []
    room = [MOST_ENTRIES] * (1 + len(extra_folders))
    for number, file, text in texts:
        try:
            document = load_document(text, file=str(file), limits=RULE_LIMITS)
        except InputError as error:
            problems += error.problems
            continue
        for section, entry, path in _decoded(document, file, problems):
            room[number] -= 1
            if room[number] < 0:
                given = f"more than {MOST_ENTRIES} entries in all"
                problems.append(Problem(str(file), "", given, f"at most {MOST_ENTRIES} in a folder"))
                break
            known = entries[section].get(entry.id)
            if known is not None and places[section, entry.id].folder == number:
                problems.append(
                    _at(document, path, f"{entry.id}: id", "given twice", "each id once in a folder")
                )
            elif known is not None:
                loosened += loosened_by(known, entry)
            entries[section][entry.id] = entry
            places[section, entry.id] = Place(number, document, path)
    knowledge = msgspec.convert(
        {**entries, "loosened": loosened, "folders": [str(folder) for folder in extra_folders]}, Knowledge
    )
    problems += [_problem(mistaken, places) for mistaken in all_mistakes(knowledge, thorough=thorough)]
    return knowledge, problems


def _decoded(document: Document, file: Path, problems: list[Problem]) -> Iterator[tuple[str, Entry, Steps]]:
    """Yield the entries of a document that could be decoded; note what is wrong with the others."""
    before = len(problems)
    for section, base, plain in _sections(document, file, problems):
        if not isinstance(plain, list):
            given = "nothing" if plain is None else "no list"
            problems.append(_at(document, base, section, given, "a list of entries"))
            continue
        for index, part in enumerate(plain):
            path = (*base, index)
            spelled, mistakes = spelled_out(part)
            for one in spelled:
                entry, mistakes = decode(one, SECTIONS[section])
                if entry is None:  # the other rows of a table have the same mistakes
                    break
                yield section, entry, path
            name = part.get("id") if isinstance(part, dict) else None
            label = str(name) if name else f"{section}[{index + 1}]"
            for mistake in mistakes:
                where = f"{label}: {spell(mistake.path)}" if mistake.path else label
                problems.append(_at(document, (*path, *mistake.path), where, mistake.given, mistake.allowed))
            if len(problems) - before > MOST_PROBLEMS:
                given = f"more than {MOST_PROBLEMS} mistakes"
                problems.append(_at(document, path, label, given, "those before put right first"))
                return


def _sections(document: Document, file: Path, problems: list[Problem]) -> Iterator[tuple[str, Steps, object]]:
    if isinstance(document.data, dict):
        for key, plain in islice(document.data.items(), MOST_PROBLEMS):
            section = _ALSO_CALLED.get(key, key)
            if section in SECTIONS:
                yield section, (key,), plain
            else:
                allowed = did_you_mean(key, {*SECTIONS, *_ALSO_CALLED})
                problems.append(_at(document, (key,), key, "unknown section", allowed))
        return
    names = [file.stem, *(parent.name for parent in file.parents)]
    sections = [_ALSO_CALLED.get(name, name) for name in names]
    named = next((name for name in sections if name in SECTIONS), None)
    if named is not None and isinstance(document.data, list):
        yield named, (), document.data
    elif document.data is None:
        problems.append(_at(document, (), "", "no entries", "a list of entries under faults, limits, …"))
    else:
        allowed = f"sections: {', '.join(sorted(SECTIONS))}"
        problems.append(_at(document, (), "", "no section", allowed))


def _at(document: Document, path: Steps, where: str, given: str, allowed: str) -> Problem:
    return Problem(document.file, where, given, allowed, document.line(path))


def _problem(mistaken: Mistaken, places: Places) -> Problem:
    """Give a check's complaint its file and line."""
    place = places.get((mistaken.section, mistaken.entry))
    where = ": ".join(part for part in (mistaken.entry, spell(mistaken.path)) if part)
    if place is None:
        return mistaken.issue(file=str(SHIPPED), where=where, given=mistaken.given, allowed=mistaken.allowed)
    line = place.document.line((*place.path, *mistaken.path))
    return mistaken.issue(
        file=place.document.file, where=where, given=mistaken.given, allowed=mistaken.allowed, line=line
    )
