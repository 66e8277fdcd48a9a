"""Quantities that limits judge and that follow from readings and plate, by name.

Each function takes a sheet and yields one :class:`Derived` per reading that it rests on.
Where an input is missing it yields nothing: a limit without its inputs is silent.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from typing import Final

import msgspec

from calc.quantities import DC_KINDS, MEASURES, RUNNING_STATES
from calc.sheet import CaseSheet, Reading

LEAST_SLIP_POLES: Final = tuple(range(2, 26, 2))


class Derived(msgspec.Struct, frozen=True):
    """One value of a quantity, in the inner unit of its dimension, and the reading that it rests on.

    ``doubt`` is how far the step of the meter alone may have shifted the value.
    """

    value: float
    reading: Reading
    doubt: float = 0.0


Quantity = Callable[[CaseSheet], Iterator[Derived]]


def derived(sheet: CaseSheet, quantity: str) -> tuple[Derived, ...]:
    """Return every value of a quantity that a sheet holds: of a measure itself, or derived.

    Unknown quantities have no value. Numbers that are nan are left out.
    """
    if quantity in QUANTITIES:
        found = QUANTITIES[quantity](sheet)
    elif quantity in MEASURES:
        found = _read(sheet, quantity)
    else:
        return ()
    return tuple(one for one in found if not math.isnan(one.value))


def numbers_of(reading: Reading) -> tuple[float, ...]:
    """Return the values that were read, in the inner unit."""
    return tuple(value.number for value in reading.values if value.is_read and not math.isnan(value.number))


def _read(sheet: CaseSheet, measure: str) -> Iterator[Derived]:
    for reading in sheet.readings:
        if reading.measure == measure:
            yield from (Derived(number, reading) for number in numbers_of(reading))


def _readings(sheet: CaseSheet, *measures: str) -> Iterator[Reading]:
    for reading in sheet.readings:
        if reading.measure in measures:
            yield reading


def _unbalance(*measures: str) -> Quantity:
    """Largest deviation from the mean over the mean, in %: NEMA MG 1 for line voltages, used for all triples.

    The step of the meter can shift one value against the mean of three by 4/3 of half a step.
    """

    def quantity(sheet: CaseSheet) -> Iterator[Derived]:
        for reading in _readings(sheet, *measures):
            numbers = numbers_of(reading)
            if len(numbers) != 3 or not all(map(math.isfinite, numbers)):
                continue
            mean = sum(numbers) / 3.0
            if mean <= 0.0:
                continue
            spread = max(abs(number - mean) for number in numbers)
            step = max(value.resolution for value in reading.values)
            yield Derived(100.0 * spread / mean, reading, 100.0 * (2.0 / 3.0) * step / mean)

    return quantity


def _lowest_line(sheet: CaseSheet) -> Iterator[Derived]:
    """Lowest line current over the mean of the three, in %."""
    for reading in _readings(sheet, "line_current"):
        numbers = numbers_of(reading)
        if len(numbers) == 3 and sum(numbers) > 0.0:
            yield Derived(300.0 * min(numbers) / sum(numbers), reading)


def _open_winding(*measures: str) -> Quantity:
    """How many of the values read open: the count."""

    def quantity(sheet: CaseSheet) -> Iterator[Derived]:
        for reading in _readings(sheet, *measures):
            values = [value for value in reading.values if value.is_read]
            if values:
                yield Derived(float(sum(_is_open(reading, value.number) for value in values)), reading)

    return quantity


OPEN_OHM: Final = 1.0e5
"""A winding that reads more than this is taken as open: ends of multimeter ranges lie above it."""


def _is_open(reading: Reading, number: float) -> bool:
    return number >= OPEN_OHM


def _winding_per_unit(sheet: CaseSheet) -> Iterator[Derived]:
    """Half the lowest terminal resistance over V/(sqrt(3) I), in %: the winding against the plate."""
    volt, ampere = sheet.machine.nameplate.number("voltage"), sheet.machine.nameplate.number("current")
    if not volt or not ampere or volt <= 0.0 or ampere <= 0.0:
        return
    base_ohm = volt / (math.sqrt(3.0) * ampere)
    for reading in _readings(sheet, "winding_resistance"):
        numbers = [number for number in numbers_of(reading) if number < OPEN_OHM]
        if numbers:
            yield Derived(50.0 * min(numbers) / base_ohm, reading)


def _index(long: str, short: str) -> Quantity:
    """Divide a later insulation reading by an earlier one, the newest of each."""

    def quantity(sheet: CaseSheet) -> Iterator[Derived]:
        later, earlier = sheet.last_reading(long, "isolated"), sheet.last_reading(short, "isolated")
        if later is None or earlier is None or not later.values or not earlier.values:
            return
        if earlier.values[0].kind == "exact" and earlier.values[0].number > 0.0:
            yield Derived(later.values[0].number / earlier.values[0].number, later)

    return quantity


def _insulation_at_40c(sheet: CaseSheet) -> Iterator[Derived]:
    """One-minute insulation at 40 degC, the lower of both laws; as read where no temperature was noted."""
    for reading in _readings(sheet, "insulation_resistance"):
        for number in numbers_of(reading):
            yield Derived(number * _factor_to_40c(reading), reading)


def _factor_to_40c(reading: Reading) -> float:
    temperature = reading.temperature
    if temperature is None or not temperature.is_read or not -40.0 <= temperature.number <= 200.0:
        return 1.0
    t_c = temperature.number
    older = math.pow(0.5, (40.0 - t_c) / 10.0)
    slope = 4230.0 if t_c >= 40.0 else 1245.0
    thermoset = math.exp(-slope * (1.0 / (t_c + 273.0) - 1.0 / 313.0))
    return min(older, thermoset)


def _voltage_deviation(sheet: CaseSheet) -> Iterator[Derived]:
    """Mean supply voltage over the plate's, less one, in %."""
    rated = sheet.machine.nameplate.number("voltage")
    if not rated or rated <= 0.0 or sheet.machine.supply.source in {"inverter", "soft_starter"}:
        return
    for reading in _readings(sheet, "supply_voltage"):
        numbers = numbers_of(reading)
        if numbers and len(numbers) == len(reading.values):
            yield Derived(100.0 * (sum(numbers) / len(numbers) / rated - 1.0), reading)


def _armature_voltage_deviation(sheet: CaseSheet) -> Iterator[Derived]:
    """Armature voltage over the plate's, less one, in %."""
    yield from _over_plate(sheet, ("armature_voltage",), "voltage", less=100.0)


def _frequency_deviation(sheet: CaseSheet) -> Iterator[Derived]:
    """Supply frequency over the plate's, less one, in %."""
    if sheet.machine.supply.source != "inverter":
        yield from _over_plate(sheet, ("supply_frequency",), "frequency", less=100.0)


def _current_over_rated(sheet: CaseSheet) -> Iterator[Derived]:
    """Highest running current over plate current times service factor, in %."""
    measure = "armature_current" if sheet.machine.kind in DC_KINDS else "line_current"
    factor = sheet.machine.nameplate.number("service_factor") or 1.0
    for one in _over_plate(sheet, (measure,), "current"):
        if one.reading.state in RUNNING_STATES:
            yield Derived(one.value / max(factor, 1.0), one.reading)


def _over_plate(
    sheet: CaseSheet, measures: tuple[str, ...], field: str, *, less: float = 0.0
) -> Iterator[Derived]:
    """Highest value of a reading over a plate field, in %, less a constant."""
    rated = sheet.machine.nameplate.number(field)
    if not rated or not math.isfinite(rated) or rated <= 0.0:
        return
    for reading in _readings(sheet, *measures):
        if numbers := numbers_of(reading):
            yield Derived(100.0 * max(numbers) / rated - less, reading)


def _plate_ratio(measure: str, field: str) -> Quantity:
    """Divide a reading by a plate field, in %."""
    return lambda sheet: _over_plate(sheet, (measure,), field)


QUANTITIES: Final[dict[str, Quantity]] = {
    "voltage_unbalance": _unbalance("supply_voltage", "incoming_voltage"),
    "current_unbalance": _unbalance("line_current"),
    "winding_unbalance": _unbalance("winding_resistance", "phase_resistance"),
    "lowest_line_current": _lowest_line,
    "open_windings": _open_winding("winding_resistance", "phase_resistance"),
    "winding_per_unit": _winding_per_unit,
    "insulation_at_40c": _insulation_at_40c,
    "polarisation_index": _index("insulation_resistance_10min", "insulation_resistance"),
    "absorption_ratio": _index("insulation_resistance", "insulation_resistance_30s"),
    "voltage_deviation": _voltage_deviation,
    "armature_voltage_deviation": _armature_voltage_deviation,
    "frequency_deviation": _frequency_deviation,
    "current_over_rated": _current_over_rated,
    "speed_over_maximum": _plate_ratio("speed", "max_speed"),
    "field_current_over_plate": _plate_ratio("field_current", "field_current"),
    "overload_setting_over_plate": _plate_ratio("overload_setting", "current"),
}
