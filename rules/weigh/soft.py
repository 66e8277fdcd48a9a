"""Evidence that no circuit predicts: the complaint, what was seen, and readings with a spread per fault."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from functools import lru_cache

import numpy as np

from calc.observe import InstrumentError
from calc.sheet import Reading
from rules.amounts import amount
from rules.knowledge import Fault, Knowledge, Observation, Spread
from rules.weigh.settings import Weighing

Table = dict[str, float]
"""Log chance of one piece of evidence under each fault."""


def complaint_table(
    complaint: str, faults: Sequence[Fault], knowledge: Knowledge, kind: str, w: Weighing
) -> Table:
    """Log chance of the complaint under each fault; what a fault does not list shares what it leaves."""
    possible = [c.id for c in knowledge.complaints.values() if "any" in c.kinds or kind in c.kinds]
    table: Table = {}
    for fault in faults:
        listed = {c: p for c, p in fault.complaints.items() if c in possible}
        left = max(1.0 - sum(listed.values()), 0.02)
        rest = left / max(len(possible) - len(listed), 1)
        chance = listed.get(complaint, rest)
        table[fault.id] = w.soft_power * math.log(max(chance, w.unlisted_complaint))
    return table


def observation_table(
    name: str, answer: bool, faults: Sequence[Fault], knowledge: Knowledge, w: Weighing
) -> Table:
    """Log chance of an answer under each fault, with the observer's reliability."""
    known = knowledge.observations.get(name)
    if known is None:
        return {fault.id: 0.0 for fault in faults}
    return {fault.id: w.soft_power * math.log(answer_chance(known, fault, answer)) for fault in faults}


def answer_chance(known: Observation, fault: Fault, answer: bool) -> float:
    """Chance that the answer is noted under a fault."""
    there = fault.observations.get(known.id, known.base_rate)
    # The listed chances are of the answer as people give it; the reliability only keeps them from the ends.
    slack = 0.3 * (1.0 - known.reliability)
    yes = min(max(there, slack), 1.0 - slack)
    return yes if answer else 1.0 - yes


def spread_of(fault: Fault, healthy: Fault | None, measure: str, state: str) -> Spread | None:
    """Return the spread of a reading under a fault, falling back to the healthy machine's."""
    for holder in (fault, healthy):
        if holder is not None:
            found = holder.readings.get(f"{measure}@{state}") or holder.readings.get(measure)
            if found is not None:
                return found
    return None


@lru_cache(maxsize=4096)
def shape(spread: Spread) -> tuple[bool, float, float]:
    """Whether a spread is logarithmic, its centre (log or plain), and one sigma."""
    centre = amount(spread.median)
    if spread.factor is not None:
        return True, math.log(max(centre, 1e-12)), math.log(max(spread.factor, 1.02))
    return False, centre, amount(spread.sigma or "1")


def direct_tables(
    readings: Sequence[Reading],
    faults: Sequence[Fault],
    knowledge: Knowledge,
    instruments: Mapping[str, InstrumentError],
    w: Weighing,
) -> dict[str, Table]:
    """Log density of every reading without a circuit, under each fault, by the reading's key.

    Readings of one family are weighed together: each is conditioned on those before it.
    """
    healthy = knowledge.faults.get("healthy")
    tables: dict[str, Table] = {}
    before: dict[str, list[Reading]] = {}
    order = [m for family in w.families.values() for m in family.measures]
    ranked = sorted(readings, key=lambda r: (order.index(r.measure) if r.measure in order else -1, r.key))
    for reading in ranked:
        family = next((n for n, f in w.families.items() if reading.measure in f.measures), reading.key)
        rho = w.families[family].correlation if family in w.families else 0.0
        table: Table = {}
        earlier = before.get(family, [])
        known: dict[tuple[Spread | None, ...], float] = {}  # most faults leave a reading as it is
        for fault in faults:
            spreads = tuple(spread_of(fault, healthy, r.measure, r.state) for r in (reading, *earlier))
            if spreads not in known:
                known[spreads] = _density(reading, earlier, fault, healthy, instruments, rho, w.spread_nu)
            table[fault.id] = known[spreads]
        tables[_unused(reading.key, tables)] = table
        before.setdefault(family, []).append(reading)
    return tables


def _unused(key: str, tables: Mapping[str, Table]) -> str:
    while key in tables:
        key += "'"
    return key


def worst(reading: Reading) -> float:
    """Of several values the one that tells: the smallest resistance, else the largest value."""
    numbers = [v.number for v in reading.values if v.is_read]
    if not numbers:
        return math.nan
    low = reading.measure.endswith("resistance") or "insulation" in reading.measure
    return min(numbers) if low else max(numbers)


def _standard(
    reading: Reading, fault: Fault, healthy: Fault | None, instruments: Mapping[str, InstrumentError]
) -> tuple[float, float] | None:
    """Standardised deviation and sigma of one reading under a fault."""
    spread = spread_of(fault, healthy, reading.measure, reading.state)
    value = worst(reading)
    if spread is None or math.isnan(value):
        return None
    logarithmic, centre, sigma = shape(spread)
    meter = instruments.get(reading.measure, InstrumentError(share=0.05))
    if logarithmic:
        number = min(value, 1e12)
        step = max((v.resolution for v in reading.values), default=0.0)
        blur = math.hypot(meter.share, (meter.floor + 0.3 * step) / max(number, 1e-9))
        total = math.hypot(sigma, min(blur, 2.0))
        return (math.log(max(number, 1e-12)) - centre) / total, total
    total = math.hypot(sigma, meter.share * abs(value) + meter.floor)
    return (min(value, 1e12) - centre) / total, total


def _density(
    reading: Reading,
    before: Sequence[Reading],
    fault: Fault,
    healthy: Fault | None,
    instruments: Mapping[str, InstrumentError],
    rho: float,
    nu: float,
) -> float:
    own = _standard(reading, fault, healthy, instruments)
    if own is None:
        return 0.0
    u, total = own
    earlier = [s[0] for r in before if (s := _standard(r, fault, healthy, instruments)) is not None]
    mean, shrink = _conditioned(earlier, rho)
    sigma = total * shrink
    # A bound above (">5 Gohm") speaks only of what lies beyond it.
    if any(v.kind == "above" for v in reading.values):
        return math.log(max(_beyond((u - mean) / shrink), 1e-9))
    t = (u - mean) / shrink
    constant = math.lgamma((nu + 1) / 2) - math.lgamma(nu / 2) - 0.5 * math.log(nu * math.pi)
    return constant - math.log(sigma) - 0.5 * (nu + 1.0) * math.log1p(t * t / nu)


def _conditioned(earlier: Sequence[float], rho: float) -> tuple[float, float]:
    """Mean and sigma of one of a family, given others with equal correlation (normal regression)."""
    n = len(earlier)
    if n == 0 or rho == 0.0:
        return 0.0, 1.0
    gain = rho / (1.0 + (n - 1) * rho)
    return gain * sum(earlier), math.sqrt(max(1.0 - n * rho * gain, 0.05))


def _beyond(u: float) -> float:
    return 0.5 * math.erfc(u / math.sqrt(2.0))


def reading_text(reading: Reading) -> str:
    """A reading as it was typed."""
    return " / ".join(value.text if value.is_read else "-" for value in reading.values)


def mean_table(tables: Sequence[Table], odds: Mapping[str, float]) -> float:
    """What an average fault says to the same evidence: the log mean over faults, summed over pieces."""
    ids = list(odds)
    weights = np.array([odds[i] for i in ids])
    weights = weights / weights.sum()
    total = 0.0
    for table in tables:
        logs = np.array([table[i] for i in ids])
        top = logs.max()
        total += top + math.log(float((weights * np.exp(logs - top)).sum()))
    return total
