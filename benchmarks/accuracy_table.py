"""The table of accuracy as text, and as plain data for JSON."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

import numpy as np

from benchmarks.scoring import SEVERITIES, Score, per_fault
from benchmarks.visits import MOST_READINGS, SURE, Visits

if TYPE_CHECKING:
    from benchmarks.accuracy import Report
    from benchmarks.healthy_bands import BandScore

ROWS = {
    "top1": "first entry right",
    "top3": "truth among the first three",
    "log_loss": "log-loss",
    "calibration_error": "calibration error of the first entry",
    "healthy_accused": "healthy machine accused",
    "fault_missed": "fault called healthy",
    "boldly_wrong": "wrong first entry with odds of .8 or more",
    **{f"top1_{level}": f"first entry right, {level} faults" for level in SEVERITIES},
}
NUMBERS = frozenset({"log_loss", "calibration_error"})


def text(report: Report, *, per_fault: bool = False, short: bool = False) -> str:
    """Return the whole table; a short one has the bands of the healthy twins only."""
    parts = [*_stages(report), *(_visit_lines(report.visits) if report.visits else ()), *_times(report)]
    for title, bands in list(report.bands.items())[-1 if short else 0 :]:
        parts += _bands(title, bands)
    if per_fault:
        for name, found in report.stages.items():
            parts += _faults(name, found)
    return "\n".join(parts)


def _stages(report: Report) -> Iterator[str]:
    names = list(report.stages)
    yield f"{len(next(iter(report.stages.values())).marks)} cases; in brackets the 95 % interval"
    yield f"{'':40}" + "".join(f"{name:>22}" for name in names)
    for key, called in ROWS.items():
        cells = (s.figures[key] for s in report.stages.values())
        shown = (cell.as_number() if key in NUMBERS else cell.as_share() for cell in cells)
        yield f"{called:40}" + "".join(f"{cell:>22}" for cell in shown)
    yield f"{'errors':40}" + "".join(f"{s.errors:>22}" for s in report.stages.values())


def _visit_lines(visits: Visits) -> Iterator[str]:
    yield f"visits of up to {MOST_READINGS} answered proposals"
    yield f"  truth at odds of {SURE} or more: {visits.reached.as_share()}"
    yield f"  proposals that could not be had: {visits.refused.as_share()}"
    yield f"  readings used: {visits.readings_used.as_number()}"
    yield f"  proposals through a shut gate: {visits.through_shut_gate}"
    after = " ".join(f"{100 * x:.1f}" for x in visits.top1_after)
    yield f"  first entry right after 0, 1, 2 ... readings (%): {after}"


def _times(report: Report) -> Iterator[str]:
    took = np.array(report.took_ms)
    middle, high, worst = np.median(took), np.quantile(took, 0.95), np.max(took)
    yield (
        f"process time of an answer: {middle:.0f} ms median, 95 % below {high:.0f} ms,"
        f" {worst:.0f} ms worst ({len(took)} answers)"
    )


def _bands(title: str, bands: dict[str, BandScore]) -> Iterator[str]:
    yield f"90 % bands: {title}"
    for key, band in bands.items():
        yield (
            f"  {key:36} n {band.coverage.n:4}  holds {band.coverage.as_share():22}"
            f"  width {band.width:.3f}  reading/mid {band.reading_over_mid:.3f}"
        )


def _faults(name: str, found: Score) -> Iterator[str]:
    yield f"per fault, {name}"
    for fault, (n, right, chance, instead) in per_fault(found.marks).items():
        said = ", ".join(f"{other} {count}" for other, count in instead)
        yield f"  {fault:28} n {n:4}  right {right.as_share():24} mean odds {chance:.2f}  instead: {said}"


def plain(report: Report) -> dict[str, Any]:
    """Return all figures as plain data, with the mark of every case."""
    found: dict[str, Any] = {
        "stages": {
            name: {key: figure.plain() for key, figure in s.figures.items()}
            for name, s in report.stages.items()
        },
        "bands": {
            title: {
                key: {
                    "coverage": b.coverage.plain(),
                    "width": b.width,
                    "reading_over_mid": b.reading_over_mid,
                }
                for key, b in bands.items()
            }
            for title, bands in report.bands.items()
        },
        "marks": {
            name: {m.case.name: [m.said, round(m.confidence, 4), round(m.chance, 4)] for m in s.marks}
            for name, s in report.stages.items()
        },
        "took_ms": [round(x, 2) for x in report.took_ms],
    }
    if report.visits:
        found["visits"] = {
            "reached": report.visits.reached.plain(),
            "refused": report.visits.refused.plain(),
            "through_shut_gate": report.visits.through_shut_gate,
            "top1_after": report.visits.top1_after,
        }
    return found
