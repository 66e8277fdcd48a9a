"""Unbalances, levels against the plate, and windings."""

from __future__ import annotations

from collections.abc import Iterator

from calc.quantities import DC_KINDS
from calc.sheet import CaseSheet
from rules.derived.base import (
    OPEN_OHM,
    Derived,
    Quantity,
    finite_triple,
    numbers_of,
    over_other,
    over_plate,
    plate,
    readings_of,
)


def unbalance(*measures: str) -> Quantity:
    """Return the quantity "largest deviation from the mean over the mean", in %.

    NEMA MG 1 defines it on line-to-line voltages; it serves for all triples. The step of
    the meter can shift one value against the mean of three by 4/3 of half a step.
    """

    def quantity(sheet: CaseSheet) -> Iterator[Derived]:
        for reading in readings_of(sheet, *measures):
            numbers = finite_triple(reading)
            if numbers is not None:
                mean = sum(numbers) / 3.0
                spread = max(abs(number - mean) for number in numbers)
                step = max(value.resolution for value in reading.values)
                yield Derived(100.0 * spread / mean, reading, 100.0 * (2.0 / 3.0) * step / mean)

    return quantity


def lowest_of(measure: str) -> Quantity:
    """Return the quantity "lowest of three over their mean", in %."""

    def quantity(sheet: CaseSheet) -> Iterator[Derived]:
        for reading in readings_of(sheet, measure):
            numbers = finite_triple(reading)
            if numbers is not None:
                yield Derived(300.0 * min(numbers) / sum(numbers), reading)

    return quantity


def open_windings(sheet: CaseSheet) -> Iterator[Derived]:
    """How many values of a winding reading are open."""
    for reading in readings_of(sheet, "winding_resistance", "phase_resistance"):
        if numbers := numbers_of(reading):
            yield Derived(float(sum(number >= OPEN_OHM for number in numbers)), reading)


def winding_per_unit(sheet: CaseSheet) -> Iterator[Derived]:
    """Half the lowest terminal resistance over V/(sqrt(3) I) of the plate, in %."""
    volt, ampere = plate(sheet, "voltage"), plate(sheet, "current")
    if volt is None or ampere is None:
        return
    base_ohm = volt / (3.0**0.5 * ampere)
    for reading in readings_of(sheet, "winding_resistance"):
        numbers = [number for number in numbers_of(reading) if number < OPEN_OHM]
        if numbers:
            step = max(value.resolution for value in reading.values)
            yield Derived(50.0 * min(numbers) / base_ohm, reading, 50.0 * step / base_ohm)


def auxiliary_over_main(sheet: CaseSheet) -> Iterator[Derived]:
    """Auxiliary over main winding resistance, in %."""
    for one in over_other(sheet, "auxiliary_resistance", "main_resistance", "isolated"):
        yield Derived(100.0 * one.value, one.reading)


def voltage_deviation(sheet: CaseSheet) -> Iterator[Derived]:
    """Mean supply voltage over the plate's, less one; not behind an inverter or soft starter, in %."""
    rated = plate(sheet, "voltage")
    if rated is None or sheet.machine.supply.source in {"inverter", "soft_starter"}:
        return
    for reading in readings_of(sheet, "supply_voltage"):
        numbers = numbers_of(reading)
        if numbers and len(numbers) == len(reading.values):
            yield Derived(100.0 * (sum(numbers) / len(numbers) / rated - 1.0), reading)


def armature_voltage_deviation(sheet: CaseSheet) -> Iterator[Derived]:
    """Armature voltage over the plate's, less one, in %."""
    yield from over_plate(sheet, "armature_voltage", "voltage", less=100.0)


def frequency_deviation(sheet: CaseSheet) -> Iterator[Derived]:
    """Supply frequency over the plate's, less one; not behind an inverter, in %."""
    if sheet.machine.supply.source != "inverter":
        yield from over_plate(sheet, "supply_frequency", "frequency", less=100.0)


def voltage_and_frequency_deviation(sheet: CaseSheet) -> Iterator[Derived]:
    """Deviations of voltage and frequency of one state, added without sign, in %."""
    by_state = {one.reading.state: one.value for one in frequency_deviation(sheet)}
    for one in voltage_deviation(sheet):
        if one.reading.state in by_state:
            yield Derived(abs(one.value) + abs(by_state[one.reading.state]), one.reading)


def current_over_rated(sheet: CaseSheet) -> Iterator[Derived]:
    """Highest current over plate current times service factor, in %."""
    measure = "armature_current" if sheet.machine.kind in DC_KINDS else "line_current"
    factor = plate(sheet, "service_factor") or 1.0
    for one in over_plate(sheet, measure, "current"):
        yield Derived(one.value / max(factor, 1.0), one.reading)


def field_resistance_over_plate(sheet: CaseSheet) -> Iterator[Derived]:
    """Field resistance over field voltage divided by field current of the plate, in %."""
    volt, ampere = plate(sheet, "field_voltage"), plate(sheet, "field_current")
    if volt is not None and ampere is not None:
        for reading in readings_of(sheet, "field_resistance"):
            yield from (Derived(100.0 * n * ampere / volt, reading) for n in numbers_of(reading))


def field_voltage_over_plate(sheet: CaseSheet) -> Iterator[Derived]:
    """Voltage at the field terminals over the plate's, or over the armature's of a shunt field, in %."""
    own = sheet.machine.kind == "dc_separately_excited" or plate(sheet, "field_voltage") is not None
    yield from over_plate(sheet, "field_voltage", "field_voltage" if own else "voltage")


def ripple_share(sheet: CaseSheet) -> Iterator[Derived]:
    """AC component over armature voltage, in one state, in %."""
    for state in ("no_load", "light_load", "loaded"):
        for one in over_other(sheet, "ripple_voltage", "armature_voltage", state):
            yield Derived(100.0 * one.value, one.reading)
