"""Slip, side bands, temperatures over ambient, and capacitors against their marking."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final

from calc.quantities import MEASURES
from calc.sheet import CaseSheet, Value
from calc.typical import synchronous_speed_rpm
from rules.derived.base import Derived, numbers_of, plate, readings_of

START_TOLERANCE: Final = 1.2
"""A start capacitor that is marked with one value is made to -0 / +20 % (from memory)."""


def poles_of(sheet: CaseSheet) -> int | None:
    """Return the poles on the plate, or those whose synchronous speed is the next above the plate speed."""
    told = plate(sheet, "poles")
    if told is not None:
        return int(told) if told >= 2.0 and told % 2.0 == 0.0 else None
    frequency_hz, speed_rpm = plate(sheet, "frequency"), plate(sheet, "speed")
    if frequency_hz is None or speed_rpm is None:
        return None
    pairs = math.floor(60.0 * frequency_hz / speed_rpm)
    return 2 * pairs if 1 <= pairs <= 50 else None


def slip_over_plate(sheet: CaseSheet) -> Iterator[Derived]:
    """Slip over the slip of the plate, at the frequency that was read; not behind an inverter, in %."""
    poles, frequency_hz, rated_rpm = poles_of(sheet), plate(sheet, "frequency"), plate(sheet, "speed")
    if not poles or not frequency_hz or not rated_rpm or sheet.machine.supply.source == "inverter":
        return
    rated = synchronous_speed_rpm(frequency_hz=frequency_hz, poles=poles) - rated_rpm
    if rated <= 0.0:
        return
    for reading in readings_of(sheet, "speed"):
        read_at = sheet.last_reading("supply_frequency", reading.state)
        at_hz = numbers_of(read_at)[0] if read_at is not None and numbers_of(read_at) else frequency_hz
        for speed_rpm in numbers_of(reading) if 0.0 < at_hz < math.inf else ():
            slip_rpm = synchronous_speed_rpm(frequency_hz=at_hz, poles=poles) - speed_rpm
            yield Derived(100.0 * slip_rpm / rated, reading)


def speed_over_highest(sheet: CaseSheet) -> Iterator[Derived]:
    """Speed over the highest that the plate names, its rated or its maximum speed, in %."""
    highest_rpm = max(plate(sheet, "speed") or 0.0, plate(sheet, "max_speed") or 0.0)
    for reading in readings_of(sheet, "speed") if highest_rpm > 0.0 else ():
        yield from (Derived(100.0 * number / highest_rpm, reading) for number in numbers_of(reading))


def sideband_below_line(sheet: CaseSheet) -> Iterator[Derived]:
    """How far the side band lies below the line, whichever sign was typed, in dB."""
    for reading in readings_of(sheet, "sideband_level"):
        yield from (Derived(abs(number), reading) for number in numbers_of(reading))


def bearing_rise(sheet: CaseSheet) -> Iterator[Derived]:
    """Bearing temperature above the ambient of the same state, in K."""
    for reading in readings_of(sheet, "bearing_temperature"):
        ambient = sheet.last_reading("ambient_temperature", reading.state)
        if ambient is not None and numbers_of(ambient):
            yield from (Derived(n - numbers_of(ambient)[0], reading) for n in numbers_of(reading))


def run_capacitance_over_marked(sheet: CaseSheet) -> Iterator[Derived]:
    """Run capacitance over its marking, in %."""
    yield from _over_marked(sheet, "run_capacitance", plate(sheet, "run_capacitor"))


def start_capacitance_over_lowest(sheet: CaseSheet) -> Iterator[Derived]:
    """Start capacitance over the lowest that its marking allows, in %."""
    yield from _over_marked(sheet, "start_capacitance", plate(sheet, "start_capacitor"))


def start_capacitance_over_highest(sheet: CaseSheet) -> Iterator[Derived]:
    """Start capacitance over the highest that its marking allows: the range's end, or +20 %, in %."""
    marked = sheet.machine.nameplate.start_capacitor
    yield from _over_marked(sheet, "start_capacitance", _highest(marked))


def _highest(marked: Value | None) -> float | None:
    if marked is None or not marked.is_read:
        return None
    return marked.high if marked.high is not None else marked.number * START_TOLERANCE


def _over_marked(sheet: CaseSheet, measure: str, marked: float | None) -> Iterator[Derived]:
    if marked is not None and 0.0 < marked < math.inf:
        for reading in readings_of(sheet, measure):
            yield from (Derived(100.0 * number / marked, reading) for number in numbers_of(reading))


def read_directly(sheet: CaseSheet, measure: str) -> Iterator[Derived]:
    """Every value of a measure as it was read, in its inner unit."""
    if measure in MEASURES:
        for reading in readings_of(sheet, measure):
            yield from (Derived(number, reading) for number in numbers_of(reading))
