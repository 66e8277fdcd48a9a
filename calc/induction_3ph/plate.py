"""From the nameplate of a three-phase induction motor to its equivalent circuit, row by row.

The plate is inverted in closed form, so that every row of latents is a machine that
meets it: output, volts and amps as printed; losses, slip and locked-rotor current within
their tolerances; what is left of the losses split by latents. Everything is per unit of
rated line voltage and plate current, star-equivalent.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from calc.induction_3ph.context import filled
from calc.lookup import code_letter_kva_per_hp, code_letters
from calc.plate_checks import HORSEPOWER_W
from calc.sheet import Machine, Nameplate, Reading
from calc.temperature import INFERRED_ZERO_K
from calc.typical import (
    synchronous_speed_rpm,
    typical_efficiency,
    typical_locked_rotor_ratio,
    typical_power_factor,
    typical_slip,
)

COPPER_K = INFERRED_ZERO_K["copper"]

LATENTS = (
    "losses",
    "current",
    "slip",
    "locked",
    "core_share",
    "friction_share",
    "leakage",
    "deep_bar",
    "saturation",
    "rise",
    "size",
    "resistance",
    "level",
    "unbalance_a",
    "unbalance_b",
    "frequency",
    "sag",
    "load",
    "ambient",
    "severity_1",
    "severity_2",
)
INDEX = {name: place for place, name in enumerate(LATENTS)}

# Typical rise by resistance at rated load, K, and its spread; most class F windings run at a class B rise
# (common practice).
_RISE_K = {"A": 48.0, "E": 55.0, "B": 58.0, "F": 65.0, "H": 75.0}


@dataclass(frozen=True)
class Base:
    """What the plate gives as plain numbers, with how sure each is."""

    power_w: float
    voltage_v: float
    current_a: float
    frequency_hz: float
    poles: int
    slip: float
    slip_spread: float
    loss_share: float
    loss_spread: float
    size_spread: float
    output_spread: float
    level_spread: float
    current_spread: float
    power_factor: float | None
    power_factor_spread: float
    locked_ratio: float
    locked_spread: float
    rise_k: float
    connection: str | None
    service_factor: float

    @property
    def apparent_va(self) -> float:
        """Rated apparent power. [VA]"""
        return math.sqrt(3.0) * self.voltage_v * self.current_a

    @property
    def impedance_ohm(self) -> float:
        """Base impedance per star-equivalent phase. [ohm]"""
        return self.voltage_v / math.sqrt(3.0) / self.current_a

    @property
    def synchronous_rpm(self) -> float:
        """Synchronous speed at rated frequency. [r/min]"""
        return 120.0 * self.frequency_hz / self.poles


def read_base(machine: Machine, readings: Sequence[Reading] = ()) -> Base:
    """Take the plate apart; what it does not say gets a typical value and a wide spread.

    ``readings`` only tell the class of a machine whose plate cannot be read.
    """
    machine, missing = filled(machine, readings)
    plate = machine.nameplate
    frequency = plate.number("frequency") or 50.0
    voltage = plate.number("voltage") or 400.0
    power, current = _size(plate, voltage)
    poles = missing.poles or _poles(plate, frequency)
    efficiency = plate.number("efficiency")
    typical = typical_efficiency(power_w=power, poles=poles, frequency_hz=frequency)
    eta = _share(efficiency) if efficiency else typical
    pf = plate.number("power_factor")
    current_spread = 0.018
    if missing.current and not missing.power:
        pf_guess = pf if pf else typical_power_factor(power_w=power, poles=poles)
        current = power / (math.sqrt(3.0) * voltage * eta * pf_guess)
        current_spread = 0.03 if pf and efficiency else 0.08
    slip, slip_spread = _slip(plate, frequency, poles, power)
    ratio, ratio_spread = _locked(plate, power, voltage, current, poles)
    rise_k = _RISE_K.get((plate.insulation_class or "F").upper()[:1], 65.0)
    return Base(
        power_w=power,
        voltage_v=voltage,
        current_a=current,
        frequency_hz=frequency,
        poles=poles,
        slip=slip,
        slip_spread=slip_spread,
        loss_share=1.0 / eta - 1.0,
        loss_spread=0.07 if efficiency else 0.26,
        # Neither output nor current: the whole machine may be larger or smaller; current alone: the output.
        size_spread=0.45 if missing.power and missing.current else 0.0,
        output_spread=0.16 if missing.power and not missing.current else 0.0,
        level_spread=0.045 if missing.voltage else 0.0,
        current_spread=current_spread,
        power_factor=pf,
        power_factor_spread=0.012 + 0.04 * (1.0 - pf) if pf else 1.0,
        locked_ratio=ratio,
        locked_spread=ratio_spread,
        rise_k=rise_k,
        connection=_connection(plate.connection),
        service_factor=max(plate.number("service_factor") or 1.0, 1.0),
    )


def _share(percent_or_share: float) -> float:
    share = percent_or_share / 100.0 if percent_or_share > 1.0 else percent_or_share
    return min(max(share, 0.3), 0.985)


def _connection(word: str | None) -> str | None:
    return {"double_star": "star", "double_delta": "delta"}.get(word or "", word)


def _size(plate: Nameplate, voltage: float) -> tuple[float, float]:
    """Output and current; a current that the plate lacks is 0 here and follows from the output."""
    power, current = plate.number("power"), plate.number("current")
    if power:
        return power, current or 0.0
    if current:
        apparent = math.sqrt(3.0) * voltage * current
        return (0.74 if apparent > 3e3 else 0.6) * apparent, current
    apparent = math.sqrt(3.0) * voltage * 15.0
    return 0.74 * apparent, 15.0


def _poles(plate: Nameplate, frequency: float) -> int:
    poles = plate.number("poles")
    if poles:
        return int(poles)
    speed = plate.number("speed")
    if not speed:
        return 4
    # The plate speed lies a little under the synchronous one; twelve poles and more are rare.
    return min(max(2 * math.floor(60.0 * frequency / speed + 1e-9), 2), 24)


def _slip(plate: Nameplate, frequency: float, poles: int, power: float) -> tuple[float, float]:
    """Rated slip, and its relative spread: the tolerance of IEC 60034-1 and the plate's rounding."""
    typical = typical_slip(power_w=power)
    speed = plate.number("speed")
    if not speed or plate.speed is None:
        return typical, 0.35
    synchronous = synchronous_speed_rpm(frequency_hz=frequency, poles=poles)
    slip = 1.0 - speed / synchronous
    step = max(plate.speed.resolution, 1.0) / synchronous
    if slip < 0.25 * step:
        return typical, 0.35
    tolerance = 0.13 if power < 1000.0 else 0.085
    return slip, min(math.hypot(tolerance, 0.3 * step / slip), 0.4)


def _locked(
    plate: Nameplate, power: float, voltage: float, current: float, poles: int
) -> tuple[float, float]:
    """Locked-rotor current over rated current, and its relative spread."""
    ratio = plate.number("locked_rotor_current_ratio")
    if ratio:
        return ratio, 0.07
    if plate.code_letter in code_letters():
        low, high = code_letter_kva_per_hp(plate.code_letter)
        amps = math.sqrt(low * high) * power / HORSEPOWER_W * 1000.0 / (math.sqrt(3.0) * voltage)
        return amps / current, 0.08
    return typical_locked_rotor_ratio(power_w=power, poles=poles), 0.19
