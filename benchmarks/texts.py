"""Values as text on a sheet: taken apart, and written with the steps of a display."""

from __future__ import annotations

import math

from benchmarks.graded import Plain
from calc.values import ValueTextError, parse_value


def values_of(reading: Plain) -> list[str]:
    """Return the texts of a reading, one or three."""
    value = reading["value"]
    return [str(text) for text in value] if isinstance(value, list) else [str(value)]


def with_values(reading: Plain, texts: list[str]) -> Plain:
    """Return the reading with other texts."""
    return {**reading, "value": texts if isinstance(reading["value"], list) else texts[0]}


def number_of(text: str, dimension: str) -> float | None:
    """Return the number in the inner unit, or None where there is none ("open", not read)."""
    try:
        value = parse_value(text, dimension=dimension)
    except ValueTextError:
        return None
    return value.number if value.kind == "exact" and math.isfinite(value.number) else None


def unit_of(text: str) -> str:
    """Return the unit as written."""
    return text.partition(" ")[2].strip()


def stepped(number: float, step: float, unit: str) -> str:
    """Return a number as a display with such steps shows it: "0.4 ohm" in steps of 0.1 ohm."""
    decimals = max(0, math.ceil(-math.log10(step) - 1e-9))
    return f"{round(number / step) * step:.{decimals}f} {unit}".strip()


def shown(text: str, factor: float) -> str:
    """Return a text with its decimal point moved, digits kept."""
    number, _, unit = text.partition(" ")
    digits = len(number.replace(".", "").replace("-", "").lstrip("0")) or 1
    value = float(number) * factor
    decimals = max(0, digits - 1 - math.floor(math.log10(abs(value)))) if value else 0
    return f"{value:.{decimals}f} {unit}".strip()


def turned(text: str) -> str:
    """Return a text with its last two digits in the wrong order."""
    number, _, unit = text.partition(" ")
    places = [place for place, sign in enumerate(number) if sign.isdigit()][-2:]
    signs = list(number)
    if len(places) == 2:
        one, other = places
        signs[one], signs[other] = signs[other], signs[one]
    return f"{''.join(signs)} {unit}".strip()
