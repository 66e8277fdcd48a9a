"""Insulation at 40 degC, polarisation index and absorption ratio."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

from calc.sheet import CaseSheet, Reading
from calc.temperature import INSULATION_RANGE_C, System, insulation_at_40_c, insulation_system
from rules.derived.base import Derived, numbers_of, over_other, plate, readings_of

PI_UP_TO_OHM: Final = 5.0e9
"""Above this one-minute value the polarisation index may be ignored (IEEE 43, from memory), in ohm."""


def at_40c(sheet: CaseSheet) -> Iterator[Derived]:
    """One-minute insulation at 40 degC; as read where no temperature was noted, in ohm."""
    system = insulation_system(sheet.machine.nameplate.insulation_class)
    for reading in readings_of(sheet, "insulation_resistance"):
        for number in numbers_of(reading):
            yield Derived(_corrected(number, reading, system), reading)


def _corrected(insulation_ohm: float, reading: Reading, system: System | None) -> float:
    """Bring a reading to 40 degC, by the lower of both laws where the plate does not tell the insulation.

    Outside the span in which the laws hold, the nearer end of the span is taken.
    """
    temperature = reading.temperature
    if temperature is None or math.isnan(temperature.number) or insulation_ohm < 0.0:
        return insulation_ohm
    low_c, high_c = INSULATION_RANGE_C
    winding_c = min(max(temperature.number, low_c), high_c)
    at_40_ohm = insulation_at_40_c(insulation_ohm=insulation_ohm, winding_c=winding_c, system=system)
    return insulation_ohm if at_40_ohm is None else at_40_ohm


def over_kv_plus_one(sheet: CaseSheet) -> Iterator[Derived]:
    """Insulation at 40 degC over (kV + 1) Mohm, in %."""
    volt = plate(sheet, "voltage")
    if volt is not None:
        least_ohm = (volt / 1e3 + 1.0) * 1e6
        yield from (Derived(100.0 * one.value / least_ohm, one.reading) for one in at_40c(sheet))


def polarisation_index(sheet: CaseSheet) -> Iterator[Derived]:
    """Ten minutes over one minute; not above 5 Gohm, where it says nothing."""
    minute = sheet.last_reading("insulation_resistance", "isolated")
    if minute is not None and numbers_of(minute) and numbers_of(minute)[0] <= PI_UP_TO_OHM:
        yield from over_other(sheet, "insulation_resistance_10min", "insulation_resistance", "isolated")


def absorption_ratio(sheet: CaseSheet) -> Iterator[Derived]:
    """Sixty seconds over thirty."""
    yield from over_other(sheet, "insulation_resistance", "insulation_resistance_30s", "isolated")
