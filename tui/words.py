"""Ids and values in words. An id that is not known is shown as its own words."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from calc.quantities import KINDS, MEASURES

if TYPE_CHECKING:
    from calc.sheet import CaseSheet, Machine, Reading, Value
    from rules.answer import Band
    from rules.knowledge import Knowledge

_CONTEXT = (
    "temperature",
    "test_voltage",
    "speed",
    "at",
    "links",
    "method",
    "after_stop",
    "position",
    "direction",
)
STOP_FIRST = "Isolate it, lock it out, prove it dead."
_DIGIT = re.compile(r"[0-9]")
_NUMBER_AND_UNIT = re.compile(r"([<>=≤≥]*\s*[-+0-9.,]+(?:[eE][-+]?[0-9]+)?)\s*([^\s0-9].*)")


def plain(identifier: str) -> str:
    """Return an id as words."""
    return identifier.replace("_", " ")


def measure_name(measure: str) -> str:
    """Return a measure in words."""
    return MEASURES[measure].label if measure in MEASURES else plain(measure)


def kind_name(kind: str) -> str:
    """Return a machine kind in words."""
    return KINDS.get(kind, plain(kind))


def complaint_name(complaint: str, knowledge: Knowledge) -> str:
    """Return a complaint in words."""
    known = knowledge.complaints.get(complaint)
    return known.name if known else plain(complaint)


def stop_words(complaint: str, knowledge: Knowledge) -> str:
    """Return what comes before everything else where a complaint means stop; nothing where it does not."""
    known = knowledge.complaints.get(complaint)
    return (known.first or STOP_FIRST) if known is not None and known.stop else ""


def question(observation: str, knowledge: Knowledge) -> str:
    """Return an observation as the question that it answers."""
    known = knowledge.observations.get(observation)
    return known.name if known else plain(observation)


def answer_words(observation: str, seen: bool, knowledge: Knowledge) -> str:
    """Return an answered observation in words."""
    return f"{question(observation, knowledge)} {'yes' if seen else 'no'}"


def fault_name(fault: str, knowledge: Knowledge) -> str:
    """Return a fault, or two at once, in words."""
    return " and ".join(_one_fault(part, knowledge) for part in fault.split("+"))


def _one_fault(fault: str, knowledge: Knowledge) -> str:
    """Return one fault or refinement in words."""
    if fault in knowledge.faults:
        return knowledge.faults[fault].name
    inner = [part.name for known in knowledge.faults.values() for part in known.within if part.id == fault]
    return inner[0] if inner else plain(fault)


def key_words(key: str, knowledge: Knowledge) -> str:
    """Return ``measure@state``, or an observation, in words."""
    measure, at, state = key.partition("@")
    return f"{measure_name(measure)}, {plain(state)}" if at else question(key, knowledge)


def value_text(value: Value) -> str:
    """Return a value as it was typed; one that was not read as a dash."""
    return value.text if value.is_read else "-"


def reading_text(reading: Reading) -> str:
    """Return the values of a reading as typed, the unit once where it is the same for all."""
    texts = [value_text(value) for value in reading.values]
    parts = [_NUMBER_AND_UNIT.fullmatch(text) for text in texts]
    units = {part[2] for part in parts if part is not None}
    is_one = len(units) == 1 and all(
        part or not _DIGIT.search(text) for part, text in zip(parts, texts, strict=True)
    )
    if is_one and len(texts) > 1:
        numbers = [part[1] if part else text for part, text in zip(parts, texts, strict=True)]
        return f"{' / '.join(numbers)} {units.pop()}"
    return " / ".join(texts)


def heading(sheet: CaseSheet, knowledge: Knowledge) -> str:
    """Return a case in one line: the machine, its kind, the complaint."""
    tag = sheet.machine.tag or "(no tag)"
    return f"{tag}: {kind_name(sheet.machine.kind)}, {complaint_name(sheet.complaint, knowledge)}"


def percent(probability: float) -> str:
    """Return a probability in percent, three places wide; never 0 or 100, which nobody knows."""
    rounded = round(100 * probability)
    return f"{'<1' if rounded < 1 else '>99' if rounded > 99 else rounded:>3} %"


def number(value: float) -> str:
    """Return a number with three significant digits; whole from 1000 on."""
    return f"{value:.0f}" if abs(value) >= 999.5 else f"{value:#.3g}".rstrip(".")


def number_range(low: float, high: float) -> str:
    """Return two numbers as a range."""
    return f"{number(low)} to {number(high)}"


def band_text(band: Band) -> str:
    """Return a band as text, such as ``13.1 to 15.0 A (90 %)``."""
    return f"{number_range(band.low, band.high)} {band.unit}".rstrip() + f" ({100 * band.coverage:.0f} %)"


def plate_text(machine: Machine) -> str:
    """Return a nameplate in one line, as typed."""
    plate = machine.nameplate
    said: list[str] = []
    for name in plate.__struct_fields__:
        value = getattr(plate, name)
        if name == "ratings" or value is None:
            continue
        text = value if isinstance(value, str) else value_text(value)
        said.append(
            text if name in {"power", "voltage", "current", "frequency", "speed"} else f"{plain(name)} {text}"
        )
    return ", ".join(said) or "not readable"


def reading_name(reading: Reading) -> str:
    """Return measure and state in words."""
    return f"{measure_name(reading.measure)}, {plain(reading.state)}"


def context_text(reading: Reading) -> str:
    """Return what was noted with a reading."""
    said = []
    for name in _CONTEXT:
        value: Value | str | None = getattr(reading, name)
        if value is not None:
            said.append(plain(value) if isinstance(value, str) else value_text(value))
    return ", ".join([*said, *([reading.note] if reading.note else [])])
