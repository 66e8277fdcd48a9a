"""What a person types at a reading: ``15.2 15.9 14.8``, ``420m``, ``>5G``, ``OL``, ``-``.

A bare number is in the measure's usual unit; a multiplier (n u m k M G) stands before
the inner unit of its dimension. ``spell_out`` says in words what was understood.
"""

from __future__ import annotations

import math
import re
from typing import Final

from calc.formatting import in_unit
from calc.quantities import INNER_UNIT, MEASURES, Measure, arity
from calc.sheet import Value
from calc.units import dimension_of, find_unit
from calc.values import MISSING, ValueTextError, parse_value

_NOT_READ: Final = frozenset({"-", "–", "—", "?", "_", "null"})
_MULTIPLIERS: Final = {
    "resistance": "umkMGT",
    "voltage": "umk",
    "current": "umk",
    "power": "mkM",
    "capacitance": "nu",
    "frequency": "k",
    "speed": "k",
}
_NUMBER: Final = r"[+-]?[0-9.,]*[0-9][0-9.,]*(?:[eE][+-]?[0-9]+)?"
_LIMIT_SIGN: Final = re.compile(r">=?|<=?|≥|≤")
_LINES: Final = ("L1", "L2", "L3")
_BETWEEN_LINES: Final = ("L1-L2", "L2-L3", "L3-L1")
_BETWEEN_TERMINALS: Final = ("U-V", "V-W", "W-U")
_PLACES: Final = {
    "supply_voltage": _BETWEEN_LINES,
    "incoming_voltage": _BETWEEN_LINES,
    "line_current": _LINES,
    "voltage_to_earth": ("L1-PE", "L2-PE", "L3-PE"),
    "pole_drop": _LINES,
    "winding_resistance": _BETWEEN_TERMINALS,
    "phase_resistance": ("U1-U2", "V1-V2", "W1-W2"),
    "insulation_between_phases": _BETWEEN_TERMINALS,
}
_IN_WORDS: Final = {
    "Tohm": "teraohm",
    "Gohm": "gigaohm",
    "Mohm": "megohm",
    "kohm": "kilohm",
    "mohm": "milliohm",
    "uohm": "microohm",
    "mV": "millivolt",
    "kV": "kilovolt",
    "mA": "milliampere",
    "uA": "microampere",
    "uF": "microfarad",
    "nF": "nanofarad",
    "degC": "°C",
    "degF": "°F",
}


def value_places(measure: str, kind: str) -> tuple[str, ...]:
    """Return where each value of a measure is read: ``("L1", "L2", "L3")``, or one empty name."""
    return _PLACES[measure] if arity(measure, kind) == 3 else ("",)


def parse_typed(text: str, *, measure: str, kind: str, usual_unit: str | None = None) -> tuple[Value, ...]:
    """Read what a person typed for one measure.

    Parameters
    ----------
    text : str
        One value, or three with spaces, slashes or semicolons between them.
    measure, kind : str
        Ids of ``calc.quantities``; they decide how many values are due.
    usual_unit : str, optional
        Unit of a bare number; without it the measure's usual unit.

    Returns
    -------
    tuple of Value
        As many as the measure has; each text carries its unit, so that a sheet can hold it.

    Raises
    ------
    ValueTextError
        If there are too few or too many, or one can be read in two ways.

    Examples
    --------
    >>> parse_typed("420m", measure="main_resistance", kind="induction_1ph")[0].number
    0.42

    """
    entry = MEASURES[measure]
    wanted = arity(measure, kind)
    items = _split(text, entry, wanted)
    if len(items) != wanted:
        where = ", ".join(value_places(measure, kind))
        due = (
            f"three values with spaces between ({where}; - for one not read)" if wanted == 3 else "one value"
        )
        raise ValueTextError(text, f"{due}; {len(items)} given")
    common = _unit_of(items[-1]) if wanted == 3 and not any(_unit_of(item) for item in items[:-1]) else ""
    values = tuple(_one(item, entry, common or usual_unit or entry.usual_unit) for item in items)
    if not any(value.is_read for value in values):
        raise ValueTextError(text, "at least one value")
    return values


def spell_out(measure: str, values: tuple[Value, ...]) -> str:
    """Say in words what was understood, such as "line current: L1 15.2 A, L2 not read, L3 14.8 A"."""
    places = _PLACES.get(measure, ("",)) if len(values) == 3 else ("",)
    parts = (
        f"{place} {_say(value, MEASURES[measure].dimension)}".strip()
        for place, value in zip(places, values, strict=True)
    )
    return f"{MEASURES[measure].label}: {', '.join(parts)}"


def _split(text: str, entry: Measure, wanted: int) -> list[str]:
    """Take the values apart; a comma parts them only where it can be no decimal comma."""
    clean = text.strip()
    if wanted == 1:
        return [clean] if clean else []
    if re.fullmatch(r"[^,]+(?:,\s+[^,]+){2}", clean) or re.fullmatch(
        r"[0-9]*\.[0-9.]*(?:,[0-9.]+){2}\D*", clean
    ):
        clean = clean.replace(",", " ")
    items: list[str] = []
    for word in re.split(r"[\s/;]+", clean):
        if items and (_LIMIT_SIGN.fullmatch(items[-1]) or _belongs(word, items[-1], entry)):
            items[-1] += f" {word}"
        else:
            items.append(word)
    return items


def _belongs(word: str, before: str, entry: Measure) -> bool:
    """Whether a word is the unit of the number before it."""
    if word[:1].isdigit() or not re.search(r"[0-9]$", before):
        return False
    return word in _MULTIPLIERS.get(entry.dimension, "") or dimension_of(word) is not None


def _unit_of(item: str) -> str:
    found = re.fullmatch(rf"(?:>=?|<=?|≥|≤)?\s*{_NUMBER}\s*(?P<unit>[^\d\s+.,-].*)?", item)
    return (found["unit"] or "").strip() if found else ""


def _one(item: str, entry: Measure, unit: str) -> Value:
    """Read one value, with the unit or multiplier that was typed or the usual one."""
    if item in _NOT_READ:
        return MISSING
    typed = _unit_of(item)
    if not typed:
        text = f"{item} {unit}" if unit and re.search(r"[0-9]$", item) else item
    elif find_unit(typed, dimension=entry.dimension) is not None:
        text = item
    else:
        text = f"{item[: len(item) - len(typed)].strip()} {typed}"
    value = parse_value(_multiplied(text, entry), dimension=entry.dimension)
    if value.kind == "range":
        raise ValueTextError(item, f"one value of {entry.label}, not a range")
    return value


def _multiplied(text: str, entry: Measure) -> str:
    """Put the inner unit behind a lone multiplier: 420m is 420 mohm where ohms are read."""
    number, _, suffix = text.rpartition(" ")
    suffix = "k" if suffix == "K" else "u" if suffix in {"µ", "μ"} else suffix
    if len(suffix) != 1 or suffix not in _MULTIPLIERS.get(entry.dimension, ""):
        return text
    if entry.usual_unit == "Mohm" and suffix in {"m", "u"}:
        raise ValueTextError(
            text.replace(" ", ""), "m is a thousandth; insulation is read in M (Mohm), G or k"
        )
    return f"{number} {suffix}{INNER_UNIT[entry.dimension]}"


def _say(value: Value, dimension: str) -> str:
    if value.kind == "missing":
        return "not read"
    if value.kind == "open":
        return "open circuit"
    number = in_unit(value.number, dimension=dimension, unit=value.unit)
    step = value.resolution * number / value.number if value.number and dimension != "temperature" else 1.0
    decimals = max(0, -math.floor(math.log10(step) + 1e-9)) if step > 0 else 2
    shown = f"{number:.{decimals}f} {_IN_WORDS.get(value.unit, value.unit)}".strip()
    return {"above": f"more than {shown}", "below": f"less than {shown}"}.get(value.kind, shown)
