"""How long commands and answers take, and how much memory they want.

``python -m benchmarks.speed [FOLDER...] [--sheets 300]``

Times are processor times (user and system) of the command itself, so that what else the machine does
counts less; starts and answers are given as ratios to a bare start of the same Python too. Without
folders the sheets of ``tests/sheets`` are taken, over and over.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import partial
from itertools import cycle, islice
from pathlib import Path
from statistics import median

from benchmarks.rows import Row, at_most, middle_and_worst, told

ROOT = Path(__file__).resolve().parent.parent
RUNS = 9
MANY = 300
MOST_SECONDS = 20.0
MOST_MS = {"induction_3ph": 60.0}
MOST_MS_OF_OTHERS = 40.0
RUNS_OF_A_SHEET = 3


@dataclass(frozen=True)
class Run:
    """What one command took."""

    seconds: float
    megabytes: float


def run(words: Sequence[str]) -> Run:
    """Run a command of this Python to its end, and return its processor time and most memory."""
    environment = {**os.environ, "OPENBLAS_NUM_THREADS": "1"}
    with subprocess.Popen(
        [sys.executable, *words],
        cwd=ROOT,
        env=environment,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    ) as child:
        _, status, used = os.wait4(child.pid, 0)
        child.returncode = os.waitstatus_to_exitcode(status)
    if child.returncode not in {0, 1}:
        raise RuntimeError(f"{' '.join(words[:4])} ... ended with {child.returncode}")
    return Run(used.ru_utime + used.ru_stime, used.ru_maxrss / 1024)


def typical(words: Sequence[str], runs: int = RUNS) -> Run:
    """Return the median of some runs, after one that fills the caches."""
    run(words)
    found = [run(words) for _ in range(runs)]
    return Run(median(r.seconds for r in found), max(r.megabytes for r in found))


def sheets_of(folders: Sequence[Path]) -> list[Path]:
    """Return the sheets of some folders, or those of the tests."""
    return [
        path for folder in folders or [ROOT / "tests" / "sheets"] for path in sorted(folder.glob("*.yaml"))
    ]


def rows(sheets: Sequence[Path], many: int) -> Iterator[Row]:
    """Yield the lines of the table."""
    bare = typical(["-c", "pass"])
    yield at_most("start of a bare Python, processor time", 1e3 * bare.seconds, "ms", decimals=1)
    for called, words in (
        ("plateside --version", ["--version"]),
        ("plateside diagnose, one sheet", ["diagnose", "--json", str(sheets[0])]),
    ):
        found = typical(["-m", "plateside", *words])
        yield at_most(f"{called}, against a bare start", found.seconds / bare.seconds, "x", decimals=1)
    paths = [str(path) for path in islice(cycle(sheets), many)]
    found = run(["-m", "plateside", "diagnose", "--json", *paths])
    most = MOST_SECONDS if many == MANY else None
    yield at_most(f"plateside diagnose, {many} sheets", found.seconds, "s", most, decimals=1)
    yield at_most("its memory", found.megabytes, "MB")
    yield from by_kind(sheets, bare.seconds)


def by_kind(sheets: Sequence[Path], bare_s: float) -> Iterator[Row]:
    """Yield the processor time of an answer for each kind of machine; the rules are loaded before."""
    from calc.sheet_io import read_sheet  # noqa: PLC0415  counted as start-up, not as an answer
    from rules.diagnosing import diagnose  # noqa: PLC0415
    from rules.loading import load_knowledge  # noqa: PLC0415
    from tui.words import kind_name  # noqa: PLC0415

    knowledge = load_knowledge()
    read = [read_sheet(path) for path in sheets]
    diagnose(read[0], knowledge=knowledge)
    kinds: dict[str, list[float]] = {}
    for sheet in read:
        act = partial(diagnose, sheet, knowledge=knowledge)
        middle, _ = middle_and_worst(act, time.process_time, RUNS_OF_A_SHEET)
        kinds.setdefault(sheet.machine.kind, []).append(middle)
    for kind, took in sorted(kinds.items(), key=lambda item: kind_name(item[0])):
        most = MOST_MS.get(kind, MOST_MS_OF_OTHERS)
        judged = at_most(f"answer, {kind_name(kind)}", median(took), "ms", most)
        ratio = median(took) / (1e3 * bare_s)
        yield replace(judged, figure=f"{judged.figure} = {ratio:.1f} x")


def main(words: Sequence[str] | None = None) -> int:
    """Print the table."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks.speed", description=__doc__)
    parser.add_argument("folders", nargs="*", type=Path, metavar="FOLDER")
    parser.add_argument("--sheets", type=int, default=MANY, help="sheets in one process")
    chosen = parser.parse_args(words)
    return told(rows(sheets_of(chosen.folders), chosen.sheets))


if __name__ == "__main__":
    raise SystemExit(main())
