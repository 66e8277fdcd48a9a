"""A reading as a person types it: what it means, said in words, and what is asked before it is stored."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calc.errors import InputError, Problem
from calc.quantities import INNER_UNIT
from calc.sheet import CaseSheet
from calc.sheet_io import sheet_from_plain, sheet_to_plain
from calc.typed import parse_typed, spell_out
from calc.values import ValueTextError
from calc.vocabulary import CHECKED, CONTEXT_DIMENSION, CONTEXT_WORDS
from tui.words import measure_name, plain

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calc.sheet import Machine, Reading


@dataclass(frozen=True)
class Understood:
    """A reading that was understood, not yet stored.

    ``echo`` says it in words. ``asks`` is empty, or says why the reading is doubted: then it is
    stored only after a yes, and carries the remark that it was checked.
    """

    reading: Reading
    echo: str
    asks: str = ""

    @property
    def key(self) -> str:
        """The id of measure and state together, such as ``line_current@loaded``."""
        return self.reading.key


def understand(
    machine: Machine, measure: str, state: str, text: str, context: Mapping[str, str]
) -> Understood:
    """Read what was typed for one measure. Raises InputError where it is no such reading."""
    plain_reading = _plain_reading(machine, measure, state, text, context)
    reading, asks = _decoded(machine, plain_reading)
    echo = ", ".join([f"{spell_out(measure, reading.values)} ({plain(state)})", *noted(reading)])
    return Understood(reading=reading, echo=echo, asks=asks)


def noted(reading: Reading) -> list[str]:
    """Return in words what goes with a reading."""
    numbered = {
        "temperature": "at {}",
        "test_voltage": "{} test voltage",
        "speed": "at {}",
        "after_stop": "{} after the stop",
    }
    said = []
    for name, form in numbered.items():
        if (value := getattr(reading, name)) is not None:
            said.append(form.format(value.text.replace("degC", "°C").replace("degF", "°F")))
    for name, words in CONTEXT_WORDS.items():
        if (word := getattr(reading, name)) is not None:
            said.append(words.get(word, word))
    return [*said, *([reading.direction] if reading.direction else [])]


def _plain_reading(
    machine: Machine, measure: str, state: str, text: str, context: Mapping[str, str]
) -> dict[str, Any]:
    """Return the reading as a case sheet holds it."""
    try:
        values = parse_typed(text, measure=measure, kind=machine.kind)
    except ValueTextError as error:
        where = f"{measure_name(measure)}, {plain(state)}"
        raise InputError([Problem("", where, error.given, error.allowed)]) from error
    texts = [value.text if value.is_read else None for value in values]
    extra = {name: _with_unit(name, given) for name, given in context.items() if given.strip()}
    return {"measure": measure, "state": state, "value": texts if len(texts) > 1 else texts[0], **extra}


def _with_unit(name: str, given: str) -> str:
    """Return what goes with a reading as the sheet holds it; a bare number is in the inner unit."""
    text = given.strip()
    dimension = CONTEXT_DIMENSION.get(name)
    return f"{text} {INNER_UNIT[dimension]}" if dimension and text[-1:].isdigit() else text


def _decoded(machine: Machine, reading: dict[str, Any]) -> tuple[Reading, str]:
    """Return the reading checked against the machine, and why it is doubted where it is."""
    sheet = sheet_to_plain(CaseSheet(machine=machine, complaint="routine_check"))
    try:
        return sheet_from_plain({**sheet, "readings": [reading]}).readings[0], ""
    except InputError as error:
        doubts = [problem.allowed for problem in error.problems if CHECKED in problem.allowed]
        if len(doubts) < len(error.problems):
            raise
    note = f"{reading['note']} ({CHECKED})" if reading.get("note") else CHECKED
    certain = sheet_from_plain({**sheet, "readings": [{**reading, "note": note}]})
    return certain.readings[0], "; ".join(
        dict.fromkeys(doubt.partition("; if it is so")[0] for doubt in doubts)
    )
