"""Typed fields out of plain data; every problem is collected, none stops the rest."""

from __future__ import annotations

import difflib
import re
import unicodedata
from collections.abc import Collection, Iterable
from typing import Final

from calc.errors import Problem, clip
from calc.safe_yaml import Document, Plain, Step, where
from calc.sheet import Value
from calc.values import MISSING, ValueTextError, parse_value
from calc.vocabulary import PERCENT_RATIOS

_ID: Final = re.compile(r"[a-z][a-z0-9_]{0,63}")
_TORN: Final = "a comma parts the fields here: write a point, 7.5 kW; between thousands nothing, 1455 rpm"
MOST_BEGUN: Final = 3
"""Of words that begin as what was written, at most so many are told."""
_YES: Final = frozenset({"yes", "true", "on", "y"})
_NO: Final = frozenset({"no", "false", "off", "n"})


def did_you_mean(word: str, known: Collection[str]) -> str:
    """Say which known words are near or begin so, or list what is known where the list is short."""
    begun = [one for one in sorted(known) if word and one.startswith(f"{word.casefold()}_")]
    near = difflib.get_close_matches(word.casefold(), list(known), n=2, cutoff=0.6) or begun[:MOST_BEGUN]
    if near:
        return f"did you mean {' or '.join(near)}?"
    return f"one of: {', '.join(sorted(known))}" if len(known) <= 30 else "see the case sheet's vocabulary"


class Fields:
    """One mapping of the document: hands out its fields and notes what is wrong with them."""

    def __init__(
        self,
        document: Document,
        path: tuple[Step, ...],
        data: Plain,
        problems: list[Problem],
        example: str = "kind: induction_3ph",
    ) -> None:
        self.document = document
        self.path = path
        self.problems = problems
        self.data: dict[str, Plain] = {}
        if isinstance(data, dict):
            self.data = {str(key): value for key, value in data.items()}
        elif data is not None:
            self.wrong("", _kind(data), f"fields with names, such as {{{example}}}")

    def wrong(self, field: str, given: str, allowed: str, *, step: int | None = None) -> None:
        """Note a problem with a field."""
        path: tuple[Step, ...] = (
            *self.path,
            *((field,) if field else ()),
            *((step,) if step is not None else ()),
        )
        line = self.document.line(path)
        self.problems.append(
            Problem(file=self.document.file, where=where(path), given=given, allowed=allowed, line=line)
        )

    def refuse_unknown(self, known: Collection[str]) -> None:
        """Note every field that is none of the known ones."""
        for name in self.data:
            if name[:1].isdigit():
                self.wrong(clip(name, 40), "", _TORN)
            elif name not in known:
                self.wrong(clip(name, 40), "", f"no such field; {did_you_mean(name, known)}")

    def inner(self, field: str, example: str = "kind: induction_3ph") -> Fields:
        """Return a mapping inside this one, empty where it is not given."""
        return Fields(self.document, (*self.path, field), self.data.get(field), self.problems, example)

    def entry(self, field: str, index: int, example: str) -> Fields | None:
        """Return one mapping of a list, or None where it is something else."""
        listed = self.data.get(field)
        data = listed[index] if isinstance(listed, list) else None
        if not isinstance(data, dict):
            self.wrong(field, _kind(data), f"fields with names, such as {{{example}}}", step=index)
            return None
        found = Fields(self.document, (*self.path, field, index), data, self.problems, example)
        return None if found.torn() else found

    def torn(self) -> bool:
        """Note a name that is part of a number: between braces a comma parts the fields."""
        for name in self.data:
            if name[:1].isdigit():
                self.wrong(clip(name, 40), "", _TORN)
                return True
        return False

    def items(self, field: str) -> Iterable[tuple[int, Plain]]:
        """Return the entries of a list, none where it is not given."""
        found = self.data.get(field)
        if isinstance(found, list):
            return enumerate(found)
        if found is not None:
            self.wrong(field, _kind(found), "a list")
        return ()

    def text(self, field: str, *, longest: int) -> str | None:
        """Return free text of at most ``longest`` characters, on one line except for notes."""
        found = self._scalar(field, "text")
        if found is None:
            return None
        if len(found) > longest:
            self.wrong(field, f"{len(found)} characters", f"at most {longest} characters")
            return None
        if longest < 200 and not all(c.isprintable() or unicodedata.category(c) == "Zs" for c in found):
            self.wrong(field, clip(found), "text on one line")
            return None
        return found

    def word(self, field: str, allowed: Collection[str], *, example: str = "") -> str | None:
        """Return one of the allowed words."""
        found = self._scalar(field, example or "a word")
        if found is None or found in allowed:
            return found
        self.wrong(field, clip(found), did_you_mean(found, allowed))
        return None

    def id(self, field: str) -> str | None:
        """Return an id: letters, digits and underscores, checked by whoever knows its meaning."""
        found = self._scalar(field, "an id such as trips_under_load")
        if found is None or _ID.fullmatch(found):
            return found
        self.wrong(field, clip(found), "an id such as trips_under_load: small letters, digits, underscores")
        return None

    def named(self, word: Plain, *, field: str = "", step: int | None = None) -> bool:
        """Check that a name inside the data is an id."""
        if isinstance(word, str) and _ID.fullmatch(word):
            return True
        self.wrong(
            field or clip(word, 40), _kind(word), "an id: small letters, digits, underscores", step=step
        )
        return False

    def flag(self, field: str) -> bool | None:
        """Return yes or no as a bool."""
        found = self.data.get(field)
        if found is None:
            return None
        if isinstance(found, str | bool):
            word = str(found).strip().casefold()
            if word in _YES or word in _NO:
                return word in _YES
        self.wrong(field, _kind(found), "yes or no (leave it out where nobody looked)")
        return None

    def value(self, field: str, dimension: str) -> Value | None:
        """Return one value with its unit."""
        found = self._scalar(field, "one value")
        if found is None or (found == "" and field not in self.data):
            return None
        return self.parse(found, field, dimension)

    def parse(self, text: str, field: str, dimension: str, *, step: int | None = None) -> Value | None:
        """Read a value's text; a plain 88.7 is a percentage where a plate prints it so."""
        try:
            value = parse_value(text, dimension=dimension)
            if field in PERCENT_RATIOS and value.unit == "" and 2.0 < value.number <= 100.0:
                return parse_value(f"{text.strip()} %", dimension=dimension)
        except ValueTextError as error:
            self.wrong(field, error.given or "nothing", error.allowed, step=step)
            return None
        return value

    def values(self, field: str, dimension: str, *, wanted: int, what: str) -> tuple[Value, ...] | None:
        """Return one value, or the three of a three-phase reading."""
        found = self.data.get(field)
        if found is None:
            self.wrong(field, "nothing", f"the value of {what}; leave the reading out where nothing was read")
            return None
        texts = found if isinstance(found, list) else [found]
        if len(texts) != wanted:
            torn = len(texts) > wanted and any(str(item).strip().isdigit() for item in texts)
            self._count(
                field, len(texts), wanted, what, "; a comma parts the values: write 1.2 ohm" if torn else ""
            )
            return None
        read = [MISSING if t is None else self._item(t, field, dimension, i) for i, t in enumerate(texts)]
        if all(value is MISSING for value in read):
            self.wrong(
                field, "null", f"at least one value of {what}; leave the reading out where nothing was read"
            )
            return None
        return None if None in read else tuple(value for value in read if value is not None)

    def _item(self, item: Plain, field: str, dimension: str, step: int) -> Value | None:
        if isinstance(item, dict | list):
            self.wrong(field, _kind(item), "a value with its unit", step=step)
            return None
        return self.parse(
            str(item), field, dimension, step=step if isinstance(self.data[field], list) else None
        )

    def _count(self, field: str, given: int, wanted: int, what: str, hint: str) -> None:
        if wanted == 1:
            self.wrong(field, f"{given} values", f"one value of {what}{hint}")
        else:
            names = "[…, …, …] in the order of the phases, null for one that was not read"
            self.wrong(field, f"{given} of three values", f"three values of {what}: {names}{hint}")

    def _scalar(self, field: str, wanted: str) -> str | None:
        found = self.data.get(field)
        if isinstance(found, dict | list):
            self.wrong(field, _kind(found), wanted)
            return None
        return None if found is None else str(found)


def _kind(found: object) -> str:
    """Say what stands where something else was wanted."""
    if isinstance(found, dict):
        return "a mapping"
    if isinstance(found, list):
        return "a list"
    if found is None:
        return "null"
    return clip(found) or "empty text"
