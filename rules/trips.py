"""Trip arithmetic: whether this current can have tripped this overload relay, and in this time.

Times and multiples are those of ``tables/trip_classes.yaml``; between them the curve of
``calc.overload_relay`` is taken. Nothing here ever speaks for a higher setting.
"""

from __future__ import annotations

import math
from functools import cache
from pathlib import Path
from typing import Final

import msgspec

from calc.overload_relay import trip_time_s
from calc.safe_yaml import read_document
from calc.sheet import CaseSheet, Reading
from rules.answer import Finding
from rules.derived.base import numbers_of, plate, readings_of
from rules.gate_record import is_overload_trip

LEG: Final = 3.0**-0.5
"""Line current to phase-leg current of a star-delta starter."""


class TripClass(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Times of one trip class, in seconds."""

    cold_from_s: float
    cold_to_s: float
    warm_to_s: float


class TripTable(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """What the standard fixes for thermal overload relays: multiples of the setting, and times."""

    source: str
    holds_at: float
    trips_at: float
    within_s: float
    warm_at: float
    """From here on the longest time from warm goes by class."""
    classes: dict[str, TripClass]


class Trip(msgspec.Struct, frozen=True):
    """What is on record about one trip: current and setting in A, time in s (nan where not read)."""

    current_a: float
    setting_a: float
    time_s: float
    about: Reading
    from_cold: bool
    class_name: str

    @property
    def multiple(self) -> float:
        """Current over setting."""
        return self.current_a / self.setting_a


@cache
def trip_table() -> TripTable:
    """Return the table beside this module."""
    document = read_document(Path(__file__).with_name("tables") / "trip_classes.yaml")
    return msgspec.convert(document.data, TripTable, strict=False)


def trip_findings(sheet: CaseSheet) -> tuple[Finding, ...]:
    """Return what the arithmetic says about an overload trip; nothing where an input is missing."""
    trip = _trip(sheet)
    if trip is None:
        return ()
    table = trip_table()
    if trip.multiple <= table.holds_at:
        return (_finding("current_cannot_have_tripped", "watch", trip, _cannot(trip, table)),)
    early_s, late_s = window_s(trip, table)
    if math.isnan(trip.time_s):
        return (_untimed(trip, table),)
    if trip.time_s < early_s:
        said = f"it tripped early: after {_time(trip.time_s)}, where {_time(early_s)} is the least to expect"
        return (_finding("relay_tripped_early", "watch", trip, said),)
    if trip.time_s > late_s:
        said = f"it tripped late: after {_time(trip.time_s)}, where {_time(late_s)} is the most to expect"
        return (_finding("relay_tripped_late", "watch", trip, f"{said}; it protects too late"),)
    within = "" if math.isinf(late_s) else f" within {_time(late_s)}"
    said = f"the relay did its job: it trips at this current{within}; look for what draws the current"
    return (_finding("relay_did_its_job", "remark", trip, said),)


def window_s(trip: Trip, table: TripTable) -> tuple[float, float]:
    """Return the earliest and the latest time in which such a relay trips, both in seconds.

    Without a class on record the quickest and the slowest class are the ends. A machine
    that ran before is taken as warm at its setting for the earliest time.
    """
    named = table.classes.get(trip.class_name)
    classes = list(table.classes.values()) if named is None else [named]
    preload = 0.0 if trip.from_cold else 1.0
    quick_s = min(one.cold_from_s for one in classes)
    early_s = trip_time_s(
        multiple=trip.multiple, threshold=table.holds_at, time_at_reference_s=quick_s, preload=preload
    )
    return early_s, max(_latest_s(trip, one, table) for one in classes)


def _latest_s(trip: Trip, named: TripClass, table: TripTable) -> float:
    """Return the longest time that the standard leaves a relay of one class."""
    if trip.multiple < table.trips_at:
        return math.inf
    if trip.multiple < table.warm_at:
        return table.within_s
    cold_s = trip_time_s(
        multiple=trip.multiple, threshold=table.trips_at, time_at_reference_s=named.cold_to_s
    )
    return cold_s if trip.from_cold else min(cold_s, named.warm_to_s)


def _trip(sheet: CaseSheet) -> Trip | None:
    """Gather current, setting, time and class of an overload trip, or None."""
    setting, current = _last(sheet, "overload_setting"), _current(sheet)
    if not is_overload_trip(sheet) or setting is None or current is None:
        return None
    setting_a, current_a = numbers_of(setting)[0], max(numbers_of(current))
    if not 0.0 < setting_a < math.inf or not 0.0 <= current_a < math.inf:
        return None
    time, trip_class = _last(sheet, "time_to_trip"), _last(sheet, "overload_class")
    return Trip(
        current_a=current_a * _leg(sheet, setting_a),
        setting_a=setting_a,
        time_s=math.nan if time is None else numbers_of(time)[0],
        about=current,
        from_cold=sheet.complaint == "trips_at_start",
        class_name="" if trip_class is None else trip_class.values[0].text.strip().upper(),
    )


def _current(sheet: CaseSheet) -> Reading | None:
    """Return the current when it trips; else the line current of the state in which it trips."""
    state = "starting" if sheet.complaint == "trips_at_start" else "loaded"
    return _last(sheet, "trip_current") or _last(sheet, "line_current", state)


def _last(sheet: CaseSheet, measure: str, state: str | None = None) -> Reading | None:
    found = [r for r in readings_of(sheet, measure) if numbers_of(r) and state in {None, r.state}]
    return found[-1] if found else None


def _leg(sheet: CaseSheet, setting_a: float) -> float:
    """Return the share of the line current that the relay carries: 0.58 in a star-delta leg."""
    rated_a = plate(sheet, "current")
    in_leg = sheet.machine.starter == "star_delta" and rated_a is not None and setting_a < 0.75 * rated_a
    return LEG if in_leg else 1.0


def _cannot(trip: Trip, table: TripTable) -> str:
    return (
        f"this current cannot have tripped it: a relay holds {table.holds_at:g} times its setting; "
        "look for a heavier load that came and went, heat at the relay, a loose joint, the wrong relay"
    )


def _untimed(trip: Trip, table: TripTable) -> Finding:
    if trip.multiple >= table.trips_at:
        said = f"the relay did its job: at {table.trips_at:g} times its setting and above it trips; "
        return _finding("relay_did_its_job", "remark", trip, f"{said}look for what draws the current")
    said = f"between {table.holds_at:g} and {table.trips_at:g} times its setting a relay may trip or hold"
    return _finding("relay_may_trip", "remark", trip, said)


def _finding(name: str, verdict: str, trip: Trip, said: str) -> Finding:
    shown = f"{trip.current_a:.3g} A is {trip.multiple:.2f} times the setting of {trip.setting_a:.3g} A"
    source = f"{trip_table().source}; times between the fixed points from a thermal curve"
    return Finding(
        id=name,
        verdict="watch" if verdict == "watch" else "remark",
        says=f"{said} ({shown})",
        source=source,
        about=trip.about.key,
    )


def _time(seconds: float) -> str:
    if seconds < 99.5:
        return f"{seconds:.2g} s"
    return f"{seconds / 60.0:.2g} min" if seconds < 595.0 else f"{seconds / 60.0:.0f} min"
