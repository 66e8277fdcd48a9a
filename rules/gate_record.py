"""What the entries of a sheet say about energising: trips, stops, runs, and readings as they were typed."""

from __future__ import annotations

import math
from typing import Final

from calc.quantities import MEASURES, RUNNING_STATES
from calc.sheet import CaseSheet, Reading
from rules.derived import numbers_of
from rules.knowledge import Knowledge

INSULATION_FLOOR_OHM: Final = 1.0e6
"""Below this no machine is energised, whatever a limit says. It stands here, and in no rule
file, so that no rule file can lower it. (Older trade minimum of 1 Mohm; IEEE 43 asks for more.)"""

STOP_COMPLAINTS: Final = frozenset({"shock_from_frame", "smoke_or_burning"})
"""These mean stop even where a rule file forgets to say so."""

INSULATION: Final = frozenset(
    {
        "insulation_resistance",
        "insulation_resistance_30s",
        "insulation_resistance_10min",
        "insulation_between_phases",
        "cable_insulation_resistance",
        "field_insulation_resistance",
    }
)
TRIP_OBSERVATIONS: Final = (
    "overload_tripped", "breaker_tripped", "fuse_blown", "drive_tripped", "thermistor_tripped",
)  # fmt: skip
OVERLOAD_TRIPS: Final = frozenset({"trips_under_load", "trips_at_start"})
"""Trips that are taken for the overload relay's while nothing on record says otherwise."""

INSTANT_TRIPS: Final = ("breaker_tripped", "fuse_blown", "drive_tripped")


def means_stop(sheet: CaseSheet, knowledge: Knowledge) -> bool:
    """Whether the complaint comes before everything else."""
    entry = knowledge.complaints.get(sheet.complaint)
    return sheet.complaint in STOP_COMPLAINTS or (entry is not None and entry.stop)


def below_floor(sheet: CaseSheet) -> Reading | None:
    """Return a recorded insulation reading below 1 Mohm, whatever its context and age, or None."""
    for reading in sheet.readings:
        if reading.measure in INSULATION and any(_is_below_floor(v.number, v.kind) for v in reading.values):
            return reading
    return None


def floor_words(low: Reading) -> str:
    """Return the sentence on an insulation reading below the floor; every line of the gate says it alike."""
    return f"{label(low)} read {typed(low)}: below 1 Mohm nothing is energised"


def _is_below_floor(number: float, kind: str) -> bool:
    if math.isnan(number):
        return False
    return number < INSULATION_FLOOR_OHM or (kind == "below" and number <= INSULATION_FLOOR_OHM)


def has_tripped(sheet: CaseSheet, knowledge: Knowledge) -> bool:
    """Whether a trip is on record, in the complaint or among the observations."""
    entry = knowledge.complaints.get(sheet.complaint)
    if entry is not None and entry.runs == "until_trip":
        return True
    named = sheet.complaint.startswith("trips") or sheet.complaint in {
        "blows_fuses", "drive_trips", "earth_fault_trip",
    }  # fmt: skip
    return named or any(sheet.observations.get(name) is True for name in TRIP_OBSERVATIONS)


def is_overload_trip(sheet: CaseSheet) -> bool:
    """Whether the trip on record is the overload relay's, as far as the entries tell."""
    instant = any(sheet.observations.get(name) is True for name in INSTANT_TRIPS)
    named = sheet.complaint in OVERLOAD_TRIPS
    other = sheet.complaint in {"trips_instantly", "blows_fuses", "drive_trips", "earth_fault_trip"}
    by_heat = any(sheet.observations.get(n) is True for n in ("overload_tripped", "thermistor_tripped"))
    return not instant and not other and (named or by_heat)


def has_run(sheet: CaseSheet) -> bool:
    """Whether a reading of the running machine is on record."""
    return any(reading.state in RUNNING_STATES and numbers_of(reading) for reading in sheet.readings)


def last(sheet: CaseSheet, ask: str) -> Reading | None:
    """Return the newest reading of ``measure@state``, or None."""
    measure, _, state = ask.partition("@")
    return sheet.last_reading(measure, state)


def label(reading: Reading) -> str:
    """Return the trade's name of what was read."""
    measure = MEASURES.get(reading.measure)
    return measure.label if measure else reading.measure


def typed(reading: Reading) -> str:
    """Return the values as they were typed."""
    return ", ".join(value.text for value in reading.values)
