"""Which one field of a contradictory plate is the likely slip of the pen."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Final, NamedTuple

from calc.plate_checks import HORSEPOWER_W, INDUCTION, Plate, findings, limit, poles_of, slip_of, span
from calc.sheet import Nameplate, Value
from calc.typical import typical_efficiency, typical_locked_rotor_ratio, typical_power_factor, typical_slip
from calc.vocabulary import PERCENT_RATIOS

# How much worse an explanation must be (in the logarithm) before it is not worth mentioning.
_CLEAR: Final = 2.0
_EXCHANGED: Final = "two digits exchanged"
_ELSEWHERE: Final = "it belongs to the other voltage"
HP_FOR_KW: Final = "hp taken for kW"
KW_FOR_HP: Final = "kW taken for hp"
_SQRT3: Final = math.sqrt(3.0)


class Slip(NamedTuple):
    """One field changed in one way."""

    field: str
    number: float
    why: str
    rarity: float


# field -> (factor, reason, how rare in the logarithm)
_DECIMAL: Final = ((10.0, "decimal point", 0.0), (0.1, "decimal point", 0.0))
_OTHER_VOLTAGE: Final = (
    (_SQRT3, _ELSEWHERE, 0.5), (1.0 / _SQRT3, _ELSEWHERE, 0.5),
    (2.0, _ELSEWHERE, 0.5), (0.5, _ELSEWHERE, 0.5),
)  # fmt: skip
_FACTORS: Final = {
    "power": (
        *_DECIMAL,
        (HORSEPOWER_W / 1000.0, HP_FOR_KW, 0.0), (1000.0 / HORSEPOWER_W, KW_FOR_HP, 0.0),
        (1000.0, "W taken for kW", 1.0), (0.001, "W taken for kW", 1.0),
    ),
    "current": (*_DECIMAL, *_OTHER_VOLTAGE),
    "voltage": (*_DECIMAL, *_OTHER_VOLTAGE),
    "speed": _DECIMAL,
    "efficiency": _DECIMAL,
    "power_factor": _DECIMAL,
    "frequency": ((1.2, "a 60 Hz plate", 0.0), (1.0 / 1.2, "a 50 Hz plate", 0.0)),
    "locked_rotor_current_ratio": _DECIMAL,
    "field_current": _DECIMAL,
    "field_voltage": _DECIMAL,
}  # fmt: skip


def explanations(plate: Plate, nameplate: Nameplate, apart: float) -> list[Slip]:
    """Return the single changes after which every check agrees, the likeliest first.

    ``apart`` is how far the fields lie from each other, in tolerances: what is only
    a little off is no slip of the pen.
    """
    found: list[tuple[float, Slip]] = []
    for slip in _slips(plate, nameplate):
        if apart < limit("slip_of_the_pen") * {_EXCHANGED: 2.0, _ELSEWHERE: 1.0}.get(slip.why, 0.0):
            continue
        changed = plate.with_number(slip.field, slip.number)
        distances = [finding.distance for finding in findings(changed)]
        if all(distance <= 1.0 for distance in distances):
            score = slip.rarity + oddness(changed) + 0.5 * sum(distance**2 for distance in distances)
            found.append((score, slip))
    found.sort(key=lambda scored: scored[0])
    best: dict[str, tuple[float, Slip]] = {}
    for score, slip in found:
        best.setdefault(slip.field, (score, slip))
    ranked = sorted(best.values(), key=lambda scored: scored[0])
    return [slip for score, slip in ranked if score < ranked[0][0] + _CLEAR]


def _slips(plate: Plate, nameplate: Nameplate) -> Iterator[Slip]:
    """Return every single change worth trying."""
    for field, factors in _FACTORS.items():
        number = plate.numbers.get(field)
        if number is None:
            continue
        typed: Value = getattr(nameplate, field)
        for factor, why, rarity in factors:
            if _possible(field, number * factor, why, typed):
                yield Slip(field, _standard(field, number * factor, why), why, rarity)
        for swapped in _exchanged(typed):
            if _possible(field, swapped, "", typed):
                yield Slip(field, swapped, _EXCHANGED, 2.0)


def _standard(field: str, number: float, why: str) -> float:
    """Return the standard voltage near a computed one: 400 V over the root of three is 230 V."""
    if field != "voltage" or why != _ELSEWHERE:
        return number
    nearest = min(span("voltages"), key=lambda known: abs(known / number - 1.0))
    return nearest if abs(nearest / number - 1.0) < 0.02 else number


def _possible(field: str, number: float, why: str, typed: Value) -> bool:
    """Whether a change is worth a thought: hp and kW only where the other gives a size that is made."""
    if why in {HP_FOR_KW, KW_FOR_HP}:
        return (typed.unit == "hp") == (why == KW_FOR_HP) and _made(number)
    if field == "frequency":
        return any(abs(number - known) < 0.6 for known in (50.0, 60.0))
    return not (field in PERCENT_RATIOS and not 0.2 < number < 1.0)


def _exchanged(typed: Value) -> Iterator[float]:
    """Return the numbers with two neighbouring digits exchanged."""
    if typed.kind != "exact" or not typed.resolution:
        return
    digits = str(round(typed.number / typed.resolution))
    for place in range(len(digits) - 1):
        if digits[place] != digits[place + 1]:
            swapped = digits[:place] + digits[place + 1] + digits[place] + digits[place + 2 :]
            yield int(swapped) * typed.resolution


def oddness(plate: Plate) -> float:
    """Return how unusual a plate is for its size, in points of the logarithm: to choose by."""
    power = plate.numbers.get("power")
    total = 0.0 if power is None or _made(power) else limit("odd_size")
    if plate.kind not in INDUCTION:
        return total
    total += _odd_voltage(plate)
    return total if power is None else total + _odd_for_size(plate, power)


def _odd_voltage(plate: Plate) -> float:
    """Return how unusual the voltage is, in itself, for the output, and for the site."""
    voltage, power = plate.numbers.get("voltage"), plate.numbers.get("power")
    if voltage is None:
        return 0.0
    total = 0.0 if _near_any(voltage, span("voltages"), 0.02) else limit("odd_voltage")
    too_high = voltage > 1000.0 and power is not None and power < 1000.0 * limit("high_voltage_from_kw")
    if too_high or voltage < 90.0:
        total += limit("odd_extreme_voltage")
    site = plate.numbers.get("nominal_voltage", voltage)
    return total + (limit("odd_against_site") if abs(voltage / site - 1.0) > 0.15 else 0.0)


def _odd_for_size(plate: Plate, power_w: float) -> float:
    """Return half the sum of squares of what differs from a usual motor of that output."""
    n, poles = plate.numbers, poles_of(plate) or 4
    apart: list[float] = []
    if plate.kind == "induction_3ph":
        if 0.0 < (efficiency := n.get("efficiency", 0.0)) < 1.0:
            usual = typical_efficiency(power_w=power_w, poles=poles, frequency_hz=n.get("frequency", 50.0))
            apart.append(math.log((1.0 - efficiency) / (1.0 - usual)) / limit("sigma_log_losses"))
        if "power_factor" in n:
            usual = typical_power_factor(power_w=power_w, poles=poles)
            apart.append((n["power_factor"] - usual) / limit("sigma_power_factor"))
        if "locked_rotor_current_ratio" in n:
            usual = typical_locked_rotor_ratio(power_w=power_w, poles=poles)
            apart.append(math.log(n["locked_rotor_current_ratio"] / usual) / limit("sigma_log_locked_ratio"))
    slip = slip_of(plate)
    if slip is not None and slip > 0.0:
        apart.append(math.log(slip / typical_slip(power_w=power_w)) / limit("sigma_log_slip"))
    many = "odd_poles_above_12" if poles > 12 else "odd_poles_above_8" if poles > 8 else ""
    return 0.5 * sum(distance**2 for distance in apart) + (limit(many) if many else 0.0)


def _made(power_w: float) -> bool:
    """Whether an output is one that is made, in kW or in hp."""
    kilowatts, horsepower = power_w / 1000.0, power_w / HORSEPOWER_W
    return _near_any(kilowatts, span("sizes_kw"), 0.03) or _near_any(horsepower, span("sizes_hp"), 0.02)


def _near_any(number: float, known: tuple[float, ...], tolerance: float) -> bool:
    return any(abs(number / one - 1.0) <= tolerance for one in known)
