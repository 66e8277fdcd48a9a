"""What readings say of a plate that cannot be read: frequency, poles, voltage class and rough size.

Only the class of the machine is taken from them (the nearest standard voltage or pole number, the order of
the current), and the spreads stay wide: readings are context here, not evidence.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import msgspec

from calc.sheet import Machine, Nameplate, Reading, Value

# Nominal voltages in common use (IEC 60038 and ANSI C84.1, with their neighbours). [V]
_STANDARD_V = (
    *(110, 208, 220, 230, 240, 380, 400, 415, 440, 460, 480, 500, 525, 575, 600, 660, 690),
    *(2300, 3300, 4160, 6000, 6600, 11000),
)
_SIXTY_HZ_V = frozenset({208, 460, 480, 575, 600, 2300, 4160})
# Rated over read current, by state (common practice).
_RATED_OVER = {"loaded": 1.25, "light_load": 2.0, "no_load": 2.4, "starting": 0.18, "stalled": 0.17}


@dataclass(frozen=True)
class Missing:
    """Which fields of the plate were guessed."""

    voltage: bool
    power: bool
    current: bool
    poles: int | None


def filled(machine: Machine, readings: Sequence[Reading]) -> tuple[Machine, Missing]:
    """Return the machine with what its plate lacks filled in from the class of its readings."""
    plate = machine.nameplate
    nominal = machine.supply.nominal_voltage
    volts = plate.number("voltage") or (nominal.number if nominal else None)
    frequency = plate.number("frequency") or _frequency(machine, readings, volts)
    guess: dict[str, Value] = {}
    if plate.voltage is None:
        guess["voltage"] = _value(volts or _voltage(readings) or 400.0)
    if plate.frequency is None:
        guess["frequency"] = _value(frequency)
    missing = Missing(
        voltage=plate.voltage is None,
        power=plate.power is None,
        current=plate.current is None,
        poles=_poles(plate, readings, frequency),
    )
    if missing.power and missing.current:
        current = _current(readings)
        if current is not None:
            guess["current"] = _value(current)
    if not guess:
        return machine, missing
    return msgspec.structs.replace(machine, nameplate=msgspec.structs.replace(plate, **guess)), missing


def _value(number: float) -> Value:
    return Value(text=f"{number:g}", number=number)


def _mean(reading: Reading) -> float | None:
    numbers = [v.number for v in reading.values if v.is_read]
    return sum(numbers) / len(numbers) if numbers else None


def _frequency(machine: Machine, readings: Sequence[Reading], volts: float | None) -> float:
    nominal = machine.supply.nominal_frequency
    if nominal is not None and nominal.is_read:
        return nominal.number
    for reading in readings:
        mean = _mean(reading) if reading.measure == "supply_frequency" else None
        if mean is not None:
            return 50.0 if abs(mean - 50.0) < abs(mean - 60.0) else 60.0
    speeds = [m for r in readings if r.measure == "speed" and (m := _mean(r)) is not None and m > 50.0]
    speed = machine.nameplate.number("speed") or max(speeds, default=None)
    if speed:
        return min((50.0, 60.0), key=lambda hertz: _slip_at(speed, hertz))
    near = volts or _voltage(readings)
    return 60.0 if near is not None and round(near) in _SIXTY_HZ_V else 50.0


def _slip_at(speed_rpm: float, frequency_hz: float) -> float:
    """Slip of a speed against the nearest synchronous speed above it."""
    pairs = max(int(60.0 * frequency_hz / speed_rpm), 1)
    slip = 1.0 - speed_rpm * pairs / (60.0 * frequency_hz)
    return slip if slip > 0.0 else 1.0


def _voltage(readings: Sequence[Reading]) -> float | None:
    for state in ("no_load", "loaded", "light_load", "standby", "starting"):
        for reading in readings:
            mean = _mean(reading) if reading.key == f"supply_voltage@{state}" else None
            if mean is not None and mean > 60.0:
                return float(min(_STANDARD_V, key=lambda v: abs(v - mean)))
    return None


def _current(readings: Sequence[Reading]) -> float | None:
    for state, factor in _RATED_OVER.items():
        for reading in readings:
            mean = _mean(reading) if reading.key == f"line_current@{state}" else None
            if mean is not None and mean > 0.0:
                return mean * factor
    return None


def _poles(plate: Nameplate, readings: Sequence[Reading], frequency: float) -> int | None:
    """Poles from a running speed where the plate shows neither poles nor speed."""
    if plate.poles is not None or plate.speed is not None:
        return None
    speeds = [m for r in readings if r.measure == "speed" and (m := _mean(r)) is not None and m > 50.0]
    if not speeds:
        return None
    return min(max(2 * int(60.0 * frequency * 1.02 / max(speeds)), 2), 24)
