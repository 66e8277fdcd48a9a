"""Grade folders of cases and print the table of accuracy.

``python -m benchmarks.accuracy FOLDER... [--limit N] [--shift NAME] [--interactive]
[--per-fault] [--short] [--json FILE]``

Every case is answered three times: as received, with every reading that could be had and, with
``--interactive``, in a visit that answers up to eight proposals. The same folders give the same
table, except for its times.
"""

from __future__ import annotations

import argparse
import copy
import json
import sys
import time
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from benchmarks import accuracy_table
from benchmarks.graded import Answer, Case, Plain, load_cases
from benchmarks.healthy_bands import BandScore, score_bands
from benchmarks.scoring import Score, score
from benchmarks.shifts import SHIFTS, shifted
from benchmarks.visits import Visits, visit_all


@dataclass
class Timed:
    """Answers one sheet after the other, and keeps the process time of each. [ms]"""

    answer: Answer
    took_ms: list[float] = field(default_factory=list)

    def __call__(self, sheet: Plain) -> Plain:
        """Answer one sheet; what is raised becomes an answer of no worth."""
        start = time.process_time()
        try:
            return self.answer(copy.deepcopy(sheet))
        except Exception as error:
            return {"faults": [], "next": [], "expected": [], "error": repr(error)}
        finally:
            self.took_ms.append(1e3 * (time.process_time() - start))


@dataclass(frozen=True)
class Report:
    """Everything that one grading found."""

    stages: dict[str, Score]
    bands: dict[str, dict[str, BandScore]]
    visits: Visits | None
    took_ms: tuple[float, ...]


def grade(cases: Sequence[Case], answer: Answer, *, interactive: bool) -> Report:
    """Answer every case as received, with all readings, and in a visit."""
    timed = Timed(answer)
    received = [timed(case.sheet) for case in cases]
    complete = [timed(case.complete_sheet()) for case in cases]
    stages = {"as received": score(cases, received), "all readings": score(cases, complete)}
    bands = {
        "healthy cases, as received": score_bands(cases, received, twins=False),
        "healthy cases, all readings": score_bands(cases, complete, twins=False),
        "healthy twins of faulty cases, at rest or no load, as received": score_bands(
            cases, received, twins=True
        ),
    }
    visits = visit_all(cases, timed) if interactive else None
    if visits is not None:
        stages["interactive"] = score(cases, visits.answers)
    return Report(stages, bands, visits, tuple(timed.took_ms))


def arguments(words: Sequence[str] | None = None) -> argparse.Namespace:
    """Read the command line."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks.accuracy", description=__doc__)
    parser.add_argument("folders", nargs="+", type=Path, metavar="FOLDER")
    parser.add_argument("--limit", type=int, help="cases of each folder")
    parser.add_argument("--shift", choices=sorted(SHIFTS), help="change the cases first")
    parser.add_argument(
        "--interactive", action="store_true", help="let the tool ask for up to 8 more readings"
    )
    parser.add_argument("--per-fault", action="store_true", help="add a table per fault")
    parser.add_argument("--short", action="store_true", help="without the bands of the healthy cases")
    parser.add_argument("--json", type=Path, metavar="FILE", help="write all figures there as well")
    return parser.parse_args(words)


def main(words: Sequence[str] | None = None) -> int:
    """Grade, print, and write what was asked for."""
    from benchmarks.grading import answer  # noqa: PLC0415  the rules load only where cases are graded

    chosen = arguments(words)
    try:
        cases = load_cases(chosen.folders, chosen.limit)
    except FileNotFoundError as error:
        print(error, file=sys.stderr)
        return 2
    if chosen.shift:
        cases = shifted(chosen.shift, cases)
    report = grade(cases, answer, interactive=chosen.interactive)
    print(accuracy_table.text(report, per_fault=chosen.per_fault, short=chosen.short))
    if chosen.json:
        plain: dict[str, Any] = accuracy_table.plain(report)
        chosen.json.write_text(json.dumps({"shift": chosen.shift, **plain}, indent=1), encoding="utf-8")
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
