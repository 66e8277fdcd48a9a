"""Whether the healthy bands hold what the healthy machine reads, and how wide they are."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from benchmarks.figures import Figure, share
from benchmarks.graded import Case, Plain
from calc.quantities import MEASURES
from calc.values import ValueTextError, parse_value
from casebook.history import WINDINGS

AT_REST = frozenset({"isolated", "no_load", "spun", "starting"})
"""States whose healthy reading does not hang on the load of the day; a faulty case's twin counts there."""
_COPPER_ZERO_C = 234.5


@dataclass(frozen=True)
class BandScore:
    """How the bands of one quantity did."""

    coverage: Figure
    width: float
    """Median of (high - low) / mid."""
    reading_over_mid: float
    """Median; 1 where the band is centred."""


def score_bands(cases: Sequence[Case], answers: Sequence[Plain], *, twins: bool) -> dict[str, BandScore]:
    """Score bands per quantity on healthy cases, or with ``twins`` on faulty ones without their fault."""
    found: dict[str, list[tuple[bool, float, float]]] = {}
    for case, answer in zip(cases, answers, strict=True):
        if case.is_healthy is twins:
            continue
        for key, held in _held(case, answer):
            if not twins or key.rpartition("@")[2] in AT_REST:
                found.setdefault(key, []).append(held)
    return {key: _score(rows) for key, rows in sorted(found.items())}


def _score(rows: list[tuple[bool, float, float]]) -> BandScore:
    inside, width, ratio = (np.array(column, dtype=float) for column in zip(*rows, strict=True))
    return BandScore(share(inside), float(np.nanmedian(width)), float(np.nanmedian(ratio)))


def _held(case: Case, answer: Plain) -> Iterator[tuple[str, tuple[bool, float, float]]]:
    """Yield for each band: whether it holds the reading, its relative width, reading over middle."""
    for band in answer.get("expected") or []:
        key = f"{band['measure']}@{band['state']}"
        reading = case.truth["healthy_readings"].get(key)
        if reading is None:
            continue
        low, mid, high = (_end(band, end) for end in ("low", "mid", "high"))
        number = _number(reading) * _to_condition(band, reading)
        if math.isfinite(low + high + number):
            mid = mid or math.nan
            yield key, (low <= number <= high, (high - low) / abs(mid), number / mid)


def _end(band: Plain, name: str) -> float:
    """Return one end of a band in the inner unit."""
    if band.get(name) is None:
        return math.nan
    dimension = MEASURES[band["measure"]].dimension
    return parse_value(f"{band[name]:.9f} {band.get('unit', '')}".strip(), dimension=dimension).number


def _number(reading: Plain) -> float:
    dimension = MEASURES[reading["measure"]].dimension
    texts = reading["value"] if isinstance(reading["value"], list) else [reading["value"]]
    try:
        return float(np.mean([parse_value(str(text), dimension=dimension).number for text in texts]))
    except ValueTextError:
        return math.nan


def _to_condition(band: Plain, reading: Plain) -> float:
    """Return the factor that brings a reading to the temperature or speed that the band is given at."""
    factor = 1.0
    if reading["measure"] in WINDINGS and "temperature" in band and "temperature" in reading:
        factor *= (_COPPER_ZERO_C + _degc(band)) / (_COPPER_ZERO_C + _degc(reading))
    if reading["measure"] == "open_circuit_voltage" and "speed" in band and "speed" in reading:
        factor *= _rpm(band) / _rpm(reading)
    return factor


def _degc(given: Plain) -> float:
    return parse_value(str(given["temperature"]), dimension="temperature").number


def _rpm(given: Plain) -> float:
    return parse_value(str(given["speed"]), dimension="speed").number
