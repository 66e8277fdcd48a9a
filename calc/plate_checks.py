"""Where the fields of one nameplate agree or contradict: checks that give a distance in tolerances."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from functools import cache
from typing import Final, NamedTuple

from calc.errors import clip
from calc.formatting import format_value
from calc.lookup import code_letter_kva_per_hp, table
from calc.quantities import DC_KINDS
from calc.sheet import Machine, Value
from calc.typical import (
    poles_from_speed,
    synchronous_speed_rpm,
    typical_efficiency,
    typical_power_factor,
    typical_slip,
)
from calc.vocabulary import PLATE_DIMENSION

HORSEPOWER_W: Final = 745.69987158227022
INDUCTION: Final = frozenset({"induction_3ph", "induction_1ph", "induction_wound_rotor"})
Numbers = Mapping[str, float]


class Finding(NamedTuple):
    """One check: its distance in tolerances (beyond 1 the fields contradict), and what there is to say."""

    id: str
    fields: tuple[str, ...]
    distance: float
    says: str


class Plate(NamedTuple):
    """A plate as the checks see it: numbers in inner units, half steps of the last digit, and the words."""

    kind: str
    numbers: Numbers
    half_steps: Numbers
    words: Mapping[str, str]
    texts: Mapping[str, str]

    def with_number(self, field: str, number: float) -> Plate:
        """Return the plate with one number changed."""
        return self._replace(numbers={**self.numbers, field: number})


def plate_of(machine: Machine) -> Plate:
    """Return the plate of a machine with what a check needs of the supply."""
    nameplate = machine.nameplate
    given = {name: getattr(nameplate, name) for name in PLATE_DIMENSION}
    values = {name: value for name, value in given.items() if isinstance(value, Value) and value.is_read}
    numbers = {name: value.number for name, value in values.items()}
    if machine.supply.nominal_voltage is not None:
        numbers["nominal_voltage"] = machine.supply.nominal_voltage.number
    words = {name: getattr(nameplate, name) for name in ("code_letter", "design_letter", "current_is")}
    return Plate(
        kind=machine.kind,
        numbers=numbers,
        half_steps={name: value.resolution / 2.0 for name, value in values.items()},
        words={name: word for name, word in words.items() if word},
        texts={name: value.text for name, value in values.items()},
    )


@cache
def limit(name: str) -> float:
    """Return a tolerance of ``tables/plate_checks.yaml``."""
    return float(str(table("plate_checks")[name]))


@cache
def span(name: str) -> tuple[float, ...]:
    """Return a span or list of ``tables/plate_checks.yaml``."""
    listed = table("plate_checks")[name]
    return tuple(float(str(item)) for item in listed) if isinstance(listed, list) else ()


def findings(plate: Plate) -> list[Finding]:
    """Return every check that the fields of the plate allow."""
    if plate.kind in DC_KINDS:
        return [*_dc_balance(plate), *_dc_field(plate)]
    if plate.kind in INDUCTION:
        return [*_balance(plate), *_speed(plate), *_locked(plate), *_code_letter(plate)]
    return []


def _shown(plate: Plate, field: str) -> str:
    return clip(plate.texts[field])


def _rounding(plate: Plate, *fields: str) -> float:
    return sum(
        plate.half_steps.get(name, 0.0) / plate.numbers[name] for name in fields if plate.numbers.get(name)
    )


def _balance(plate: Plate) -> Iterator[Finding]:
    """Output against volts, amps, power factor and efficiency."""
    n = plate.numbers
    if not {"power", "voltage", "current"} <= n.keys():
        return
    phases = 1.0 if plate.kind == "induction_1ph" else math.sqrt(3.0)
    factor, tolerance = _share_used(plate)
    tolerance += limit("balance_below_half_kw") if n["power"] < 500.0 else 0.0
    tolerance += _rounding(plate, "current", "power_factor", "efficiency") + min(
        _rounding(plate, "power"), 0.02
    )
    due = n["power"] / (phases * n["voltage"] * factor)
    told = [name for name in ("power_factor", "efficiency") if name in n]
    given = ", ".join(f"{name.replace('_', ' ')} {_shown(plate, name)}" for name in told)
    machine = f"{_shown(plate, 'power')} at {_shown(plate, 'voltage')}{' with ' + given if given else ''}"
    amps = f"about {format_value(due, dimension='current')}; the plate says {_shown(plate, 'current')}"
    distance = abs(math.log(n["current"] / due)) / math.log1p(tolerance)
    fields = ("power", "voltage", "current", *told)
    yield Finding("power_balance", fields, distance, f"{machine} takes {amps}")


def _share_used(plate: Plate) -> tuple[float, float]:
    """Return output over apparent input, told or usual, and how far it may be off."""
    n = plate.numbers
    tolerance = limit("balance")
    if plate.kind == "induction_1ph" and not {"power_factor", "efficiency"} <= n.keys():
        running = "va_per_watt_with_run_capacitor" if "run_capacitor" in n else "va_per_watt_without"
        return 1.0 / limit(running), tolerance + limit("va_per_watt_spread")
    poles = poles_of(plate) or 4
    factor, efficiency = n.get("power_factor"), n.get("efficiency")
    if factor is None:
        factor = typical_power_factor(power_w=n["power"], poles=poles)
        tolerance += limit("balance_without_power_factor")
    if efficiency is None:
        efficiency = typical_efficiency(
            power_w=n["power"], poles=poles, frequency_hz=n.get("frequency", 50.0)
        )
        small = n["power"] < 2000.0
        tolerance += limit("balance_without_efficiency_below_2_kw" if small else "balance_without_efficiency")
    return factor * efficiency, tolerance


def poles_of(plate: Plate) -> int | None:
    """Return the poles that the plate tells, or that its speed means."""
    n = plate.numbers
    if "poles" in n and n["poles"] >= 2 and n["poles"] % 2 == 0:
        return int(n["poles"])
    if n.get("speed", 0.0) > 0.0 and n.get("frequency", 0.0) > 0.0:
        return poles_from_speed(speed_rpm=n["speed"], frequency_hz=n["frequency"])
    return None


def slip_of(plate: Plate) -> float | None:
    """Return the slip that speed, frequency and poles mean."""
    n, poles = plate.numbers, poles_of(plate)
    if poles is None or "speed" not in n or not n.get("frequency"):
        return None
    return 1.0 - n["speed"] / synchronous_speed_rpm(frequency_hz=n["frequency"], poles=poles)


def _speed(plate: Plate) -> Iterator[Finding]:
    """Speed against frequency and poles."""
    slip, poles = slip_of(plate), poles_of(plate)
    if slip is None or poles is None:
        return
    frequency = plate.numbers["frequency"]
    synchronous = synchronous_speed_rpm(frequency_hz=frequency, poles=poles)
    fields = ("speed", "frequency", *(("poles",) if "poles" in plate.numbers else ()))
    speed = _shown(plate, "speed")
    if slip <= 0.0:
        loaded = synchronous * (1.0 - typical_slip(power_w=plate.numbers.get("power") or 1e4))
        says = (
            f"{speed} is not below the {synchronous:g} rpm of {poles} poles at {frequency:g} Hz; "
            f"with its load such a motor turns at about {round(loaded, -1):.0f} rpm"
        )
        yield Finding("speed_not_below_synchronous", fields, 1.0 + 100.0 * (0.005 - slip), says)
        return
    highest = _highest_slip(plate)
    field = f"the {synchronous:g} rpm of {poles} poles at {frequency:g} Hz"
    says = f"{speed} would be {_percent(slip)} below {field}"
    yield Finding("slip", fields, slip / highest, says)
    if poles > limit("most_poles") and "poles" not in plate.numbers and plate.numbers.get("power", 0.0) < 2e5:
        yield Finding(
            "speed_very_low", ("speed",), poles / limit("most_poles"), f"{speed} would need {poles} poles"
        )


def _highest_slip(plate: Plate) -> float:
    if plate.words.get("design_letter") == "D":
        return limit("slip_design_d")
    return limit("slip_below_1_5_kw" if plate.numbers.get("power", 1e3) < 1500.0 else "slip")


def _locked(plate: Plate) -> Iterator[Finding]:
    """Locked-rotor ratio against what is made."""
    ratio = plate.numbers.get("locked_rotor_current_ratio")
    if ratio is None:
        return
    small = plate.numbers.get("power", 1e4) < 1500.0
    low, high = span("locked_ratio_below_1_5_kw" if small else "locked_ratio")
    distance = abs(math.log(ratio / math.sqrt(low * high))) / (0.5 * math.log(high / low))
    says = f"locked-rotor current {ratio:g} times rated; such motors have {low:g} to {high:g}"
    yield Finding("locked_rotor_ratio", ("locked_rotor_current_ratio",), distance, says)


def _code_letter(plate: Plate) -> Iterator[Finding]:
    """Code letter against the locked-rotor ratio, or against the ratios that are made."""
    n, letter = plate.numbers, plate.words.get("code_letter")
    if letter is None or not {"power", "voltage", "current"} <= n.keys():
        return
    phases = 1.0 if plate.kind == "induction_1ph" else math.sqrt(3.0)
    per_ratio = phases * n["voltage"] * n["current"] / 1000.0 / (n["power"] / HORSEPOWER_W)
    low, high = (edge / per_ratio for edge in code_letter_kva_per_hp(letter))
    ratio = n.get("locked_rotor_current_ratio")
    fields: tuple[str, ...] = ("code_letter", "power", "voltage", "current")
    says = f"code letter {letter} means {low:.1f} to {high:.1f} times the rated current"
    if ratio is None:
        least, most = span("locked_ratio_below_1_5_kw" if n["power"] < 1500.0 else "locked_ratio")
        outside = max(math.log(least / high), math.log(low / most), 0.0)
        yield Finding("code_letter", fields, 2.0 * outside / math.log1p(limit("code_letter")), says)
        return
    outside = max(math.log(low / ratio), math.log(ratio / high), 0.0)
    says += f"; the plate says {ratio:g}"
    yield Finding(
        "code_letter",
        (*fields, "locked_rotor_current_ratio"),
        outside / math.log1p(limit("code_letter")),
        says,
    )


def _dc_balance(plate: Plate) -> Iterator[Finding]:
    """Output against armature volts and amps."""
    n = plate.numbers
    if not {"power", "voltage", "current"} <= n.keys():
        return
    line = plate.words.get("current_is") == "line"
    drawn = max(n["current"] - (n.get("field_current", 0.0) if line else 0.0), 1e-6)
    share = n["power"] / (n["voltage"] * drawn)
    size = "_below_1_kw" if n["power"] < 1e3 else "_below_10_kw" if n["power"] < 1e4 else ""
    low, high = span(f"dc_efficiency{size}")
    distance = abs(math.log(share / math.sqrt(low * high))) / (
        0.5 * math.log(high / low) + _rounding(plate, "current")
    )
    asks = f"{_shown(plate, 'voltage')} and {_shown(plate, 'current')}"
    says = f"{_shown(plate, 'power')} out of {asks} would be {100.0 * share:.0f} % efficiency"
    fields: tuple[str, ...] = ("power", "voltage", "current")
    if "efficiency" in n:
        fields += ("efficiency",)
        tolerance = limit("dc_balance_below_1_kw" if n["power"] < 1e3 else "dc_balance") + _rounding(
            plate, "current", "efficiency"
        )
        distance = max(distance, abs(math.log(share / n["efficiency"])) / math.log1p(tolerance))
        says += f"; the plate says {_shown(plate, 'efficiency')}"
    yield Finding("power_balance", fields, distance, says)


def _percent(share: float) -> str:
    return f"{100.0 * share:.0f} %" if share >= 0.1 else f"{100.0 * share:.2g} %"


def _dc_field(plate: Plate) -> Iterator[Finding]:
    """Field power against the output."""
    n = plate.numbers
    volts = n.get("field_voltage", n.get("voltage") if plate.kind in {"dc_shunt", "dc_compound"} else None)
    if volts is None or not {"field_current", "power"} <= n.keys():
        return
    share = volts * n["field_current"] / n["power"]
    low, high = span("dc_field_share")
    distance = abs(math.log(share / math.sqrt(low * high))) / (0.5 * math.log(high / low))
    usual = f"{100.0 * low:g} to {100.0 * high:g} %"
    says = f"the field would take {_percent(share)} of the output; fields take {usual}"
    fields = tuple(name for name in ("field_voltage", "field_current", "power") if name in n)
    yield Finding("field_power", fields, distance, says)
