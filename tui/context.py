"""What is typed with a reading: ``350 at 24 C 500 V``, ``1.91 1.92 1.90 @ 24``, ``82 de``.

Which of it a reading may carry is data: ``context`` of the reading rules.
"""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Final

from calc.errors import InputError, Problem
from calc.quantities import MEASURES, arity

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

_AT: Final = re.compile(r"(?:^|\s)at\s+|\s*@\s*", re.IGNORECASE)
_NUMBER: Final = r"[+-]?\d+(?:[.,]\d+)?"
_UNITS: Final[dict[str, dict[str, str]]] = {
    "temperature": {"°C": "degC", "degC": "degC", "C": "degC", "°F": "degF", "degF": "degF", "F": "degF"},
    "test_voltage": {"V": "V", "kV": "kV"},
    "speed": {"rpm": "rpm"},
    "after_stop": {"s": "s", "min": "min"},
}
"""Units as typed, in any case, and as the sheet holds them; a bare number is in the first one's."""
_WORDS: Final[dict[str, dict[str, str]]] = {
    "position": {"de": "de", "nde": "nde"},
    "direction": {
        "horizontal": "horizontal", "vertical": "vertical", "axial": "axial",
        "h": "horizontal", "v": "vertical", "a": "axial",
    },
    "method": {
        "4-wire": "four_wire", "four-wire": "four_wire", "2-lead": "two_lead", "two-lead": "two_lead",
        "volt-drop": "volt_drop", "inrush": "inrush_100ms", "max-hold": "max_hold", "low-pass": "low_pass",
    },
    "links": {"links-off": "removed", "links-on": "fitted"},
    "at": {
        "line-side": "line_side", "starter": "starter", "drive": "drive", "cable-end": "cable_end",
        "motor": "motor",
    },
}  # fmt: skip
_EXAMPLES: Final = {
    "temperature": "24 C",
    "test_voltage": "500 V",
    "speed": "1000 rpm",
    "after_stop": "30 s after stop",
    "position": "de or nde",
    "direction": "h, v or a",
    "method": "4-wire",
    "links": "links-off",
    "at": "motor",
}
_METHODS_OF: Final = {"line_current": "inrush", "supply_frequency": "low-pass"}
"""The method worth naming where it is not the way in which a resistance is read."""
_NUMBERED: Final = frozenset({"temperature", "speed", "after_stop", "at"})
"""What is said with ``at`` before it."""


def split_context(text: str, allowed: Sequence[str]) -> tuple[str, dict[str, str]]:
    """Return the values as typed, and what goes with them by name.

    Of what stands before ``at`` or ``@``, the numbers with a unit and the words at the end that can
    only be meant so are taken; everything behind it must be one of ``allowed``, else InputError.
    """
    before, *behind = _AT.split(text.strip(), maxsplit=1)
    found = _behind(behind[0], allowed) if behind else {}
    while True:
        name, given, rest = _last(before, [name for name in allowed if name not in found])
        if not name or not rest:
            return before, found
        found[name], before = given, rest


def values_wanted(measure: str, kind: str, context: Sequence[str] = ()) -> str:
    """Return what belongs into the line for a measure, in words, and what may go with it."""
    known = MEASURES.get(measure)
    if known is None:
        return "a value with its unit"
    many = "three values" if arity(measure, kind) == 3 else "one value"
    values = f"{many}{f' in {known.usual_unit}' if known.usual_unit else ''}"
    hint = context_hint(measure, context)
    return f"{values}; {hint}" if hint else values


def context_hint(measure: str, allowed: Sequence[str]) -> str:
    """Return what may be typed with a reading: ``add: at 24 C, 500 V``; nothing where nothing may."""
    said = []
    for name in allowed:
        example = _METHODS_OF.get(measure, _EXAMPLES[name]) if name == "method" else _EXAMPLES.get(name, "")
        said += [f"at {example}" if name in _NUMBERED else example] if example else []
    return f"add: {', '.join(said)}" if said else ""


def _behind(text: str, allowed: Sequence[str]) -> dict[str, str]:
    """Understand what stands behind ``at``, from left to right; a bare number is the first that is due."""
    found: dict[str, str] = {}
    rest = text.strip(" ,;")
    while rest:
        due = [name for name in allowed if name not in found]
        name, given, length = _first(rest, due)
        if not name:
            said = context_hint("", allowed).removeprefix("add: ")
            raise InputError(
                [Problem("", "with the reading", rest, f"behind the value: {said or 'nothing'}")]
            )
        found[name] = given
        rest = rest[length:].strip(" ,;")
    return found


def _first(text: str, due: Sequence[str]) -> tuple[str, str, int]:
    """Return name, text and length of what stands first; a bare number counts."""
    for name in due:
        if found := re.match(rf"(?:{_pattern(name)})(?=[\s,;]|$)", text, re.IGNORECASE):
            return name, _given(name, found[0]), found.end()
    bare = re.match(rf"{_NUMBER}(?=[\s,;]|$)", text)
    numbered = [name for name in due if name in _UNITS]
    if bare and numbered:
        return numbered[0], _given(numbered[0], bare[0]), bare.end()
    return "", "", 0


def _last(text: str, due: Sequence[str]) -> tuple[str, str, str]:
    """Return name and text of what stands last, and what stands before it."""
    for name in due:
        if found := re.search(rf"[\s,;]+({_pattern(name)})$", text, re.IGNORECASE):
            return name, _given(name, found[1]), text[: found.start()].rstrip(" ,;")
    return "", "", text


def _pattern(name: str) -> str:
    """Return the pattern of one thing as it is typed; a number needs its unit here."""
    if name in _WORDS:
        return "|".join(re.escape(word).replace(r"\-", "[- ]?") for word in _WORDS[name])
    units = "|".join(re.escape(unit) for unit in _UNITS.get(name, {})) or r"(?!)"
    tail = r"(?:\s+after(?:\s+the)?\s+stop)?" if name == "after_stop" else ""
    return rf"{_NUMBER}\s*(?:{units}){tail}"


def _given(name: str, text: str) -> str:
    """Return what was typed as the sheet holds it."""
    if name in _WORDS:
        return _in_any_case(_WORDS[name], text)
    number, unit = re.match(rf"({_NUMBER})\s*(\S*)", text).groups()  # type: ignore[union-attr]
    return f"{number} {_in_any_case(_UNITS[name], unit) if unit else next(iter(_UNITS[name].values()))}"


def _in_any_case(table: Mapping[str, str], text: str) -> str:
    """Return what a word of a table stands for, however it is written."""
    plain = {word.lower().replace("-", ""): meant for word, meant in table.items()}
    return plain[text.lower().replace("-", "").replace(" ", "")]
