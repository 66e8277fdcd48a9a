"""What stands in where a nameplate is silent: voltage class, frequency, poles."""

from __future__ import annotations

import math
from collections.abc import Sequence

from calc.induction_1ph.priors import RUN_VAR_PER_WATT, START_VAR_PER_WATT
from calc.sheet import Nameplate, Reading

RUN_VAR = RUN_VAR_PER_WATT[0]
START_VAR = math.sqrt(math.prod(middle for middle, _ in START_VAR_PER_WATT.values()))
"""Reactive power of a capacitor per watt of output, whatever the design."""


def positive(number: float | None) -> float | None:
    """Return a number where it is finite and above zero, else None."""
    return number if number is not None and math.isfinite(number) and number > 0.0 else None


def ratio(number: float | None) -> float | None:
    """Return a power factor or an efficiency as a ratio, told in per cent or as such."""
    if number is None or not math.isfinite(number):
        return None
    share = number / 100.0 if number > 1.5 else number
    return min(share, 0.999) if share > 0.05 else None


def frequency(speed_rpm: float | None, voltage_v: float | None, readings: Sequence[Reading]) -> float:
    """50 or 60 Hz: as read, else by the synchronous speed just above the speed, else by voltage."""
    read = [r.numbers[0] for r in readings if r.measure == "supply_frequency" and r.values[0].is_read]
    if read:
        return 60.0 if read[-1] > 55.0 else 50.0
    if speed_rpm is not None and speed_rpm > 500.0:
        slips = {f: min(s for s in _slips(f, speed_rpm) if s > -0.003) for f in (50.0, 60.0)}
        return min(slips, key=lambda f: slips[f])
    return 60.0 if voltage_v is not None and voltage_v < 130.0 else 50.0


def _slips(frequency_hz: float, speed_rpm: float) -> list[float]:
    return [1.0 - speed_rpm * poles / (120.0 * frequency_hz) for poles in (2, 4, 6, 8)] + [1.0]


def voltage_class(plate: Nameplate, frequency_hz: float, readings: Sequence[Reading]) -> float:
    """115 V or 230 V: by what was read at the terminals, else by output with run capacitor or current."""
    read = [r.numbers[0] for r in readings if r.measure == "supply_voltage" and r.values[0].is_read]
    live = [v for v in read if 50.0 < v < 1000.0]
    if live:
        return 115.0 if max(live) < (160.0 if frequency_hz > 55.0 else 125.0) else 230.0
    power, current = positive(plate.number("power")), positive(plate.number("current"))
    farad = positive(plate.number("run_capacitor"))
    if power is not None and farad is not None:
        usual = math.sqrt(RUN_VAR * power / (2.0 * math.pi * frequency_hz * farad))
        return 115.0 if usual < math.sqrt(115.0 * 230.0) else 230.0
    if power is not None and current is not None and frequency_hz > 55.0:
        return 115.0 if 230.0 * current / power > 4.2 else 230.0
    return 230.0


def running_speed(readings: Sequence[Reading]) -> float | None:
    """Return the highest speed that was read, r/min; None where none was."""
    read = [r.numbers[0] for r in readings if r.measure == "speed" and r.values[0].is_read]
    turning = [v for v in read if v > 300.0]
    return max(turning) if turning else None


def poles_of(plate: Nameplate, frequency_hz: float, speed_rpm: float | None) -> int:
    """Return the poles: told, or of the synchronous speed just above the speed; 4 where nothing tells."""
    told = plate.number("poles")
    if told is not None and told >= 2.0 and math.isfinite(told):
        return 2 * max(round(told / 2.0), 1)
    if speed_rpm is None or not 100.0 < speed_rpm < 61.0 * frequency_hz:
        return 4
    return 2 * max(math.floor(60.0 * frequency_hz / speed_rpm), 1)
