"""What the nameplate of a single-phase motor says, and what stands in where it is silent."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from calc.sheet import Machine, Nameplate, Reading, Value

SPLIT_PHASE = "split_phase"
CAPACITOR_START = "capacitor_start"
CAPACITOR_RUN = "capacitor_run"
CAPACITOR_START_RUN = "capacitor_start_run"
DESIGNS = (SPLIT_PHASE, CAPACITOR_START, CAPACITOR_RUN, CAPACITOR_START_RUN)
HAS_RUN_CAPACITOR = frozenset({CAPACITOR_RUN, CAPACITOR_START_RUN})
HAS_START_CAPACITOR = frozenset({CAPACITOR_START, CAPACITOR_START_RUN})

# Input volt-amperes per watt of output at rated load and 500 W, its spread in the logarithm, and the
# exponents with which it goes with output and poles. Common practice; NEC Table 430.248 currents give
# 1.6 to 4.1 from 5 hp down to 1/6 hp.
VOLT_AMPERES_PER_WATT = {
    SPLIT_PHASE: (2.75, 0.18, -0.14, 0.12),
    CAPACITOR_START: (2.5, 0.14, -0.17, 0.15),
    CAPACITOR_RUN: (1.48, 0.10, -0.04, 0.0),
    CAPACITOR_START_RUN: (1.38, 0.10, 0.0, 0.0),
}


def volt_amperes_per_watt(design: str, *, power_w: float, poles: int) -> float:
    """Input volt-amperes per watt of output at rated load that a design usually takes."""
    usual, _, by_power, by_poles = VOLT_AMPERES_PER_WATT[design]
    return float(usual * (power_w / 500.0) ** by_power * (poles / 4.0) ** by_poles)


# How often each design carries the capacitors that are known of. Common practice.
# (run, start) -> design -> share
DESIGN_SHARES: dict[tuple[bool, bool], dict[str, float]] = {
    (True, True): {CAPACITOR_START_RUN: 1.0},
    (True, False): {CAPACITOR_RUN: 0.85, CAPACITOR_START_RUN: 0.15},
    (False, True): {CAPACITOR_START: 0.95, CAPACITOR_START_RUN: 0.05},
    (False, False): {
        SPLIT_PHASE: 0.55,
        CAPACITOR_START: 0.3,
        CAPACITOR_RUN: 0.1,
        CAPACITOR_START_RUN: 0.05,
    },
}

# Temperature rise of the winding at rated load in service, K: well below the limits of IEC 60034-1.
# Common practice.
RISE_K = {"A": 46.0, "E": 50.0, "B": 54.0, "F": 57.0, "H": 68.0}
_DEFAULT_RISE_K = 55.0
_DEFAULT_SLIP = 0.035
_DEFAULT_POWER_W = 650.0
_USUAL_VOLT_AMPERES = 1.9


@dataclass(frozen=True)
class Plate:
    """Rated values in inner units; ``*_sigma`` is how far each may be off, in the logarithm.

    ``slip_sigma`` holds the tolerance on slip and the rounding of the plate speed;
    ``None`` is what the plate does not say and nothing stands in for.
    """

    voltage_v: float
    frequency_hz: float
    poles: int
    power_w: float
    power_told: bool
    power_sigma: float
    current_a: float | None
    current_sigma: float
    slip: float
    slip_sigma: float
    power_factor: float | None
    efficiency: float | None
    run_f: float | None
    start_f: float | None
    start_sigma: float
    rise_k: float
    ambient_c: float
    supply_v: float
    design_shares: dict[str, float]

    def power_prior(self, design: str) -> tuple[float, float]:
        """Rated output over ``power_w``, and its spread: from the plate current where it tells no output."""
        if self.power_told or self.current_a is None:
            return 1.0, self.power_sigma
        usual = volt_amperes_per_watt(design, power_w=self.power_w, poles=self.poles)
        return _USUAL_VOLT_AMPERES / usual, VOLT_AMPERES_PER_WATT[design][1]

    def current_prior(self, design: str) -> tuple[float, float]:
        """Rated current over the base current, and its spread; from the output where none is told."""
        if self.current_a is not None:
            return 1.0, 0.0
        return 1.0, math.hypot(VOLT_AMPERES_PER_WATT[design][1], self.power_sigma)

    @property
    def synchronous_rpm(self) -> float:
        """Synchronous speed, r/min."""
        return 120.0 * self.frequency_hz / self.poles

    def base_current_a(self, design: str) -> float:
        """Rated current of a design: the plate's, or what its output usually takes."""
        if self.current_a is not None:
            return self.current_a
        usual = volt_amperes_per_watt(design, power_w=self.power_w, poles=self.poles)
        return usual * self.power_w / self.voltage_v


def read_plate(machine: Machine, readings: Sequence[Reading] = ()) -> Plate:
    """Read a nameplate, any subset of its fields.

    Parameters
    ----------
    machine : Machine
        Nameplate and supply.
    readings : sequence of Reading
        Only tell what there is: which capacitors, which voltage class, how many poles.

    Returns
    -------
    Plate
        Complete for the fit.

    """
    plate = machine.nameplate
    speed = plate.number("speed") or _running_speed(readings)
    told = plate.number("voltage") or _nominal(machine.supply.nominal_voltage)
    frequency = plate.number("frequency") or _nominal(machine.supply.nominal_frequency)
    frequency = frequency or _frequency(speed, told, readings)
    voltage = told or _voltage_class(plate, frequency, readings)
    poles = _poles(plate, frequency, speed)
    slip, slip_sigma = _slip(plate.speed, frequency, poles, plate.number("power"))
    current, current_sigma = _current(plate, voltage)
    power, power_sigma = _power(plate, voltage, current)
    start, start_sigma = _start_capacitor(plate.start_capacitor)
    return Plate(
        voltage_v=voltage,
        frequency_hz=frequency,
        poles=poles,
        power_w=power,
        power_told=_positive(plate.number("power")) is not None,
        power_sigma=power_sigma,
        current_a=current,
        current_sigma=current_sigma,
        slip=slip,
        slip_sigma=slip_sigma,
        power_factor=_share(plate.number("power_factor")),
        efficiency=_share(plate.number("efficiency")),
        run_f=_positive(plate.number("run_capacitor")),
        start_f=start,
        start_sigma=start_sigma,
        rise_k=RISE_K.get((plate.insulation_class or "").upper(), _DEFAULT_RISE_K),
        ambient_c=22.0,
        supply_v=_site_voltage(machine, voltage),
        design_shares=_design_shares(plate, readings),
    )


def _positive(number: float | None) -> float | None:
    return number if number is not None and math.isfinite(number) and number > 0.0 else None


def _nominal(value: Value | None) -> float | None:
    return _positive(value.number) if value is not None and value.is_read else None


def _site_voltage(machine: Machine, voltage_v: float) -> float:
    """Voltage to expect: the site's nominal one where it is told and belongs to the plate's class."""
    nominal = _nominal(machine.supply.nominal_voltage)
    return nominal if nominal is not None and abs(nominal / voltage_v - 1.0) < 0.12 else voltage_v


def _share(number: float | None) -> float | None:
    """Return a power factor or an efficiency as a ratio, told in per cent or as such."""
    if number is None or not math.isfinite(number):
        return None
    ratio = number / 100.0 if number > 1.5 else number
    return min(ratio, 0.999) if ratio > 0.05 else None


def _frequency(speed_rpm: float | None, voltage_v: float | None, readings: Sequence[Reading]) -> float:
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


def _voltage_class(plate: Nameplate, frequency_hz: float, readings: Sequence[Reading]) -> float:
    """115 V or 230 V: by what was read at the terminals, else by plate output and current."""
    read = [r.numbers[0] for r in readings if r.measure == "supply_voltage" and r.values[0].is_read]
    live = [v for v in read if 50.0 < v < 1000.0]
    if live:
        return 115.0 if max(live) < (160.0 if frequency_hz > 55.0 else 125.0) else 230.0
    power, current = _positive(plate.number("power")), _positive(plate.number("current"))
    if power is not None and current is not None and frequency_hz > 55.0:
        return 115.0 if 230.0 * current / power > 4.2 else 230.0
    return 230.0


def _running_speed(readings: Sequence[Reading]) -> float | None:
    read = [r.numbers[0] for r in readings if r.measure == "speed" and r.values[0].is_read]
    turning = [v for v in read if v > 300.0]
    return max(turning) if turning else None


def _poles(plate: Nameplate, frequency_hz: float, speed_rpm: float | None) -> int:
    told = plate.number("poles")
    if told is not None and told >= 2.0 and math.isfinite(told):
        return 2 * max(round(told / 2.0), 1)
    if speed_rpm is None or not 100.0 < speed_rpm < 60.0 * frequency_hz:
        return 4
    return 2 * max(math.floor(60.0 * frequency_hz / speed_rpm), 1)


def _slip(speed: Value | None, frequency_hz: float, poles: int, power_w: float | None) -> tuple[float, float]:
    """Rated slip and its spread: a quarter of the IEC 60034-1 tolerance, and rounding.

    The tolerance is ±30 % of the slip below 1 kW, ±20 % above.
    """
    synchronous = 120.0 * frequency_hz / poles
    if speed is None or not speed.is_read or not 0.5 < speed.number / synchronous < 0.9995:
        return _DEFAULT_SLIP, 0.35
    slip = 1.0 - speed.number / synchronous
    step = max(speed.resolution, 5.0 if speed.number % 5.0 == 0.0 else 1.0)
    rounding = step / math.sqrt(12.0) / synchronous / slip
    tolerance = 0.07 if (power_w or 0.0) < 1000.0 else 0.05
    return slip, math.hypot(tolerance, rounding)


def _current(plate: Nameplate, voltage_v: float) -> tuple[float | None, float]:
    """Rated current: told, or from output, efficiency and power factor."""
    told = plate.current
    number = _positive(plate.number("current"))
    if number is not None and told is not None:
        return number, math.hypot(0.02, told.resolution / math.sqrt(12.0) / number)
    power, pf, efficiency = (
        _positive(plate.number("power")),
        _share(plate.number("power_factor")),
        _share(plate.number("efficiency")),
    )
    if power is not None and pf is not None and efficiency is not None:
        return power / (voltage_v * pf * efficiency), 0.04
    return None, 0.0


def _power(plate: Nameplate, voltage_v: float, current_a: float | None) -> tuple[float, float]:
    """Rated output: told, or from current with usual volt-amperes per watt."""
    told = _positive(plate.number("power"))
    if told is not None:
        return told, 0.0
    if current_a is not None:
        return voltage_v * current_a / _USUAL_VOLT_AMPERES, 0.0
    return _DEFAULT_POWER_W, 0.9


def _start_capacitor(value: Value | None) -> tuple[float | None, float]:
    """Start capacitor as it will measure: one number is −0/+20 %, a marked range is the range itself."""
    if value is None or not value.is_read or not value.number > 0.0:
        return None, 0.3
    if value.kind == "range" and value.high is not None and value.high > value.number:
        return math.sqrt(value.number * value.high), 0.25 * math.log(value.high / value.number) + 0.01
    return 1.09 * value.number, 0.06


def _design_shares(plate: Nameplate, readings: Sequence[Reading]) -> dict[str, float]:
    """Designs that carry the capacitors known of, from the plate or because somebody measured them."""
    measured = {r.measure for r in readings}
    volts = {r.state for r in readings if r.measure == "capacitor_voltage"}
    run = (
        plate.number("run_capacitor") is not None
        or "run_capacitance" in measured
        or bool(volts & {"loaded", "no_load", "light_load"})
    )
    start = plate.number("start_capacitor") is not None or "start_capacitance" in measured
    shares = dict(DESIGN_SHARES[(run, start)])
    if volts and not run and not start:
        del shares[SPLIT_PHASE]
    return shares
