"""Insulation at 40 degC, polarisation index and absorption ratio."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

from calc.sheet import CaseSheet, Reading
from rules.derived.base import Derived, numbers_of, over_other, plate, readings_of

PI_UP_TO_OHM: Final = 5.0e9
"""Above this one-minute value the polarisation index may be ignored (IEEE 43, from memory), in ohm."""


def at_40c(sheet: CaseSheet) -> Iterator[Derived]:
    """One-minute insulation at 40 degC by the lower of both laws; as read without a temperature, in ohm."""
    for reading in readings_of(sheet, "insulation_resistance"):
        factor = factor_to_40c(reading)
        yield from (Derived(number * factor, reading) for number in numbers_of(reading))


def over_kv_plus_one(sheet: CaseSheet) -> Iterator[Derived]:
    """Insulation at 40 degC over (kV + 1) Mohm, in %."""
    volt = plate(sheet, "voltage")
    if volt is not None:
        least_ohm = (volt / 1e3 + 1.0) * 1e6
        yield from (Derived(100.0 * one.value / least_ohm, one.reading) for one in at_40c(sheet))


def factor_to_40c(reading: Reading) -> float:
    """Return the factor from the noted temperature to 40 degC, the lower of both laws."""
    temperature = reading.temperature
    if temperature is None or not temperature.is_read or not -40.0 <= temperature.number <= 200.0:
        return 1.0
    t_c = temperature.number
    older = math.pow(0.5, (40.0 - t_c) / 10.0)
    slope = 4230.0 if t_c >= 40.0 else 1245.0
    thermoset = math.exp(-slope * (1.0 / (t_c + 273.0) - 1.0 / 313.0))
    return min(older, thermoset)


def polarisation_index(sheet: CaseSheet) -> Iterator[Derived]:
    """Ten minutes over one minute; not above 5 Gohm, where it says nothing."""
    minute = sheet.last_reading("insulation_resistance", "isolated")
    if minute is not None and numbers_of(minute) and numbers_of(minute)[0] <= PI_UP_TO_OHM:
        yield from over_other(sheet, "insulation_resistance_10min", "insulation_resistance", "isolated")


def absorption_ratio(sheet: CaseSheet) -> Iterator[Derived]:
    """Sixty seconds over thirty."""
    yield from over_other(sheet, "insulation_resistance", "insulation_resistance_30s", "isolated")
