"""Units at the edge: what people write, and its worth in the inner unit of the dimension.

Common spellings are answered from a table of exact factors, so that reading a
sheet does not wait for pint; anything else goes through pint and ``units.txt``.
``tests/calc/test_units.py`` compares every factor with pint.
"""

from __future__ import annotations

import re
from fractions import Fraction
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Final, NamedTuple

from calc.lookup import rows
from calc.quantities import INNER_UNIT

if TYPE_CHECKING:
    import pint


class Unit(NamedTuple):
    """A unit: its name, and ``inner = number * factor + offset``."""

    name: str
    factor: Fraction
    offset: Fraction = Fraction(0)


# dimensions in which a capital M can only be a careless m
_NO_MEGA: Final = frozenset({"length", "cable", "velocity", "acceleration"})
_PINT_WORD: Final = re.compile(r"[A-Za-z_%]{1,24}(?:[*/][A-Za-z_]{1,24}){0,2}(?:(?:\*\*|\^)-?[123])?")
_SYMBOLS: Final = str.maketrans(
    {
        "\u2126": "ohm",
        "\u03a9": "ohm",
        "\u00b5": "u",
        "\u03bc": "u",
        "\u00b0": "deg",
        "\u00b7": "*",
        " ": None,
    }
)


def _key(word: str) -> str:
    """Fold the case of a unit word, but keep a leading m or M: milli is not mega."""
    return word[:1] + word[1:].casefold() if word[:1] in {"m", "M"} else word.casefold()


@cache
def _units(dimension: str) -> dict[str, tuple[Unit, list[str]]]:
    """Return the units of a dimension in the order of the table, with what people also write."""
    return {
        row["unit"]: (
            Unit(row["unit"], Fraction(row["factor"]), Fraction(row["offset"])),
            row["also"].split(),
        )
        for row in rows("units")
        if row["dimension"] == dimension
    }


@cache
def _table(dimension: str) -> dict[str, Unit]:
    """Return every known spelling of a dimension, folded, with its unit."""
    table = {_key(name): unit for name, (unit, _) in _units(dimension).items()}
    for name, (unit, also) in _units(dimension).items():
        careless = name[:1] == "m" and (name == "min" or dimension in _NO_MEGA)
        capitals = [word.capitalize() for word in (*also, *([name] if careless else [])) if word[0] == "m"]
        for word in (*also, *capitals):
            table.setdefault(_key(word), unit)
    return table


def usual_units(dimension: str) -> tuple[str, ...]:
    """Return the unit names of a dimension as people write them, the inner one first."""
    return tuple(_units(dimension))


@cache
def registry() -> pint.UnitRegistry[float]:
    """Return Plateside's own pint registry, built on first use."""
    import pint  # noqa: PLC0415  costs a quarter of a second that most sheets never need

    return pint.UnitRegistry(Path(__file__).with_name("units.txt"), on_redefinition="raise")


def find_unit(word: str, *, dimension: str) -> Unit | None:
    """Return the unit that a word means in a dimension, or None.

    Parameters
    ----------
    word : str
        As typed: ``kW``, ``KW``, ``Mohm``, ``MΩ``, ``r/min``, ``Vac`` …
    dimension : str
        A key of ``calc.quantities.INNER_UNIT``.

    """
    clean = word.translate(_SYMBOLS)
    unit = _table(dimension).get(_key(clean))
    return unit if unit is not None else _by_pint(clean, dimension)


@cache
def _by_pint(word: str, dimension: str) -> Unit | None:
    """Look a rarer unit up with pint; units with an offset are all in the table."""
    inner = INNER_UNIT[dimension]
    if not inner or word[:1] == "M" or not _PINT_WORD.fullmatch(word):
        return None  # MA, MV, MF are milli or micro written carelessly, or nothing that a meter shows
    import pint  # noqa: PLC0415

    try:
        quantity = registry().Quantity(1.0, registry().parse_units(word))
        factor = quantity.to(registry().parse_units(inner)).magnitude
    except (pint.PintError, AttributeError, ValueError, TypeError):
        return None
    return Unit(word, Fraction(repr(float(factor))))


def dimension_of(word: str) -> str | None:
    """Return the dimension that a unit word belongs to, or None where nobody knows it."""
    clean = word.translate(_SYMBOLS)
    for dimension in INNER_UNIT:
        if clean and _key(clean) in _table(dimension):
            return dimension
    return next((d for d in INNER_UNIT if d != "temperature" and _by_pint(clean, d)), None)
