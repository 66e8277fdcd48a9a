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
    if why == HP_FOR_KW and typed.unit == "hp":
        return False
    if why == KW_FOR_HP and typed.unit != "hp":
        return False
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
    """Return how unusual a plate is for its size (half a sum of squares), to choose between explanations."""
    n = plate.numbers
    power = n.get("power")
    total = 0.0 if power is None or _made(power) else 1.0
    if "voltage" in n and plate.kind in INDUCTION:
        total += 0.0 if _near_any(n["voltage"], span("voltages"), 0.02) else 1.5
        if power is not None and n["voltage"] > 1000.0 and power < 1000.0 * limit("high_voltage_from_kw"):
            total += 3.0
        total += 3.0 if n["voltage"] < 90.0 else 0.0
        total += 3.0 if abs(n["voltage"] / n.get("nominal_voltage", n["voltage"]) - 1.0) > 0.15 else 0.0
    if power is None or plate.kind not in INDUCTION:
        return total
    poles = poles_of(plate) or 4
    if plate.kind == "induction_3ph":
        if "efficiency" in n and n["efficiency"] < 1.0:
            usual = typical_efficiency(power_w=power, poles=poles, frequency_hz=n.get("frequency", 50.0))
            total += 0.5 * (math.log((1.0 - n["efficiency"]) / (1.0 - usual)) / 0.35) ** 2
        if "power_factor" in n:
            total += (
                0.5 * ((n["power_factor"] - typical_power_factor(power_w=power, poles=poles)) / 0.045) ** 2
            )
        if (ratio := n.get("locked_rotor_current_ratio")) is not None:
            usual = typical_locked_rotor_ratio(power_w=power, poles=poles)
            total += 0.5 * (math.log(ratio / usual) / 0.2) ** 2
    slip = slip_of(plate)
    if slip is not None and slip > 0.0:
        total += 0.5 * (math.log(slip / typical_slip(power_w=power)) / 0.4) ** 2
    return total + (2.0 if poles > 12 else 0.7 if poles > 8 else 0.0)


def _made(power_w: float) -> bool:
    return _near_any(power_w / 1000.0, span("sizes_kw"), 0.03) or _near_any(
        power_w / HORSEPOWER_W, span("sizes_hp"), 0.02
    )


def _near_any(number: float, known: tuple[float, ...], tolerance: float) -> bool:
    return any(abs(number / one - 1.0) <= tolerance for one in known)
