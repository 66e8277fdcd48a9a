"""What is known about a machine or a reading, and whether it meets the ``where`` of a rule.

A ``where`` maps the name of a fact to what it must be: a word (``mount: rigid``), several
(``starter: direct | star_delta``), or a span of a quantity (``power: 15..300 kW``, above
15 kW up to and including 300 kW; ``..15 kW`` and ``300.. kW`` have one end). A fact that
nobody knows meets ``unknown`` only, as in ``mount: flexible | unknown``.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from functools import lru_cache
from typing import Final

from calc.sheet import CaseSheet, Reading, Value
from rules.amounts import amount, is_amount
from rules.derived.machine import poles_of

Fact = str | float | None
Facts = Callable[[str], Fact]

PLATE: Final = frozenset(
    {
        "power", "voltage", "current", "frequency", "speed", "power_factor", "efficiency", "service_factor",
        "poles", "duty_factor", "shaft_height", "ambient", "max_speed", "field_voltage", "field_current",
        "rotor_bars",
    }
)  # fmt: skip
PLATE_WORDS: Final = frozenset(
    {
        "connection", "code_letter", "design_letter", "insulation_class", "duty", "enclosure",
        "power_supply_code",
    }
)  # fmt: skip
MACHINE_WORDS: Final = frozenset(["kind", "starter", "mount", "thermal_protector"])
MACHINE_FLAGS: Final = frozenset({"hazardous_area", "brake"})
READING_WORDS: Final = frozenset(["state", "at", "links", "method", "position", "direction", "instrument"])
NAMES: Final = (
    PLATE | PLATE_WORDS | MACHINE_WORDS | MACHINE_FLAGS | READING_WORDS | {"load", "supply", "complaint"}
)


def facts_of(sheet: CaseSheet, reading: Reading | None = None) -> Facts:
    """Return a look-up of the facts of a sheet and, where given, of one of its readings."""
    machine = sheet.machine

    def fact(name: str) -> Fact:
        found: object = None
        if name == "poles":
            poles = poles_of(sheet)
            return None if poles is None else float(poles)
        if name in PLATE or name in PLATE_WORDS:
            found = getattr(machine.nameplate, name)
        elif name in MACHINE_WORDS or name in MACHINE_FLAGS:
            found = getattr(machine, name)
        elif name in READING_WORDS:
            found = None if reading is None else getattr(reading, name)
        else:
            found = {
                "load": machine.load_type,
                "supply": machine.supply.source,
                "complaint": sheet.complaint,
            }.get(name)
        return _plain(found)

    return fact


def facts_in(given: Mapping[str, str]) -> Facts:
    """Return a look-up of facts written out as text, as in the examples of limits."""

    def fact(name: str) -> Fact:
        text = given.get(name)
        if text is None or name not in PLATE or not is_amount(text):
            return text
        return amount(text)

    return fact


def meets(where: Mapping[str, str], facts: Facts) -> bool:
    """Whether the facts are all as ``where`` asks."""
    return all(_matches(wanted, facts(name)) for name, wanted in where.items())


_SPAN: Final = re.compile(r"(-?[0-9][0-9.]*?)?\.\.(-?[0-9][0-9.]*)?\s*(\S*)")


@lru_cache(maxsize=1024)
def span(text: str) -> tuple[float, float] | None:
    """Return both ends of a span such as ``15..300 kW`` in the inner unit, or None where it is none."""
    parts = _SPAN.fullmatch(text.strip())
    if parts is None:
        return None
    low, high, unit = parts.groups()
    ends = [f"{end} {unit}".strip() if end else "" for end in (low, high)]
    if not any(ends) or not all(is_amount(end) for end in ends if end):
        return None
    return (amount(ends[0]) if ends[0] else -math.inf, amount(ends[1]) if ends[1] else math.inf)


def _matches(wanted: str, fact: Fact) -> bool:
    """Whether a fact is one of the words, amounts or spans of ``a | b``; ``unknown`` is a missing fact."""
    words = [word.strip() for word in wanted.split("|")]
    if fact is None:
        return "unknown" in words
    return any(_is(word, fact) for word in words)


def _is(word: str, fact: str | float) -> bool:
    if isinstance(fact, str):
        return word == fact
    ends = span(word)
    if ends is not None:
        return ends[0] < fact <= ends[1]
    return is_amount(word) and math.isclose(fact, amount(word), rel_tol=1e-6)


def _plain(found: object) -> Fact:
    if isinstance(found, bool):
        return "yes" if found else "no"
    if isinstance(found, Value):
        return found.number if found.is_read and not math.isnan(found.number) else None
    return found if isinstance(found, str) else None
