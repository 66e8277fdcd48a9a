"""What the shop's own confirmed faults say about the odds, and how well the first suspects did.

Only faults confirmed by teardown or repair count. The shipped odds are a Dirichlet
prior with the weight of a few cases; the shop's counts are added to it. Each shift can be shown and left
out. Odds never open the gate, learned odds least of all.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Mapping
from statistics import median
from typing import Final

import msgspec

from casebook.store import Outcome

CONFIRMED: Final = frozenset({"teardown", "repair"})
PRIOR_CASES: Final = 5.0
# Size classes by rated output, in W: decades, as motor lists are kept. Below 1 kW machines have
# other tolerances (IEC 60034-1), above 100 kW other windings and starting.
SIZE_EDGES_W: Final = (1e3, 1e4, 1e5)
_BINS: Final = (0.0, 0.1, 0.25, 0.5, 0.75, 0.9, 1.0)


class LearnedCounts(msgspec.Struct, frozen=True, kw_only=True):
    """Confirmed faults of one machine kind and size class, as plain values for the engine.

    A case with two faults counts half for each, so ``faults`` sums to ``cases``.
    ``observations[fault][observation]`` is (cases with yes, cases with no).
    """

    kind: str
    size: int | None = None
    cases: int = 0
    faults: dict[str, float] = {}
    complaints: dict[str, dict[str, float]] = {}
    observations: dict[str, dict[str, tuple[float, float]]] = {}


class Shift(msgspec.Struct, frozen=True, kw_only=True):
    """How one starting chance was moved by the shop's own cases."""

    fault: str
    shipped: float
    shifted: float
    cases: float


class Bin(msgspec.Struct, frozen=True, kw_only=True):
    """Reliability of the odds: of faults shown between ``low`` and ``high``, how many were found."""

    low: float
    high: float
    shown: int
    mean: float
    found: float


class Score(msgspec.Struct, frozen=True, kw_only=True):
    """How well the odds did on one kind ("" is all kinds), over confirmed cases that showed odds."""

    kind: str
    cases: int
    first_right: int
    first_right_in_part: int
    in_first_three: int
    readings: float
    minutes: float
    reliability: tuple[Bin, ...] = ()

    @property
    def first_right_share(self) -> float:
        """Share of cases whose first suspect was what was found; nan without cases."""
        return self.first_right / self.cases if self.cases else float("nan")


def size_class(power_w: float | None, *, edges_w: tuple[float, ...] = SIZE_EDGES_W) -> int | None:
    """Return the size class of a rated output [W]: 0 below the first edge; None if the plate is silent."""
    return None if power_w is None else sum(power_w >= edge for edge in edges_w)


def learned_counts(outcomes: Iterable[Outcome], *, kind: str, power_w: float | None = None) -> LearnedCounts:
    """Count the confirmed faults on machines of a kind and the size class of ``power_w`` (None: any)."""
    size = size_class(power_w)
    cases = 0
    faults: dict[str, float] = {}
    complaints: dict[str, dict[str, float]] = {}
    seen: dict[str, dict[str, tuple[float, float]]] = {}
    for outcome in outcomes:
        if outcome.kind != kind or outcome.confirmed not in CONFIRMED or not outcome.found:
            continue
        if size is not None and size_class(outcome.power_w) != size:
            continue
        cases += 1
        found = outcome.found.split("+")
        for fault in found:
            share = 1 / len(found)
            faults[fault] = faults.get(fault, 0.0) + share
            _add(complaints.setdefault(fault, {}), outcome.complaint, share)
            _tally(seen.setdefault(fault, {}), outcome.observations, share)
    return LearnedCounts(
        kind=kind, size=size, cases=cases, faults=faults, complaints=complaints, observations=seen
    )


def _add(counts: dict[str, float], name: str, share: float) -> None:
    counts[name] = counts.get(name, 0.0) + share


def _tally(counts: dict[str, tuple[float, float]], observations: Mapping[str, bool], share: float) -> None:
    for name, answer in observations.items():
        yes, no = counts.get(name, (0.0, 0.0))
        counts[name] = (yes + share, no) if answer else (yes, no + share)


def shifted_odds(
    shipped: Mapping[str, float],
    counts: Mapping[str, float],
    weight: float = PRIOR_CASES,
    *,
    within: Mapping[str, str] | None = None,
) -> dict[str, float]:
    """Return starting odds after the shop's own counts: the mean of a Dirichlet distribution.

    ``shipped`` sums to 1 and counts as ``weight`` cases. ``within`` maps a refinement to the
    parent that carries its sum. Faults that ``shipped`` does not know count as "other" if
    it has that, else not at all. Without counts the shipped odds come back.
    """
    total = sum(shipped.values())
    if not total > 0 or not weight > 0:
        raise ValueError("shipped odds and their weight must be above zero")
    known = _known_counts(shipped, counts, within or {})
    cases = sum(known.values())
    return {
        fault: (weight * odds / total + known.get(fault, 0.0)) / (weight + cases)
        for fault, odds in shipped.items()
    }


def _known_counts(
    shipped: Mapping[str, float], counts: Mapping[str, float], within: Mapping[str, str]
) -> dict[str, float]:
    known: dict[str, float] = {}
    for fault, count in counts.items():
        parent = fault if fault in shipped else within.get(fault, "other")
        if parent in shipped:
            known[parent] = known.get(parent, 0.0) + count
    return known


def shifted_chance(shipped: float, yes: float, no: float, weight: float = PRIOR_CASES) -> float:
    """Return the chance of an observation after the shop's own counts: the mean of a Beta distribution."""
    return (weight * shipped + yes) / (weight + yes + no)


def shifts(shipped: Mapping[str, float], shifted: Mapping[str, float], counts: LearnedCounts) -> list[Shift]:
    """Return what moved, the largest change first, to be shown before it is used."""
    moved = [
        Shift(
            fault=fault,
            shipped=before,
            shifted=shifted.get(fault, before),
            cases=counts.faults.get(fault, 0.0),
        )
        for fault, before in shipped.items()
        if abs(shifted.get(fault, before) - before) > 1e-9
    ]
    return sorted(moved, key=lambda shift: -abs(shift.shifted - shift.shipped))


def scoreboard(outcomes: Iterable[Outcome]) -> list[Score]:
    """Return how well the odds did: all kinds first (kind ""), then each kind by name."""
    tallies: dict[str, _Tally] = {}
    for outcome in outcomes:
        if outcome.confirmed in CONFIRMED and outcome.found and outcome.odds:
            for kind in ("", outcome.kind):
                tallies.setdefault(kind, _Tally()).add(outcome)
    return [tallies[kind].score(kind) for kind in sorted(tallies)]


class _Tally:
    """Counts that grow case by case, so that a large casebook needs no memory."""

    def __init__(self) -> None:
        self.right = self.in_part = self.in_three = 0
        self.readings: list[int] = []
        self.minutes: list[float] = []
        self.bins = [[0, 0.0, 0] for _ in _BINS[1:]]  # shown, sum of odds, found

    def add(self, outcome: Outcome) -> None:
        """Count one confirmed case."""
        found = set(outcome.found.split("+"))
        ranked = [set(fault.split("+")) for fault in _ranked(outcome)]
        self.right += ranked[0] == found
        self.in_part += bool(ranked[0] & found)
        self.in_three += found in ranked[:3]
        self.readings.append(outcome.readings)
        self.minutes.append(outcome.minutes)
        for fault, probability in outcome.odds.items():
            one = self.bins[min(bisect_right(_BINS, probability), len(self.bins)) - 1]
            one[0] += 1
            one[1] += probability
            one[2] += set(fault.split("+")) == found

    def score(self, kind: str) -> Score:
        """Return the counts as shares and medians."""
        return Score(
            kind=kind,
            cases=len(self.readings),
            first_right=self.right,
            first_right_in_part=self.in_part,
            in_first_three=self.in_three,
            readings=median(self.readings),
            minutes=median(self.minutes),
            reliability=tuple(
                Bin(low=low, high=high, shown=int(shown), mean=total / shown, found=hits / shown)
                for low, high, (shown, total, hits) in zip(_BINS, _BINS[1:], self.bins, strict=False)
                if shown
            ),
        )


def _ranked(outcome: Outcome) -> list[str]:
    return sorted(outcome.odds, key=lambda fault: (-outcome.odds[fault], fault))
