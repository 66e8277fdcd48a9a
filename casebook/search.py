"""What a person types, as a question to the full-text index. What is typed is data, never syntax."""

from __future__ import annotations

from typing import Final

from calc.sheet import Nameplate, Rating, Value
from casebook import bodies as b
from casebook.entry import clean_text
from casebook.fold import Case

MAX_WORDS: Final = 12
MAX_TYPED: Final = 200
MAX_TEXT: Final = 200_000


def query_of(text: str) -> str | None:
    """Return an FTS5 expression for what was typed: every word, as a beginning; None when there is no word.

    A word such as ``P-104`` becomes the phrase of its parts. Quotes are doubled, so
    that nothing that is typed can be an operator.
    """
    words = [word for word in clean_text(text[:MAX_TYPED]).split() if _searchable(word)]
    if not words:
        return None
    quoted = ['"' + word.replace('"', '""') + '"*' for word in words[:MAX_WORDS]]
    return " ".join(quoted)


def _searchable(word: str) -> bool:
    return any(character.isalnum() for character in word)


def bare_tag(tag: str) -> str:
    """Return a tag without its separators, so that P104 finds P-104; nothing if it has none."""
    bare = "".join(character for character in tag if character.isalnum())
    return "" if bare == tag else bare


def plate_text(nameplate: Nameplate) -> str:
    """Return what the plate says, as one line."""
    return " ".join(_said(nameplate))


def _said(plate: Nameplate | Rating) -> list[str]:
    said: list[str] = []
    for name in plate.__struct_fields__:
        value = getattr(plate, name)
        if isinstance(value, Value):
            said.append(value.text)
        elif isinstance(value, str):
            said.append(value)
        elif isinstance(value, tuple):
            said += [word for rating in value for word in _said(rating)]
    return said


def words_text(case: Case) -> str:
    """Return all other words of a case: complaint, faults, findings, notes, what was seen and done, who."""
    words = [case.complaint, case.machine.kind, case.machine.load_type or "", *case.persons]
    words += [name for name, answer in case.observations.items() if answer]
    for line in case.lines:
        if not line.struck:
            words += _body_words(line.body)
    return " ".join(dict.fromkeys(word for word in words if word))[:MAX_TEXT]


def _body_words(body: b.Body) -> list[str]:  # noqa: PLR0911  (one return per kind)
    match body:
        case b.Note(text=text):
            return [text]
        case b.Shown():
            top = [fault.id for fault in body.faults[:1]]
            return top + [finding.says for finding in body.findings]
        case b.Concluded():
            return [body.fault, body.decision, body.note]
        case b.Repaired():
            return [body.done, *body.parts]
        case b.Closed():
            return [body.found, body.done, *body.parts, body.note]
        case b.ReadingTaken():
            return [body.reading.note or "", body.reading.instrument or ""]
        case b.Isolation():
            return [body.by, body.points, body.note]
        case b.Skipped(why=why) | b.Reopened(why=why) | b.Correction(why=why):
            return [why]
        case b.Words(data=data):
            return _strings(data)
    return []


def _strings(data: object) -> list[str]:
    """Every text inside a body of an unknown kind."""
    if isinstance(data, str):
        return [data]
    inside = data.values() if isinstance(data, dict) else data if isinstance(data, list) else ()
    return [text for value in inside for text in _strings(value)]
