"""Values that cannot be, or that are far likelier a slip of the pen than the truth.

What a plate contradicts in itself is a remark (``calc.nameplate``); here are the
values that are refused or asked about before anything is computed from them.
"""

from __future__ import annotations

import math
import re
from functools import cache
from typing import Final

from calc.errors import clip
from calc.fields import Fields
from calc.lookup import table
from calc.plate_checks import limit
from calc.quantities import DC_KINDS, MEASURES
from calc.sheet import Machine, Nameplate, Rating, Reading, Supply, Value
from calc.typical import synchronous_speed_rpm
from calc.values import parse_value
from calc.vocabulary import CHECKED, PLATE_DIMENSION, SUPPLY_DIMENSION

_INDUCTION: Final = frozenset({"induction_3ph", "induction_1ph", "induction_wound_rotor"})
# measure -> plate field that bounds it
_RATED_BY: Final = {
    "supply_voltage": "voltage", "incoming_voltage": "voltage", "voltage_to_earth": "voltage",
    "armature_voltage": "voltage", "open_circuit_voltage": "voltage", "field_voltage": "field_voltage",
    "line_current": "current", "armature_current": "current", "drive_current": "current",
    "field_current": "field_current", "speed": "speed",
}  # fmt: skip
_STARTING: Final = frozenset({"starting", "stalled", "standby"})


@cache
def plate_limits() -> dict[str, tuple[Value, Value]]:
    """Return the lowest and highest value of each plate field."""
    found: dict[str, tuple[Value, Value]] = {}
    for name, span in table("plate_limits").items():
        low, high = span if isinstance(span, list) else (span, span)
        dimension = (PLATE_DIMENSION | SUPPLY_DIMENSION)[name]
        found[name] = parse_value(str(low), dimension=dimension), parse_value(str(high), dimension=dimension)
    return found


@cache
def _reading_limit(name: str) -> float:
    return float(str(table("reading_limits")[name]))


def far_off_times() -> float:
    """Return how many times its band a reading may be before a slip of the unit is likelier."""
    return _reading_limit("times_expected")


@cache
def _highest(section: str, measure: str) -> Value | None:
    listed = table("reading_limits")[section]
    text = listed.get(measure) if isinstance(listed, dict) else None
    return None if text is None else parse_value(str(text), dimension=MEASURES[measure].dimension)


def check_limits(fields: Fields, part: Nameplate | Rating | Supply) -> None:
    """Note values that no plate or supply has, each with what it can have."""
    for name, (low, high) in plate_limits().items():
        value = getattr(part, name, None)
        if value is not None and not low.number <= value.number <= high.number:
            fields.wrong(name, clip(value.text), f"{low.text} to {high.text} is possible here")


def check_plate_values(fields: Fields, plate: Nameplate, kind: str) -> None:
    """Note plate values that no plate can show, each with the reason."""
    check_limits(fields, plate)
    if plate.poles is not None and plate.poles.number % 2:
        fields.wrong("poles", plate.poles.text, "2, 4, 6, … (a pole pair counts as two)")
    if kind in _INDUCTION:
        _check_speed(fields, plate)


def _check_speed(fields: Fields, plate: Nameplate) -> None:
    speed, frequency = plate.number("speed"), plate.number("frequency")
    if speed is None or plate.speed is None or not plate_limits()["speed"][0].number <= speed:
        return
    highest = synchronous_speed_rpm(frequency_hz=frequency or 60.0, poles=2)
    if frequency is not None and not 10.0 <= frequency <= 1000.0:
        return
    if speed > limit("times_two_pole_speed") * highest:
        at = (
            f"at {frequency:g} Hz" if frequency else "at 50 or 60 Hz (give the frequency where it is another)"
        )
        fields.wrong(
            "speed", clip(plate.speed.text), f"no induction motor turns faster than {highest:g} rpm {at}"
        )


def check_reading(fields: Fields, reading: Reading, machine: Machine) -> None:
    """Note readings that cannot be, unless their note says that they were checked."""
    measure = MEASURES[reading.measure]
    if any(value.kind == "range" for value in reading.values):
        fields.wrong("value", clip(reading.values[0].text), f"one {measure.label}, not a range")
    if (
        measure.dimension == "resistance"
        and reading.measure != "thermistor_resistance"
        and reading.state != "isolated"
    ):
        fields.wrong("state", reading.state, f"isolated: {measure.label} is never read on a live machine")
    highest = _highest("never_above", measure.id)
    if highest is not None and any(
        value.number > highest.number for value in reading.values if value.is_read
    ):
        allowed = (
            "a level below the line, such as -38 dB"
            if measure.dimension == "level"
            else f"at most {highest.text}"
        )
        fields.wrong("value", clip(reading.values[0].text), allowed)
        return
    if reading.note and re.search(rf"\b{CHECKED}\b", reading.note, re.IGNORECASE):
        return
    for index, value in enumerate(reading.values):
        if value.is_read and (why := _doubt(reading, value, machine)):
            step = index if len(reading.values) > 1 else None
            fields.wrong("value", clip(value.text), f"{why}; if it is so, add note: {CHECKED}", step=step)


def _doubt(reading: Reading, value: Value, machine: Machine) -> str:
    """Return why a value is doubted, or nothing."""
    measure = MEASURES[reading.measure]
    highest = _highest("asked_above", measure.id)
    if measure.usual_unit == "Mohm" and value.unit == "mohm" and math.isfinite(value.number):
        return "mohm is a thousandth of an ohm; insulation is read in Mohm"
    if highest is not None and value.number > highest.number:
        return f"at most {highest.text} is read"
    rated = _rated(measure.id, machine)
    if rated is None:
        return ""
    times = _times(measure.id, measure.dimension, reading.state)
    if value.number > times * rated.number:
        return f"more than {times:g} times the {rated.text} that the machine is for"
    return _too_fast(value, machine) if measure.id == "speed" else ""


def _rated(measure: str, machine: Machine) -> Value | None:
    """Return the plate value that bounds a reading: for voltages the highest that plate or site name."""
    field = _RATED_BY.get(measure)
    if field is None:
        return None
    plate = machine.nameplate
    candidates = [getattr(plate, field)]
    if field in {"voltage", "current"}:
        candidates += [getattr(rating, field) for rating in plate.ratings]
    if field == "voltage":
        candidates.append(machine.supply.nominal_voltage)
    if field == "speed":
        candidates.append(plate.max_speed)
    known = [value for value in candidates if value is not None and value.number > 0.0]
    return max(known, key=lambda value: value.number, default=None)


def _times(measure: str, dimension: str, state: str) -> float:
    if dimension != "current":
        return _reading_limit(f"times_rated_{dimension}")
    if state not in _STARTING:
        return _reading_limit("times_rated_current_running")
    armature = measure == "armature_current"
    return _reading_limit(f"times_rated_{'armature_' if armature else ''}current_starting")


def _too_fast(value: Value, machine: Machine) -> str:
    """Return why an induction motor on the mains cannot turn so fast."""
    on_inverter = "inverter" in {machine.starter, machine.supply.source}
    if machine.kind in DC_KINDS or machine.kind not in _INDUCTION or on_inverter:
        return ""
    frequency = max(60.0, machine.nameplate.number("frequency") or 0.0)
    highest = _reading_limit("times_two_pole_speed") * synchronous_speed_rpm(frequency_hz=frequency, poles=2)
    return (
        f"no induction motor turns faster than {highest:.0f} rpm at {frequency:g} Hz"
        if value.number > highest
        else ""
    )
