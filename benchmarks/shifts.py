"""Graded cases as another plant would have them: coarser meters, slips of the pen, other odds, bare plates.

Every shift is drawn from a seed of its own name and the case's, so that the same case is always
changed in the same way, whatever stands beside it.
"""

from __future__ import annotations

import copy
import zlib
from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import replace
from itertools import cycle, islice
from typing import TypeAlias

import numpy as np

from benchmarks.graded import Case, Plain
from benchmarks.texts import number_of, shown, stepped, turned, unit_of, values_of, with_values
from casebook.history import WINDINGS

Random: TypeAlias = np.random.Generator
Change: TypeAlias = Callable[[Plain], Plain]

OHM_STEP = 0.1
OHM_LEADS = 0.2
OHM_CONTINUITY = 1e5  # above it a meter shows an open circuit, which leads do not change
SLIP_CHANCE = 0.02
FLIP_CHANCE = 0.10
HEALTHY_SHARE = 0.35
CLAMP_GAIN = 0.03
VOLT_GAIN = 0.01
CLAMP_STEPS = (
    (5.0, 0.1),
    (50.0, 0.5),
    (np.inf, 1.0),
)  # up to a largest reading of so many A: step of the display
FEW_FIELDS = ("power", "voltage", "current", "speed")
_PREFIXES = {
    "ohm": "kohm",
    "Mohm": "kohm",
    "V": "mV",
    "A": "mA",
    "W": "kW",
    "kW": "W",
    "kV": "V",
    "kohm": "ohm",
}
_NO_POINT = frozenset({"degC", "dB"})  # read in whole numbers: there two digits change places
_CLAMPED = frozenset({"line_current", "main_current", "auxiliary_current", "armature_current"})
_VOLTS = frozenset({"supply_voltage", "armature_voltage", "field_voltage", "capacitor_voltage"})


def shifted(name: str, cases: Sequence[Case]) -> list[Case]:
    """Return cases changed by one of :data:`SHIFTS`."""
    return SHIFTS[name](cases)


def coarse_ohms(case: Case, random: Random) -> Case:
    """Every ohmmeter shows steps of 0.1 ohm, and 0.2 ohm of leads with it."""
    return _each_reading(case, _coarse_ohm)


def coarse_meters(case: Case, random: Random) -> Case:
    """One clamp and one voltmeter a case, off by up to 3 and 1 per cent, with coarse steps."""
    clamp = 1.0 + random.uniform(-CLAMP_GAIN, CLAMP_GAIN)
    volts = 1.0 + random.uniform(-VOLT_GAIN, VOLT_GAIN)
    return _each_reading(case, lambda reading: _coarse_meter(reading, clamp, volts))


def gross_slips(case: Case, random: Random) -> Case:
    """One reading in fifty is noted wrongly: decimal point, digits, order of the phases, prefix."""
    keys = sorted({*case.truth["readings"], *map(_key, case.sheet.get("readings") or [])})
    wrong = {key: int(random.integers(3)) for key in keys if random.random() < SLIP_CHANCE}
    up = bool(random.integers(2))
    places = random.permutation(3)

    def slip(reading: Plain) -> Plain:
        kind = wrong.get(_key(reading))
        return reading if kind is None else _slipped(reading, kind, up, places)

    return _each_reading(case, slip, healthy=False)


def observation_noise(case: Case, random: Random) -> Case:
    """One answer in ten to a yes-or-no question is the wrong one."""
    found = sorted({*case.truth["observations"], *(case.sheet.get("observations") or {})})
    flipped = {name for name in found if random.random() < FLIP_CHANCE}

    def flip(observations: Plain) -> Plain:
        return {name: answer is not (name in flipped) for name, answer in observations.items()}

    sheet = {**case.sheet, "observations": flip(case.sheet.get("observations") or {})}
    return replace(case, sheet=sheet, truth={**case.truth, "observations": flip(case.truth["observations"])})


def few_plate_fields(case: Case, random: Random) -> Case:
    """The plate tells power, voltage, current and speed."""
    return _with_plate(case, FEW_FIELDS)


def no_plate(case: Case, random: Random) -> Case:
    """The plate is painted over."""
    return _with_plate(case, ())


def other_odds(cases: Sequence[Case]) -> list[Case]:
    """As many cases, of which 35 in 100 are healthy and every fault is as common as the next."""
    counts = Counter(case.truth["fault"] for case in cases)
    faults = sorted(fault for fault in counts if fault != "healthy")
    healthy = round(HEALTHY_SHARE * len(cases)) if counts["healthy"] else 0
    each, more = divmod(len(cases) - healthy, max(len(faults), 1))
    wanted = {fault: each + (place < more) for place, fault in enumerate(faults)} | {"healthy": healthy}
    found = []
    for fault, number in wanted.items():
        pool = [case for case in cases if case.truth["fault"] == fault]
        found += list(islice(cycle(pool), number)) if pool else []
    return found


def _one_by_one(change: Callable[[Case, Random], Case]) -> Callable[[Sequence[Case]], list[Case]]:
    def all_of(cases: Sequence[Case]) -> list[Case]:
        return [
            change(case, np.random.default_rng(zlib.crc32(f"{change.__name__} {case.name}".encode())))
            for case in cases
        ]

    return all_of


SHIFTS: dict[str, Callable[[Sequence[Case]], list[Case]]] = {
    "other_odds": other_odds,
    **{
        change.__name__: _one_by_one(change)
        for change in (coarse_ohms, coarse_meters, gross_slips, few_plate_fields, no_plate, observation_noise)
    },
}


def _key(reading: Plain) -> str:
    return f"{reading['measure']}@{reading['state']}"


def _each_reading(case: Case, change: Change, *, healthy: bool = True) -> Case:
    """Change every reading of sheet and truth; with ``healthy`` what the healthy machine reads as well."""
    sheet = {**case.sheet, "readings": [change(reading) for reading in case.sheet.get("readings") or []]}
    parts = ("readings", "healthy_readings") if healthy else ("readings",)
    truth = dict(case.truth)
    for part in parts:
        truth[part] = {key: change(reading) for key, reading in case.truth[part].items()}
    return replace(case, sheet=sheet, truth=truth)


def _with_plate(case: Case, fields: Sequence[str]) -> Case:
    sheet = copy.deepcopy(case.sheet)
    plate = sheet["machine"].get("nameplate") or {}
    sheet["machine"]["nameplate"] = {name: plate[name] for name in fields if name in plate}
    return replace(case, sheet=sheet)


def _coarse_ohm(reading: Plain) -> Plain:
    if reading["measure"] not in WINDINGS:
        return reading
    return with_values(reading, [_through_leads(text) for text in values_of(reading)])


def _through_leads(text: str) -> str:
    ohm = number_of(text, "resistance")
    return text if ohm is None or ohm > OHM_CONTINUITY else stepped(ohm + OHM_LEADS, OHM_STEP, "ohm")


def _coarse_meter(reading: Plain, clamp: float, volts: float) -> Plain:
    measure = reading["measure"]
    if measure not in _CLAMPED | _VOLTS:
        return reading
    dimension, unit, gain = ("current", "A", clamp) if measure in _CLAMPED else ("voltage", "V", volts)
    numbers = [number_of(text, dimension) for text in values_of(reading)]
    largest = max((x for x in numbers if x is not None), default=0.0)
    step = next(step for top, step in CLAMP_STEPS if largest < top) if measure in _CLAMPED else 1.0
    texts = [
        text if x is None else stepped(x * gain, step, unit)
        for x, text in zip(numbers, values_of(reading), strict=True)
    ]
    return with_values(reading, texts)


def _slipped(reading: Plain, kind: int, up: bool, places: np.ndarray) -> Plain:
    texts = values_of(reading)
    if kind == 0 and len(texts) == 3:
        return with_values(reading, [texts[int(place)] for place in places])
    if kind == 1 and all(unit_of(text) in _PREFIXES for text in texts):
        return with_values(reading, [f"{text.split()[0]} {_PREFIXES[unit_of(text)]}" for text in texts])
    at = int(places[0]) % len(texts)
    if unit_of(texts[at]) in _NO_POINT:
        texts[at] = turned(texts[at])
    else:
        texts[at] = shown(texts[at], 10.0 if up else 0.1)
    return with_values(reading, texts)
