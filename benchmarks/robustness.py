"""How much accuracy is lost when meters, odds, plates and people are others.

``python -m benchmarks.robustness FOLDER... [--limit N] [--shift NAME ...]``

The loss is that of the same cases, except under ``other_odds``, which draws other ones.
"""

from __future__ import annotations

import argparse
from collections.abc import Iterator, Sequence
from pathlib import Path

from benchmarks.graded import Answer, Case, load_cases
from benchmarks.scoring import Score, score
from benchmarks.shifts import SHIFTS, shifted

MOST_POINTS = 5.0  # target: top-1 lost with all readings
HEAD = (
    f"{'shift':20}{'first right':>24}{'points lost':>12}{'log-loss':>22}{'calibration':>22}"
    f"{'healthy accused':>22}{'errors':>8}"
)


def rows(cases: Sequence[Case], answer: Answer, names: Sequence[str]) -> Iterator[str]:
    """Yield the lines of both tables, with all readings and as received; unshifted first."""
    for title, complete in (("all readings", True), ("as received", False)):
        plain = _scored(cases, answer, complete)
        yield f"{title} (points lost: target at most {MOST_POINTS:g})"
        yield HEAD
        yield _row("unshifted", plain, plain)
        for name in names:
            yield _row(name, _scored(shifted(name, cases), answer, complete), plain)


def _scored(cases: Sequence[Case], answer: Answer, complete: bool) -> Score:
    found = []
    for case in cases:
        try:
            found.append(answer(case.complete_sheet() if complete else case.sheet))
        except Exception as error:
            found.append({"error": repr(error)})
    return score(cases, found)


def _row(name: str, found: Score, plain: Score) -> str:
    figures = found.figures
    lost = 100 * (plain.top1 - found.top1)
    return (
        f"{name:20}{figures['top1'].as_share():>24}{lost:>12.1f}{figures['log_loss'].as_number():>22}"
        f"{figures['calibration_error'].as_number():>22}{figures['healthy_accused'].as_share():>22}{found.errors:>8}"
    )


def main(words: Sequence[str] | None = None) -> int:
    """Grade the cases unshifted and under every shift."""
    from benchmarks.grading import answer  # noqa: PLC0415  the rules load only where cases are graded

    parser = argparse.ArgumentParser(prog="python -m benchmarks.robustness", description=__doc__)
    parser.add_argument("folders", nargs="+", type=Path, metavar="FOLDER")
    parser.add_argument("--limit", type=int, help="cases of each folder")
    parser.add_argument("--shift", nargs="*", choices=sorted(SHIFTS), default=sorted(SHIFTS))
    chosen = parser.parse_args(words)
    for line in rows(load_cases(chosen.folders, chosen.limit), answer, chosen.shift):
        print(line, flush=True)
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
