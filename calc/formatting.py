"""Numbers as people read them: "0.42 ohm", "350 Mohm", "7.5 kW"."""

from __future__ import annotations

import math
from decimal import Decimal
from typing import Final

from calc.quantities import INNER_UNIT
from calc.units import Unit, find_unit

# dimension -> units to choose from, each with the number (inner unit) from which it is used
_LADDER: Final = {
    "power": (("MW", 1e6), ("kW", 1e3), ("W", 0.0)),
    "apparent_power": (("MVA", 1e6), ("kVA", 1e3), ("VA", 0.0)),
    "voltage": (("V", 0.1), ("mV", 0.0)),
    "current": (("A", 0.1), ("mA", 0.0)),
    "resistance": (("Gohm", 1e9), ("Mohm", 1e6), ("kohm", 1e3), ("ohm", 0.0)),
    "capacitance": (("uF", 0.0),),
}
_SHOWN: Final = {"m/s**2": "m/s2"}
_WHOLE: Final = frozenset({"temperature", "level", "count"})


def format_value(number: float, *, dimension: str, unit: str | None = None, digits: int | None = None) -> str:
    """Write a number with its unit, so that ``parse_value`` reads the same number.

    Parameters
    ----------
    number : float
        In the inner unit of the dimension; ``inf`` is written open, ``nan`` not read.
    dimension : str
        A key of ``calc.quantities.INNER_UNIT``.
    unit : str, optional
        Unit to write it in; without one the handiest.
    digits : int, optional
        Digits that count; without it three (frequencies four, temperatures and levels whole).
        Whole digits up to 9999 are never rounded away.

    Returns
    -------
    str
        Number and unit, never with an exponent.

    Examples
    --------
    >>> format_value(350e6, dimension="resistance")
    '350 Mohm'
    >>> format_value(0.42, dimension="resistance", digits=2)
    '0.42 ohm'

    """
    if math.isnan(number):
        return "not read"
    if math.isinf(number):
        return "open" if dimension == "resistance" and number > 0 else "beyond the meter"
    chosen = find_unit(unit, dimension=dimension) if unit else _handiest(number, dimension)
    if chosen is None:
        raise KeyError(unit)
    shown = (number - float(chosen.offset)) / float(chosen.factor)
    usual = 1 if dimension in _WHOLE else 4 if dimension == "frequency" else 3
    text = _plain(shown, digits or usual)
    return f"{text} {_SHOWN.get(chosen.name, chosen.name)}".rstrip()


def in_unit(number: float, *, dimension: str, unit: str) -> float:
    """Return a number of the inner unit in another unit of its dimension.

    Raises
    ------
    KeyError
        If the dimension has no such unit.

    """
    found = find_unit(unit, dimension=dimension)
    if found is None:
        raise KeyError(unit)
    return (number - float(found.offset)) / float(found.factor)


def _handiest(number: float, dimension: str) -> Unit | None:
    """Return the unit in which the number is easy to read; 999.9 kohm, about to be rounded up, is 1 Mohm."""
    for name, start in _LADDER.get(dimension, ()):
        if abs(number) >= 0.9995 * start and (number or not start):
            return find_unit(name, dimension=dimension)
    inner = INNER_UNIT[dimension]
    return find_unit(inner, dimension=dimension)


def _plain(number: float, digits: int) -> str:
    """Write a number with so many digits that count, without an exponent."""
    if number == 0:
        return "0"
    if abs(number) < 9999.5:
        digits = max(digits, math.floor(math.log10(abs(number))) + 1)
    rounded = Decimal(f"{number:.{digits - 1}e}")
    return f"{rounded:f}"
