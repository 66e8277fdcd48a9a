"""What the nameplate of a single-phase motor says, and what stands in where it is silent."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from calc.induction_1ph import stand_in
from calc.induction_1ph.designs import CAPACITOR_RUN, CAPACITOR_START, CAPACITOR_START_RUN, SPLIT_PHASE
from calc.induction_1ph.stand_in import positive, ratio
from calc.sheet import Machine, Nameplate, Reading, Value

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
    speed = plate.number("speed") or stand_in.running_speed(readings)
    told = plate.number("voltage") or _nominal(machine.supply.nominal_voltage)
    frequency = plate.number("frequency") or _nominal(machine.supply.nominal_frequency)
    frequency = frequency or stand_in.frequency(speed, told, readings)
    voltage = told or stand_in.voltage_class(plate, frequency, readings)
    poles = stand_in.poles_of(plate, frequency, speed)
    slip, slip_sigma = _slip(plate.speed, frequency, poles, plate.number("power"))
    current, current_sigma = _current(plate, voltage)
    power, power_sigma = _power(plate, voltage, frequency, current)
    start, start_sigma = _start_capacitor(plate.start_capacitor)
    return Plate(
        voltage_v=voltage,
        frequency_hz=frequency,
        poles=poles,
        power_w=power,
        power_told=positive(plate.number("power")) is not None,
        power_sigma=power_sigma,
        current_a=current,
        current_sigma=current_sigma,
        slip=slip,
        slip_sigma=slip_sigma,
        power_factor=ratio(plate.number("power_factor")),
        efficiency=ratio(plate.number("efficiency")),
        run_f=positive(plate.number("run_capacitor")),
        start_f=start,
        start_sigma=start_sigma,
        rise_k=RISE_K.get((plate.insulation_class or "").upper(), _DEFAULT_RISE_K),
        ambient_c=22.0,
        supply_v=_site_voltage(machine, voltage),
        design_shares=_design_shares(plate, readings),
    )


def _nominal(value: Value | None) -> float | None:
    return positive(value.number) if value is not None and value.is_read else None


def _site_voltage(machine: Machine, voltage_v: float) -> float:
    """Voltage to expect: the site's nominal one where it is told and belongs to the plate's class."""
    nominal = _nominal(machine.supply.nominal_voltage)
    return nominal if nominal is not None and abs(nominal / voltage_v - 1.0) < 0.12 else voltage_v


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
    number = positive(plate.number("current"))
    if number is not None and told is not None:
        return number, math.hypot(0.02, told.resolution / math.sqrt(12.0) / number)
    power, pf, efficiency = (
        positive(plate.number("power")),
        ratio(plate.number("power_factor")),
        ratio(plate.number("efficiency")),
    )
    if power is not None and pf is not None and efficiency is not None:
        return power / (voltage_v * pf * efficiency), 0.04
    return None, 0.0


def _power(
    plate: Nameplate, voltage_v: float, frequency_hz: float, current_a: float | None
) -> tuple[float, float]:
    """Rated output: told, or from current with usual volt-amperes per watt, or from the capacitors."""
    told = positive(plate.number("power"))
    if told is not None:
        return told, 0.0
    if current_a is not None:
        return voltage_v * current_a / _USUAL_VOLT_AMPERES, 0.0
    per_farad = 2.0 * math.pi * frequency_hz * voltage_v**2
    for field, var_per_watt, spread in (
        ("run_capacitor", stand_in.RUN_VAR, 0.3),
        ("start_capacitor", stand_in.START_VAR, 0.4),
    ):
        farad = positive(plate.number(field))
        if farad is not None:
            return per_farad * farad / var_per_watt, spread
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
