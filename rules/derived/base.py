"""A derived value, and what the functions that derive it share."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from typing import Final

import msgspec

from calc.sheet import CaseSheet, Reading

OPEN_OHM: Final = 1.0e5
"""A winding that reads more than this is taken as open: ends of multimeter ranges lie above it, in ohm."""


class Derived(msgspec.Struct, frozen=True):
    """One value of a quantity, in the inner unit of its dimension, and the reading that it rests on.

    ``doubt`` is how far the step of the meter alone may have shifted the value.
    """

    value: float
    reading: Reading
    doubt: float = 0.0


Quantity = Callable[[CaseSheet], Iterator[Derived]]


def numbers_of(reading: Reading) -> tuple[float, ...]:
    """Return the values that were read, in the inner unit; ``inf`` is open."""
    return tuple(value.number for value in reading.values if value.is_read and not math.isnan(value.number))


def readings_of(sheet: CaseSheet, *measures: str) -> Iterator[Reading]:
    """Yield the readings of some measures, in the order of the sheet."""
    return (reading for reading in sheet.readings if reading.measure in measures)


def plate(sheet: CaseSheet, field: str) -> float | None:
    """Return a plate field that is a finite number above zero, or None."""
    number = sheet.machine.nameplate.number(field)
    return number if number is not None and 0.0 < number < math.inf else None


def finite_triple(reading: Reading) -> tuple[float, ...] | None:
    """Return the three values where all were read and are finite, with a mean above zero."""
    numbers = numbers_of(reading)
    if len(numbers) != 3 or not all(map(math.isfinite, numbers)) or sum(numbers) <= 0.0:
        return None
    return numbers


def over_plate(sheet: CaseSheet, measure: str, field: str, *, less: float = 0.0) -> Iterator[Derived]:
    """Yield the highest value of each reading over a plate field, in %, less a constant."""
    rated = plate(sheet, field)
    for reading in readings_of(sheet, measure):
        numbers = numbers_of(reading)
        if rated is not None and numbers:
            yield Derived(100.0 * max(numbers) / rated - less, reading)


def over_other(sheet: CaseSheet, measure: str, other: str, state: str) -> Iterator[Derived]:
    """Yield the newest reading of a measure over the newest of another in a state, as a ratio."""
    one, two = sheet.last_reading(measure, state), sheet.last_reading(other, state)
    if one is None or two is None or not numbers_of(one) or not numbers_of(two):
        return
    if 0.0 < numbers_of(two)[0] < math.inf:
        yield Derived(numbers_of(one)[0] / numbers_of(two)[0], one)
