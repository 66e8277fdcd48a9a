"""Numbers with a unit in the rule files, such as ``5 Mohm`` or ``2.8 mm/s``, in the inner unit."""

from __future__ import annotations

import math
from functools import lru_cache
from typing import Final

from calc.errors import RangeError

# unit -> factor to the inner unit of its dimension (calc.quantities.INNER_UNIT)
_FACTOR: Final = {
    "": 1.0, "%": 1.0, "dB": 1.0, "degC": 1.0, "K": 1.0, "rpm": 1.0, "mm/s": 1.0, "m/s**2": 1.0, "1/h": 1.0,
    "W": 1.0, "kW": 1e3, "MW": 1e6, "V": 1.0, "mV": 1e-3, "kV": 1e3, "A": 1.0, "mA": 1e-3, "Hz": 1.0,
    "ohm": 1.0, "mohm": 1e-3, "kohm": 1e3, "Mohm": 1e6, "Gohm": 1e9, "uF": 1e-6, "F": 1.0,
    "s": 1.0, "min": 60.0, "mm": 1.0, "N": 1.0, "m": 1.0, "hp": 745.69987,
}  # fmt: skip


@lru_cache(maxsize=1024)
def amount(text: str) -> float:
    """Return the number of a text with unit, in the inner unit of its dimension.

    Raises
    ------
    RangeError
        Where the text is no number, the number is not finite, or the unit is not known here.

    """
    number, _, unit = text.strip().partition(" ")
    if unit.strip() not in _FACTOR:
        raise RangeError("unit", unit or text, f"one of {', '.join(sorted(_FACTOR)[1:])}")
    try:
        value = float(number)
    except ValueError:
        raise RangeError("number", text, "a number and a unit, such as 5 Mohm") from None
    if not math.isfinite(value):
        raise RangeError("number", text, "finite")
    return value * _FACTOR[unit.strip()]


def is_amount(text: str) -> bool:
    """Whether a text is a number with a unit that is known here."""
    try:
        amount(text)
    except RangeError:
        return False
    return True
