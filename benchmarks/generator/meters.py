"""What meters show: their gain, their scatter, the steps of their display."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from benchmarks.generator.circuit import OPEN_OHM, terminal_ohms
from benchmarks.generator.design import Motor
from benchmarks.generator.running import Operation, Point, copper, volts_at
from benchmarks.generator.trouble import Site, Trouble

Random = np.random.Generator
Plain = dict[str, Any]


@dataclass(frozen=True)
class Meters:
    """One technician's bag; gains stay the same for the whole case."""

    clamp_gain: float
    clamp_digits: int
    volt_gain: float
    ohm_gain: float
    four_wire: bool
    leads_ohm: float
    megger_gain: float
    megger_end_ohm: float
    tacho_gain: float
    power_gain: float
    heat_off_c: float
    vibration_gain: float
    volts_at: str
    ohms_from: str


def draw_meters(motor: Motor, random: Random) -> Meters:
    """Draw a bag; low resistances are nearly always read with four wires."""
    ohm = 2 * motor.winding.stator_ohm / (3 if motor.rated.is_delta else 1)
    return Meters(
        clamp_gain=1 + random.normal(0, 0.010),
        clamp_digits=int(random.choice([3, 4])),
        volt_gain=1 + random.normal(0, 0.005),
        ohm_gain=1 + random.normal(0, 0.004),
        four_wire=bool(random.random() < (0.92 if ohm < 3 else 0.55)),
        leads_ohm=float(random.choice([0.0, 0.1, 0.15, 0.25])),
        megger_gain=float(np.exp(random.normal(0, 0.08))),
        megger_end_ohm=float(random.choice([2e9, 4e9, 10e9, 20e9, 200e9])),
        tacho_gain=1 + random.normal(0, 0.0003),
        power_gain=1 + random.normal(0, 0.012),
        heat_off_c=random.normal(0, 1.5),
        vibration_gain=float(np.exp(random.normal(0, 0.06))),
        volts_at=str(random.choice(["motor", "starter"])),
        ohms_from=str(random.choice(["motor", "motor", "starter"])),
    )


def read_everything(
    motor: Motor, site: Site, trouble: Trouble, operation: Operation, meters: Meters, random: Random
) -> dict[str, Plain]:
    """Take every reading that can be had."""
    found = [*_at_rest(motor, site, trouble, operation, meters, random)]
    for state, point in operation.points.items():
        found += _energised(motor, site, trouble, operation, meters, random, state, point)
    return {f"{reading['measure']}@{reading['state']}": reading for reading in found}


def digits(number: float, count: int, *, least: float = 0.0) -> str:
    """Return a number with so many digits, steps no finer than ``least``."""
    if not number > 0:
        return "0.00" if least < 0.1 else "0.0"
    places = max(0, count - 1 - int(np.floor(np.log10(number))))
    if least:
        places = min(places, max(0, round(-np.log10(least))))
    step = 10.0 ** (count - 1 - int(np.floor(np.log10(number)))) if places == 0 else 10.0**places
    return f"{round(number * step) / step:.{places}f}"


def _reading(measure: str, state: str, value: str | list[str], **more: str) -> Plain:
    return {"measure": measure, "state": state, "value": value, **more}


def _at_rest(
    motor: Motor, site: Site, trouble: Trouble, operation: Operation, meters: Meters, random: Random
) -> list[Plain]:
    lag = abs(random.normal(0, 5)) if random.random() < 0.3 else abs(random.normal(0, 1.0))
    noted = site.ambient_c + (0 if random.random() < 0.5 else random.uniform(0, 12))
    cold = copper(noted + lag, motor)
    ohms = terminal_ohms(motor.winding, operation.wound, operation.feeder, cold=cold)
    if meters.ohms_from == "starter":
        cable, after = operation.feeder.cable_ohm.real, np.array(operation.feeder.after_ohm)
        ohms = ohms + 2 * cable + after + np.roll(after, -1)
    insulation = site.insulation_ohm * 0.5 ** ((noted - 40) / 12)
    if trouble.insulation_ohm is not None:
        insulation = 1 / (1 / trouble.insulation_ohm + 1 / max(insulation, 1e9))
    polarisation = trouble.polarisation or site.polarisation
    volts = "500 V" if motor.rated.volts < 700 else "2500 V" if motor.rated.volts < 5000 else "5000 V"
    heat = f"{noted + random.normal(0, 0.7):.0f} degC"
    more = {"test_voltage": volts, "temperature": heat}
    return [
        _reading("winding_resistance", "isolated", [_ohm(x, meters, random) for x in ohms], temperature=heat),
        _reading("insulation_resistance", "isolated", _mohm(insulation, meters, random), **more),
        _reading(
            "insulation_resistance_10min",
            "isolated",
            _mohm(insulation * polarisation, meters, random),
            **more,
        ),
        _reading("ambient_temperature", "isolated", _celsius(site.ambient_c, random)),
    ]


def _ohm(ohm: float, meters: Meters, random: Random) -> str:
    if ohm > 0.02 * OPEN_OHM:
        return "20 Mohm"
    if meters.four_wire:
        return f"{digits(ohm * meters.ohm_gain * np.exp(random.normal(0, 0.0012)), 4)} ohm"
    shown = (
        ohm * meters.ohm_gain * np.exp(random.normal(0, 0.002))
        + meters.leads_ohm
        + abs(random.normal(0, 0.03))
    )
    return f"{digits(shown, 4, least=0.1)} ohm"


def _mohm(ohm: float, meters: Meters, random: Random) -> str:
    shown = ohm * meters.megger_gain * np.exp(random.normal(0, 0.05))
    if shown >= meters.megger_end_ohm:
        return f">{meters.megger_end_ohm / 1e9:g} Gohm"
    return f"{digits(shown / 1e6, 2 if shown > 1e7 else 3, least=0.01)} Mohm"


def _celsius(celsius: float, random: Random, sd: float = 1.0) -> str:
    return f"{celsius + random.normal(0, sd):.0f} degC"


def _volts(true: np.ndarray, meters: Meters, random: Random) -> list[str]:
    noisy = true * meters.volt_gain * np.exp(random.normal(0, 0.0013, 3))
    return [f"{x:.1f} V" if x < 1000 else f"{x:.0f} V" for x in noisy]


def _amps(true: np.ndarray, meters: Meters, random: Random, common: float, each: float) -> list[str]:
    noisy = true * meters.clamp_gain * np.exp(random.normal(0, common) + random.normal(0, each, 3))
    noisy = noisy + np.abs(random.normal(0, 0.01, 3))
    return [f"{digits(x, meters.clamp_digits, least=0.01)} A" for x in noisy]


def _energised(
    motor: Motor,
    site: Site,
    trouble: Trouble,
    operation: Operation,
    meters: Meters,
    random: Random,
    state: str,
    point: Point,
) -> list[Plain]:
    inrush = state in {"starting", "stalled"}
    where = {"at": meters.volts_at} if random.random() < 0.8 else {}
    true = np.abs(point.flow.line_a[0])
    amps = _amps(
        true,
        meters,
        random,
        0.06 if state == "starting" else 0.02 if inrush else 0.012,
        0.025 if inrush else 0.007,
    )
    found = [
        _reading("supply_voltage", state, _volts(volts_at(point, meters.volts_at), meters, random), **where),
        _reading("line_current", state, amps),
    ]
    if operation.mode != "dead":
        found.append(
            _reading("supply_frequency", state, f"{operation.hertz + random.normal(0, 0.02):.2f} Hz")
        )
    if state == "starting" and operation.starting_s is not None:
        seconds = operation.starting_s * np.exp(random.normal(0, 0.12))
        found.append(_reading("starting_time", state, f"{max(seconds, 0.1):.1f} s"))
    if state == "stalled" and operation.mode != "dead":
        found.append(_power(point, state, meters, random))
    return (
        found if inrush else found + _turning(motor, site, trouble, operation, meters, random, state, point)
    )


def _power(point: Point, state: str, meters: Meters, random: Random) -> Plain:
    watt = (
        point.flow.power_w(3 if meters.volts_at == "starter" else 6)[0]
        * meters.power_gain
        * np.exp(random.normal(0, 0.01))
    )
    kilo = abs(watt) >= 1000
    return _reading(
        "input_power", state, f"{digits(watt / (1000 if kilo else 1), 3)} {'kW' if kilo else 'W'}"
    )


def _turning(
    motor: Motor,
    site: Site,
    trouble: Trouble,
    operation: Operation,
    meters: Meters,
    random: Random,
    state: str,
    point: Point,
) -> list[Plain]:
    sync = 120 * operation.hertz / motor.rated.poles
    shaking = vibration(motor, trouble, state) * meters.vibration_gain * np.exp(random.normal(0, 0.08))
    rpm = sync * (1 - point.slip) * meters.tacho_gain + random.normal(0, 0.4)
    found = [
        _reading("speed", state, f"{rpm:.0f} rpm"),
        _power(point, state, meters, random),
        _reading("vibration_velocity", state, f"{shaking:.1f} mm/s"),
        _reading("sideband_level", state, f"{_sideband(motor, trouble, point, random):.0f} dB"),
    ]
    if state == "loaded":
        off = meters.heat_off_c
        found += [
            _reading("frame_temperature", state, _celsius(point.frame_c + off, random, 3.0)),
            _reading("ambient_temperature", state, _celsius(site.ambient_c, random)),
            _reading("bearing_temperature", state, _celsius(point.bearing_c + off, random, 3.0)),
        ]
    return found


def vibration(motor: Motor, trouble: Trouble, state: str) -> float:
    """Return the overall velocity. [mm/s]"""
    if state == "loaded":
        return motor.vibration_mms * trouble.vibration
    return 0.9 * motor.vibration_mms * trouble.vibration_uncoupled


def _sideband(motor: Motor, trouble: Trouble, point: Point, random: Random) -> float:
    """Return the lower sideband: a broken cage by its share of bars, less at light load, over the floor. [dB]

    Half of the share of broken bars in the line current at rated load (rule of thumb, from memory).
    """
    loading = min(point.slip / motor.rated.slip, 1.3)
    floor = 10 ** ((-60 + random.normal(0, 4)) / 20)
    cage = 0.5 * trouble.bars * (0.15 + 0.85 * loading)
    return float(20 * np.log10(np.hypot(floor, cage)) + random.normal(0, 1.0))
