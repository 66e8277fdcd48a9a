"""What the shop's own confirmed faults say about the odds, and how well the first suspects did.

Only faults confirmed by teardown or repair count. Here they are counted; what the counts do to
odds and chances is said in one place, ``rules.learned``.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Mapping
from statistics import median
from typing import Final

import msgspec

from casebook.store import Outcome

CONFIRMED: Final = frozenset({"teardown", "repair"})
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


def size_class(power_w: float | None) -> int | None:
    """Return the size class of a rated output [W]: 0 below the first edge; None if the plate is silent."""
    return None if power_w is None else sum(power_w >= edge for edge in SIZE_EDGES_W)


def learned_counts(
    outcomes: Iterable[Outcome], *, kind: str, power_w: float | None = None, leave_out: str = ""
) -> LearnedCounts:
    """Count the confirmed faults on machines of a kind and the size class of ``power_w`` (None: any).

    ``leave_out`` is the case at hand: it is no evidence for itself.
    """
    size = size_class(power_w)
    counting = _Counting(kind, size)
    for outcome in outcomes:
        is_alike = outcome.kind == kind and (size is None or size_class(outcome.power_w) == size)
        if is_alike and is_confirmed(outcome) and outcome.case != leave_out:
            counting.add(outcome)
    return counting.counts()


def learned_groups(outcomes: Iterable[Outcome]) -> list[LearnedCounts]:
    """Count the confirmed faults by kind and size class, and once more for each kind as a whole.

    The whole (``size`` None) is what holds for a machine whose plate says no rated output.
    """
    groups: dict[tuple[str, int | None], _Counting] = {}
    for outcome in filter(is_confirmed, outcomes):
        for size in {None, size_class(outcome.power_w)}:
            key = (outcome.kind, size)
            groups.setdefault(key, _Counting(*key)).add(outcome)
    order = sorted(groups, key=lambda key: (key[0], -1 if key[1] is None else key[1]))
    return [groups[key].counts() for key in order]


def is_confirmed(outcome: Outcome) -> bool:
    """Whether a closed case says what was found, and that it was seen or cured."""
    return outcome.confirmed in CONFIRMED and bool(outcome.found)


class _Counting:
    """Counts of one kind and size class that grow case by case."""

    def __init__(self, kind: str, size: int | None) -> None:
        self.kind, self.size, self.cases = kind, size, 0
        self.faults: dict[str, float] = {}
        self.complaints: dict[str, dict[str, float]] = {}
        self.seen: dict[str, dict[str, tuple[float, float]]] = {}

    def add(self, outcome: Outcome) -> None:
        """Count one confirmed case."""
        self.cases += 1
        found = outcome.found.split("+")
        for fault in found:
            share = 1 / len(found)
            _add(self.faults, fault, share)
            _add(self.complaints.setdefault(fault, {}), outcome.complaint, share)
            _tally(self.seen.setdefault(fault, {}), outcome.observations, share)

    def counts(self) -> LearnedCounts:
        """Return what was counted."""
        return LearnedCounts(
            kind=self.kind,
            size=self.size,
            cases=self.cases,
            faults=self.faults,
            complaints=self.complaints,
            observations=self.seen,
        )


def _add(counts: dict[str, float], name: str, share: float) -> None:
    counts[name] = counts.get(name, 0.0) + share


def _tally(counts: dict[str, tuple[float, float]], observations: Mapping[str, bool], share: float) -> None:
    for name, answer in observations.items():
        yes, no = counts.get(name, (0.0, 0.0))
        counts[name] = (yes + share, no) if answer else (yes, no + share)


def scoreboard(outcomes: Iterable[Outcome]) -> list[Score]:
    """Return how well the odds did: all kinds first (kind ""), then each kind by name."""
    tallies: dict[str, _Tally] = {}
    for outcome in outcomes:
        if is_confirmed(outcome) and outcome.odds:
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
