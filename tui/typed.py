"""A reading as a person types it: what it means, said in words, and what is asked before it is stored."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any, Final

import msgspec

from calc.errors import InputError, Problem
from calc.plausible import far_off_times
from calc.quantities import INNER_UNIT, MEASURES
from calc.sheet import CaseSheet
from calc.sheet_io import sheet_from_plain, sheet_to_plain
from calc.typed import parse_typed, spell_out
from calc.units import find_unit
from calc.values import ValueTextError, parse_value
from calc.vocabulary import CHECKED, CONTEXT_DIMENSION, CONTEXT_WORDS
from tui.words import band_text, measure_name, plain

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calc.sheet import Machine, Reading, Value
    from rules.answer import Band
    from rules.knowledge import ReadingRule

MOST_MINUTES: Final = 100_000


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


def doubted(understood: Understood, rule: ReadingRule | None, band: Band | None) -> Understood:
    """Return what was understood, asked about where it is hardly possible or far off its band."""
    if understood.asks:
        return understood
    reading = understood.reading
    asks = [_beyond(reading, value, rule) or _far_off(reading, value, band) for value in reading.values]
    said = next((text for text in asks if text), "")
    if not said:
        return understood
    note = f"{reading.note} ({CHECKED})" if reading.note else CHECKED
    return replace(understood, reading=msgspec.structs.replace(reading, note=note), asks=said)


def _beyond(reading: Reading, value: Value, rule: ReadingRule | None) -> str:
    """Return why a value is outside the plausible range of its reading rule, or nothing."""
    if rule is None or rule.plausible is None or not math.isfinite(value.number):
        return ""
    dimension = MEASURES[reading.measure].dimension
    low, high = (parse_value(text, dimension=dimension) for text in rule.plausible)
    if low.number <= value.number <= high.number:
        return ""
    return f"{value.text} is outside what is ever read here, {low.text} to {high.text}"


def _far_off(reading: Reading, value: Value, band: Band | None) -> str:
    """Return why a value is likelier a slip of the unit than a reading, or nothing."""
    measure = MEASURES[reading.measure]
    unit = find_unit(band.unit, dimension=measure.dimension) if band is not None else None
    if band is None or unit is None or measure.usual_unit == "Mohm" or not math.isfinite(value.number):
        return ""
    times, number = far_off_times(), (value.number - float(unit.offset)) / float(unit.factor)
    is_part = measure.dimension in {"resistance", "capacitance"}
    if band.high < math.inf and number > times * band.high > 0.0:
        return f"{value.text} is more than {times:g} times the {band_text(band)} expected"
    if is_part and 0.0 < number < band.low / times:
        return f"{value.text} is less than 1/{times:g} of the {band_text(band)} expected"
    return ""


def minutes_of(text: str) -> float | None:
    """Return minutes as typed, None for a blank line. Raises InputError where it is no such number."""
    if not text.strip():
        return None
    try:
        minutes = float(text.replace(",", "."))
    except ValueError:
        minutes = math.nan
    if not 0.0 <= minutes < MOST_MINUTES:
        raise InputError([Problem("", "minutes", text, "a number of minutes, zero or more")])
    return minutes


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
