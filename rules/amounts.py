"""Numbers with a unit in the rule files, such as ``5 Mohm`` or ``2.8 mm/s``, in the inner unit."""

from __future__ import annotations

import math
from functools import lru_cache

from calc.errors import RangeError
from calc.units import dimension_of, find_unit


@lru_cache(maxsize=4096)
def amount(text: str) -> float:
    """Return the number of a text with unit, in the inner unit of its dimension.

    A temperature in ``K`` is a difference, one in ``degC`` a temperature.

    Raises
    ------
    RangeError
        Where the text is no number, the number is not finite, or the unit is not known.

    """
    number, _, word = text.strip().partition(" ")
    try:
        value = float(number)
    except ValueError:
        raise RangeError("number", text, "a number and a unit, such as 5 Mohm") from None
    if not math.isfinite(value):
        raise RangeError("number", text, "finite")
    word = word.strip()
    if word in {"", "K"}:
        return value
    dimension = dimension_of(word)
    unit = find_unit(word, dimension=dimension) if dimension is not None else None
    if unit is None:
        raise RangeError("unit", word, "a unit that case sheets know, such as V, Mohm, mm/s")
    return value * float(unit.factor) + float(unit.offset)


def is_amount(text: str) -> bool:
    """Whether a text is a finite number with a unit that case sheets know, or with none."""
    try:
        amount(text)
    except RangeError:
        return False
    return True
