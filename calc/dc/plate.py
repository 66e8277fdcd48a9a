"""What the plate of a DC machine gives, and how far it leaves the rest open.

Losses are the difference of large numbers, so the plate's output, volts and amperes
tell them well on a small machine and hardly at all on a large one; the plate is
therefore combined with what is usual for the size, each by its own spread.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from calc.sheet import Machine, Nameplate, Reading

# Usual values by output in kW, with the spread of their logarithm. Fitted by eye to the
# textbook machines (12 to 1250 kW) and to catalogue efficiencies from memory.
LOSS_RATIO = (0.27, -0.32, 0.22)  # losses over output, field excluded
FIELD_POWER = (0.065, -0.33, 0.47)  # field input over output
COILS = (46.0, 0.25)  # commutator bars

RISE_K = 65.0  # usual temperature rise of the windings at rated load
PLATE_AMBIENT_C = 25.0  # ambient at which the plate's field current was read
COPPER_PER_K = 0.00393  # temperature coefficient of copper at 20 degC, IEC 60028

_DC_SOURCES = {"dc_bus": "dc", "battery": "dc", "generator": "dc"}
_RECTIFIERS = {"rectifier_1ph": "bridge", "rectifier_3ph": "six_pulse"}


@dataclass(frozen=True)
class Plate:
    """A plate read: central values, and the spread of the logarithm of each (0 = given)."""

    kind: str
    power_w: float
    power_spread: float
    voltage_v: float
    voltage_spread: float
    speed_rpm: float
    speed_spread: float
    loss_ratio: float
    loss_spread: float
    field_voltage_v: float
    field_voltage_spread: float
    field_current_a: float
    field_current_spread: float
    source: str
    source_voltage_v: float | None = None
    mains_hz: float | None = None
    spun_rpm: float | None = None

    @property
    def has_field(self) -> bool:
        """Whether there is a field winding beside the armature circuit (shunt or separate)."""
        return self.kind in {"dc_shunt", "dc_separately_excited", "dc_compound"}

    @property
    def has_series_field(self) -> bool:
        """Whether a field winding carries the armature current."""
        return self.kind in {"dc_series", "dc_compound"}

    @property
    def current_a(self) -> float:
        """Central armature current at rated load, A."""
        return self.power_w * (1.0 + self.loss_ratio) / self.voltage_v


def read_plate(machine: Machine, readings: Sequence[Reading] = ()) -> Plate:
    """Read a nameplate, filling what it does not say with what is usual for the size.

    ``readings`` give context only: the speed at which the machine was spun.
    """
    plate, kind = machine.nameplate, machine.kind
    power, power_spread, voltage, voltage_spread = _power_and_voltage(plate)
    field = _field(plate, kind, power, voltage)
    loss, loss_spread = _loss_ratio(plate, kind, power, voltage, voltage_spread, field)
    if plate.number("power") is None and plate.number("current") is not None:
        power /= 1.0 + loss
    given = plate.number("speed")
    return Plate(
        kind=kind,
        power_w=power,
        power_spread=power_spread,
        voltage_v=voltage,
        voltage_spread=voltage_spread,
        speed_rpm=given or 1500.0,
        speed_spread=0.025 if given else 0.45,
        loss_ratio=loss,
        loss_spread=loss_spread,
        field_voltage_v=field[0],
        field_voltage_spread=field[1],
        field_current_a=field[2],
        field_current_spread=field[3],
        source=_source(machine),
        source_voltage_v=machine.supply.nominal_voltage.number if machine.supply.nominal_voltage else None,
        mains_hz=machine.supply.nominal_frequency.number if machine.supply.nominal_frequency else None,
        spun_rpm=_spun_rpm(readings),
    )


def usual(law: tuple[float, float, float], power_w: float) -> float:
    """Return the usual value of a quantity for a machine of this output: ``a * kW ** b``."""
    return law[0] * math.pow(max(power_w / 1000.0, 0.02), law[1])


def _power_and_voltage(plate: Nameplate) -> tuple[float, float, float, float]:
    """Output and volts, each with its spread; one follows from the other and the current."""
    power, voltage, current = plate.number("power"), plate.number("voltage"), plate.number("current")
    if power and voltage:
        return power, 0.0, voltage, 0.0
    if voltage and current:
        return voltage * current, 0.0, voltage, 0.0
    if power and current:
        return power, 0.0, power * (1.0 + usual(LOSS_RATIO, power)) / current, 0.0
    if power:
        return power, 0.0, _usual_voltage(power), 0.45
    if current:
        guess = _usual_voltage(current * 200.0)
        return current * guess, 0.0, guess, 0.45
    return 4000.0, 1.3, voltage or 220.0, 0.0 if voltage else 0.5


def _usual_voltage(power_w: float) -> float:
    return 180.0 if power_w < 3000.0 else 240.0 if power_w < 15000.0 else 440.0


def _field(plate: Nameplate, kind: str, power: float, voltage: float) -> tuple[float, float, float, float]:
    """Field volts and amperes of the plate, each with its spread."""
    volts, amperes = plate.number("field_voltage"), plate.number("field_current")
    own_supply = kind == "dc_separately_excited"
    spread = 0.0 if volts else 0.45 if own_supply else 0.01
    field_volts = volts or (200.0 if own_supply else voltage)
    usual_amperes = usual(FIELD_POWER, power) * power / field_volts
    return field_volts, spread, amperes or usual_amperes, 0.035 if amperes else FIELD_POWER[2]


def _loss_ratio(
    plate: Nameplate,
    kind: str,
    power: float,
    voltage: float,
    voltage_spread: float,
    field: tuple[float, float, float, float],
) -> tuple[float, float]:
    """Losses (field excluded) over output: what is usual, sharpened by amperes and efficiency."""
    prior, spread = usual(LOSS_RATIO, power), LOSS_RATIO[2]
    evidence = [(prior, prior * spread)]
    current, efficiency = plate.number("current"), plate.number("efficiency")
    field_watts = 0.0 if kind in {"dc_series", "dc_permanent_magnet"} else field[0] * field[2]
    if plate.number("power") and plate.number("voltage") and current and voltage_spread == 0.0:
        share, doubt = _field_share(plate, kind)
        drawn = current - share * field[2]
        sigma = math.hypot(0.02, doubt * field[2] / current)
        evidence.append((voltage * drawn / power - 1.0, sigma * voltage * current / power))
    if plate.number("power") and efficiency:
        ratio = 100.0 / efficiency if efficiency > 1.5 else 1.0 / efficiency
        evidence.append(
            (ratio - 1.0 - field_watts / power, math.hypot(0.015 * ratio, 0.5 * field_watts / power))
        )
    weights = [1.0 / sigma**2 for _, sigma in evidence]
    best = sum(w * value for w, (value, _) in zip(weights, evidence, strict=True)) / sum(weights)
    best = max(best, 0.35 * prior)
    return best, min(spread, math.sqrt(1.0 / sum(weights)) / best)


def _field_share(plate: Nameplate, kind: str) -> tuple[float, float]:
    """How much of the field current the plate's amperes hold, with its doubt."""
    if kind not in {"dc_shunt", "dc_compound"} or plate.current_is == "armature":
        return 0.0, 0.05
    if plate.current_is == "line":
        return 1.0, 0.05
    return 0.75, 0.4


def _source(machine: Machine) -> str:
    """Name the waveform class of what feeds the armature: dc, bridge, six_pulse or unknown."""
    name = machine.supply.source or ""
    if name == "mains":
        code = (machine.nameplate.power_supply_code or "").upper()
        return {"A": "dc", "C": "six_pulse", "K": "bridge"}.get(code, "unknown")
    return _DC_SOURCES.get(name) or _RECTIFIERS.get(name) or "unknown"


def _spun_rpm(readings: Sequence[Reading]) -> float | None:
    """Speed at which the machine was driven from outside, if it was noted."""
    for reading in reversed(readings):
        if reading.key == "speed@spun" and reading.values[0].is_read:
            return reading.values[0].number
    return None
