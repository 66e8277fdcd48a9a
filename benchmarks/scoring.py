"""How good a set of answers is: first entry, log-loss, calibration, healthy machines accused."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from benchmarks.figures import Figure, Floats, calibration_error, mean, share
from benchmarks.graded import Case, Plain

LEAST_CHANCE = 1e-4  # a log-loss of 9.2 is the worst that one case can cost
BOLD = 0.8  # odds of the first entry from which a mistake is grave
SEVERITIES = ("incipient", "moderate", "gross")


@dataclass(frozen=True)
class Mark:
    """What one answer was worth."""

    case: Case
    said: str
    confidence: float
    first: bool
    in_three: bool
    chance: float

    @property
    def loss(self) -> float:
        """Logarithmic loss. [nats]"""
        return -math.log(max(self.chance, LEAST_CHANCE))


def odds_of(answer: Plain) -> dict[str, float]:
    """Return the odds of the faults of an answer; they sum to 1 unless there are none."""
    odds: dict[str, float] = {}
    for fault in answer.get("faults") or []:
        odds[fault["id"]] = odds.get(fault["id"], 0.0) + max(float(fault["probability"]), 0.0)
    total = sum(odds.values())
    return {fault: p / total for fault, p in odds.items()} if total > 0.0 else {}


def mark(case: Case, answer: Plain) -> Mark:
    """Hold one answer against the truth."""
    odds = odds_of(answer)
    order = sorted(odds, key=lambda fault: -odds[fault])
    said = order[0] if order else ""
    return Mark(
        case=case,
        said=said,
        confidence=odds.get(said, 0.0),
        first=said in case.faults,
        in_three=bool(case.faults & set(order[:3])),
        chance=sum(odds.get(fault, 0.0) for fault in case.faults),
    )


@dataclass(frozen=True)
class Score:
    """Figures of one set of answers, and the marks they come from."""

    marks: tuple[Mark, ...]
    figures: dict[str, Figure]
    errors: int

    @property
    def top1(self) -> float:
        """Share of cases whose first entry is right."""
        return self.figures["top1"].value


def score(cases: Sequence[Case], answers: Sequence[Plain]) -> Score:
    """Score the answers to some cases."""
    marks = tuple(mark(case, answer) for case, answer in zip(cases, answers, strict=True))
    first = _hits(m.first for m in marks)
    confidence = np.array([m.confidence for m in marks])
    figures = {
        "top1": share(first),
        "top3": share(_hits(m.in_three for m in marks)),
        "log_loss": mean(np.array([m.loss for m in marks])),
        "calibration_error": calibration_error(confidence, first),
        "healthy_accused": share(_hits(m.said != "healthy" for m in marks if m.case.is_healthy)),
        "fault_missed": share(_hits(m.said == "healthy" for m in marks if not m.case.is_healthy)),
        "boldly_wrong": share(_hits(not m.first and m.confidence >= BOLD for m in marks)),
        **{
            f"top1_{level}": share(
                _hits(m.first for m in marks if not m.case.is_healthy and m.case.severity == level)
            )
            for level in SEVERITIES
        },
    }
    return Score(marks, figures, sum("error" in answer for answer in answers))


def per_fault(marks: Iterable[Mark]) -> dict[str, tuple[int, Figure, float, list[tuple[str, int]]]]:
    """Return for each true fault: cases, share right, mean odds of the truth, what was said instead."""
    groups: dict[str, list[Mark]] = {}
    for one in marks:
        groups.setdefault(max(one.case.faults, key=len), []).append(one)
    return {
        fault: (
            len(found),
            share(_hits(m.first for m in found)),
            float(np.mean([m.chance for m in found])),
            Counter(m.said for m in found if not m.first).most_common(4),
        )
        for fault, found in sorted(groups.items())
    }


def _hits(flags: Iterable[bool]) -> Floats:
    return np.array([float(flag) for flag in flags])
