"""One machine's readings over time, brought to one temperature; plain values for the engine.

Insulation is compared at 40 °C and winding resistance at 25 °C. A rewound or
exchanged winding begins a new history: what was read before says nothing about it.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable
from datetime import datetime
from typing import Final

import msgspec

from calc.errors import RangeError
from calc.quantities import INNER_UNIT, MEASURES
from calc.sheet import Reading
from calc.temperature import insulation_at_40_c, insulation_system, winding_resistance_at
from casebook.fold import Case, Logged

INSULATION: Final = frozenset(
    {
        "insulation_resistance",
        "insulation_between_phases",
        "cable_insulation_resistance",
        "field_insulation_resistance",
    }
)
WINDINGS: Final = frozenset(
    {
        "winding_resistance",
        "phase_resistance",
        "main_resistance",
        "auxiliary_resistance",
        "armature_resistance",
        "field_resistance",
        "series_field_resistance",
        "interpole_resistance",
    }
)
ANCHORS_C: Final = {**dict.fromkeys(INSULATION, 40.0), **dict.fromkeys(WINDINGS, 25.0)}


class Point(msgspec.Struct, frozen=True, kw_only=True):
    """One reading in a machine's history. Numbers are in the inner unit of the measure.

    ``corrected`` holds them at the anchor temperature, None where the temperature was
    not read or lies where the laws do not hold. ``kind`` is "exact", or the
    kind of the first value that is not.
    """

    time_utc: datetime
    person: str
    case: str
    text: str
    numbers: tuple[float, ...]
    kind: str = "exact"
    temperature_c: float | None = None
    corrected: tuple[float, ...] | None = None
    found: str = ""


class Series(msgspec.Struct, frozen=True, kw_only=True):
    """All readings of one measure in one state at one place, oldest first."""

    measure: str
    state: str
    place: str = ""
    unit: str = ""
    anchor_c: float | None = None
    points: tuple[Point, ...] = ()


class OwnReference(msgspec.Struct, frozen=True, kw_only=True):
    """What this winding itself read before, at 25 °C [ohm]: the best reference there is."""

    measure: str
    numbers_at_25_c: tuple[float, ...]
    time_utc: datetime
    case: str
    person: str


class MachineHistory(msgspec.Struct, frozen=True, kw_only=True):
    """What the casebook knows of one machine over time."""

    tag: str
    cases: tuple[str, ...] = ()
    series: tuple[Series, ...] = ()
    winding_new_utc: datetime | None = None

    def of(self, measure: str, *, place: str = "") -> tuple[Series, ...]:
        """Return the series of one measure, at one place if it is named."""
        return tuple(s for s in self.series if s.measure == measure and place in {"", s.place})


def moment_of_reading(reading: Reading) -> datetime | None:
    """Return when a reading says that it was taken, if it says so with date, time and zone."""
    if reading.taken_at is None:
        return None
    try:
        moment = datetime.fromisoformat(reading.taken_at)
    except ValueError:
        return None
    return moment if moment.tzinfo is not None else None


def taken_utc(logged: Logged[Reading]) -> datetime:
    """Return when a reading was taken: as it says, else when it was written down."""
    return moment_of_reading(logged.what) or logged.time_utc


def machine_history(tag: str, cases: Iterable[Case]) -> MachineHistory:
    """Return the history of one machine from its cases."""
    held = sorted(cases, key=lambda case: (case.opened_utc, case.id))
    new_since = winding_new(held)
    grouped: dict[tuple[str, str, str], list[Point]] = {}
    for case in held:
        for logged in case.taken:
            reading = logged.what
            moment = taken_utc(logged)
            if reading.measure in ANCHORS_C and new_since is not None and moment < new_since:
                continue
            key = (reading.measure, reading.state, reading.at or "")
            grouped.setdefault(key, []).append(_point(case, logged, moment))
    return MachineHistory(
        tag=tag,
        cases=tuple(case.id for case in held),
        series=tuple(_series(key, points) for key, points in sorted(grouped.items())),
        winding_new_utc=new_since,
    )


def inner_unit(measure: str) -> str:
    """Return the unit of a measure's numbers; nothing for a ratio, or a measure that is not known here."""
    known = MEASURES.get(measure)
    return INNER_UNIT[known.dimension] if known is not None else ""


def winding_new(cases: Iterable[Case]) -> datetime | None:
    """Return when the winding was last renewed, or the machine exchanged, as far as it was recorded."""
    moments = [done.time_utc for case in cases for done in case.repairs if done.what.winding_is_new]
    moments += [
        case.closed.time_utc for case in cases if case.closed is not None and case.closed.what.winding_is_new
    ]
    return max(moments, default=None)


def _point(case: Case, logged: Logged[Reading], moment: datetime) -> Point:
    reading = logged.what
    read = [value for value in reading.values if value.is_read]
    kinds = [value.kind for value in read if value.kind != "exact"]
    warm = reading.temperature
    temperature_c = warm.number if warm is not None and warm.is_read else None
    numbers = tuple(value.number for value in read)
    return Point(
        time_utc=moment,
        person=logged.person,
        case=case.id,
        text=", ".join(value.text for value in reading.values),
        numbers=numbers,
        kind=kinds[0] if kinds else "exact",
        temperature_c=temperature_c,
        corrected=_at_anchor(case, reading, numbers, temperature_c),
        found=case.closed.what.found if case.closed is not None else "",
    )


def _at_anchor(
    case: Case, reading: Reading, numbers: tuple[float, ...], temperature_c: float | None
) -> tuple[float, ...] | None:
    """Bring the values of a reading to their anchor temperature; None where no law does that."""
    if temperature_c is None or reading.measure not in ANCHORS_C:
        return None
    system = None
    if reading.measure != "cable_insulation_resistance":  # the plate tells of the winding only
        system = insulation_system(case.machine.nameplate.insulation_class)
    try:
        if reading.measure in INSULATION:
            values = [
                insulation_at_40_c(insulation_ohm=ohm, winding_c=temperature_c, system=system)
                for ohm in numbers
            ]
        else:
            wanted_c = ANCHORS_C[reading.measure]
            values = [
                winding_resistance_at(resistance_ohm=ohm, measured_c=temperature_c, wanted_c=wanted_c)
                for ohm in numbers
            ]
    except RangeError:
        return None
    known = tuple(value for value in values if value is not None)
    return known if len(known) == len(numbers) else None


def _series(key: tuple[str, str, str], points: list[Point]) -> Series:
    measure, state, place = key
    return Series(
        measure=measure,
        state=state,
        place=place,
        unit=inner_unit(measure),
        anchor_c=ANCHORS_C.get(measure),
        points=tuple(sorted(points, key=lambda point: point.time_utc)),
    )


def own_references(
    history: MachineHistory, *, leave_out: str = "", spoilt_by: Collection[str] = ()
) -> dict[str, OwnReference]:
    """Return, per winding measure, the newest whole reading at 25 °C that can serve as reference.

    ``leave_out`` is the case at hand. ``spoilt_by`` are faults that change a winding: a
    reading of a case that was closed with one of them is no reference. Readings
    without a temperature, or with an open or limited value, are none either.
    """
    best: dict[str, OwnReference] = {}
    for series in history.series:
        if series.measure not in WINDINGS:
            continue
        for point in series.points:
            if point.case == leave_out or point.corrected is None or point.kind != "exact":
                continue
            if set(point.found.split("+")) & set(spoilt_by):
                continue
            known = best.get(series.measure)
            if known is None or known.time_utc <= point.time_utc:
                best[series.measure] = _reference(series.measure, point, point.corrected)
    return best


def _reference(measure: str, point: Point, numbers: tuple[float, ...]) -> OwnReference:
    return OwnReference(
        measure=measure,
        numbers_at_25_c=numbers,
        time_utc=point.time_utc,
        case=point.case,
        person=point.person,
    )
