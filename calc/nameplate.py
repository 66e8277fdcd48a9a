"""What a nameplate says about itself: which fields contradict, and which one is the likely slip."""

from __future__ import annotations

import math
from collections.abc import Iterator
from itertools import pairwise

import msgspec

from calc.errors import clip
from calc.formatting import format_value, in_unit
from calc.plate_checks import Finding, findings, limit, plate_of
from calc.plate_slips import HP_FOR_KW, KW_FOR_HP, Slip, explanations
from calc.sheet import Machine, Nameplate, Rating, Value
from calc.vocabulary import PERCENT_RATIOS, PLATE_DIMENSION


class PlateRemark(msgspec.Struct, frozen=True, kw_only=True):
    """One contradiction on a nameplate.

    ``fields`` take part in it, ``says`` is the sentence for people. ``likely`` is the
    field that one slip of the pen explains, ``instead`` what it should then say, and
    ``suggestion`` the sentence; they are empty where no single slip explains it.
    """

    id: str
    fields: tuple[str, ...]
    says: str
    likely: str | None = None
    instead: str = ""
    suggestion: str = ""

    def __str__(self) -> str:
        """Say it in one line: what contradicts, and the likely slip."""
        return (
            f"{self.says}. {self.suggestion[:1].upper()}{self.suggestion[1:]}"
            if self.suggestion
            else self.says
        )


def check_plate(machine: Machine) -> list[PlateRemark]:
    """Compare the fields of a nameplate with each other.

    Parameters
    ----------
    machine : Machine
        Kind, nameplate, and the supply's nominal voltage where it is known.

    Returns
    -------
    list of PlateRemark
        One per contradiction; empty where the plate agrees or says too little.

    Notes
    -----
    Output against volts, amps, power factor and efficiency; speed against frequency
    and poles; locked-rotor ratio against code letter; amps of several ratings against
    their volts; for DC output against armature input and field power. The tolerances
    stand in ``tables/plate_checks.yaml``. A likely slip is the one field whose change
    (decimal point, hp for kW, the other voltage, the other frequency, two digits
    exchanged) makes everything agree, and that leaves the most usual machine.

    """
    plate = plate_of(machine)
    wrong = [finding for finding in findings(plate) if finding.distance > 1.0]
    apart = max((finding.distance for finding in wrong), default=0.0)
    slips = explanations(plate, machine.nameplate, apart) if apart > 1.0 else []
    remarks = [_remark(finding, slips, machine.nameplate) for finding in wrong]
    return [*remarks, *_ratings(machine.nameplate)]


def impossible(machine: Machine) -> PlateRemark | None:
    """Return the contradiction that no machine can have, whatever its make: output far from its input.

    Parameters
    ----------
    machine : Machine
        Kind and nameplate.

    Returns
    -------
    PlateRemark or None
        The remark on output against volts and amps, where they lie further apart than
        ``impossible_times`` of ``tables/plate_checks.yaml``; motors below 500 W are left alone.

    """
    n = plate_of(machine).numbers
    if not {"power", "voltage", "current"} <= n.keys() or n["power"] < 500.0:
        return None
    phases = math.sqrt(3.0) if machine.kind in {"induction_3ph", "induction_wound_rotor"} else 1.0
    apart = abs(math.log(n["power"] / (phases * n["voltage"] * n["current"] * limit("usual_share"))))
    if apart < math.log(limit("impossible_times")):
        return None
    return next((remark for remark in check_plate(machine) if remark.id == "power_balance"), None)


def _remark(finding: Finding, slips: list[Slip], nameplate: Nameplate) -> PlateRemark:
    mine = [slip for slip in slips if slip.field in finding.fields]
    if not mine:
        return PlateRemark(id=finding.id, fields=finding.fields, says=finding.says)
    said = " or ".join(_say(slip, nameplate) for slip in mine[:3])
    only = mine[0] if len({slip.field for slip in mine}) == 1 else None
    return PlateRemark(
        id=finding.id,
        fields=finding.fields,
        says=finding.says,
        likely=only.field if only else None,
        instead=_written(only, nameplate) if only else "",
        suggestion=f"{said}?",
    )


def _say(slip: Slip, nameplate: Nameplate) -> str:
    typed: Value = getattr(nameplate, slip.field)
    field, number = slip.field.replace("_", " "), _written(slip, nameplate)
    return f"{field} {number} instead of {clip(typed.text)} ({slip.why})"


def _written(slip: Slip, nameplate: Nameplate) -> str:
    """Write the number that a field should show, in the unit that was typed."""
    typed: Value = getattr(nameplate, slip.field)
    unit = {HP_FOR_KW: "hp", KW_FOR_HP: "kW"}.get(slip.why, typed.unit)
    dimension = PLATE_DIMENSION[slip.field]
    if slip.field in PERCENT_RATIOS or not unit:
        return f"{in_unit(slip.number, dimension=dimension, unit=unit):.4g}{' ' + unit if unit else ''}"
    number = in_unit(slip.number, dimension=dimension, unit=unit)
    return f"{number:.4g} {unit}" if 1e-3 < number < 1e4 else format_value(slip.number, dimension=dimension)


def _ratings(nameplate: Nameplate) -> Iterator[PlateRemark]:
    """Compare several ratings with each other: more volts, fewer amps."""
    known = [r for r in nameplate.ratings if r.voltage is not None and r.current is not None]
    for one, other in pairwise(known):
        if one.power is None and other.power is None and (says := _disagree(one, other)):
            yield PlateRemark(id="ratings", fields=("ratings",), says=says)
        if (says := _reversed(one, other)) is not None:
            yield PlateRemark(id="ratings_connection", fields=("ratings", "connection"), says=says)


def _disagree(one: Rating, other: Rating) -> str | None:
    if one.voltage is None or other.voltage is None or one.current is None or other.current is None:
        return None
    ratio = one.voltage.number * one.current.number / (other.voltage.number * other.current.number)
    if abs(math.log(ratio)) <= math.log1p(limit("ratings")):
        return None
    due = one.voltage.number * one.current.number / other.voltage.number
    return (
        f"{one.current.text} at {one.voltage.text} goes with about {format_value(due, dimension='current')} "
        f"at {other.voltage.text}; the plate says {other.current.text}"
    )


def _reversed(one: Rating, other: Rating) -> str | None:
    low, high = sorted((one, other), key=lambda rating: rating.voltage.number if rating.voltage else 0.0)
    if low.connection == "star" and high.connection == "delta" and low.voltage and high.voltage:
        return (
            f"star at {low.voltage.text} and delta at {high.voltage.text}: delta belongs to the lower voltage"
        )
    return None
