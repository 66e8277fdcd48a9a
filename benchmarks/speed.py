"""How long commands and answers take, and how much memory they want.

``python -m benchmarks.speed [FOLDER...] [--sheets 300]``

Times are processor times (user and system) of the command itself, so that what else the machine does
counts less; starts are given as ratios to a bare start of the same Python. Without folders the sheets
of ``tests/sheets`` are taken, over and over.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
import time
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import cycle, islice
from pathlib import Path
from statistics import median

ROOT = Path(__file__).resolve().parent.parent
RUNS = 9
MANY = 300
MOST_SECONDS = 20.0
MOST_MS = 60.0


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


def rows(sheets: Sequence[Path], many: int) -> Iterator[str]:
    """Yield the lines of the table."""
    yield f"load of the machine while measuring: {os.getloadavg()[0]:.1f} on {os.cpu_count()} cores"
    bare = typical(["-c", "pass"])
    for called, words in (
        ("plateside --version", ["--version"]),
        ("plateside diagnose, one sheet", ["diagnose", "--json", str(sheets[0])]),
    ):
        found = typical(["-m", "plateside", *words])
        ratio = found.seconds / bare.seconds
        shown = f"{1e3 * found.seconds:7.0f} ms  {ratio:5.1f} times a bare start"
        yield f"{called:36} {shown}  {found.megabytes:5.0f} MB"
    paths = [str(path) for path in islice(cycle(sheets), many)]
    found = run(["-m", "plateside", "diagnose", "--json", *paths])
    called = f"plateside diagnose, {many} sheets"
    yield f"{called:36} {found.seconds:7.1f} s   (target {MOST_SECONDS:g} s)  {found.megabytes:5.0f} MB"
    yield from by_kind(sheets)


def by_kind(sheets: Sequence[Path]) -> Iterator[str]:
    """Yield the time of an answer for each kind of machine, every sheet once, rules loaded before."""
    from calc.sheet_io import read_sheet  # noqa: PLC0415  counted as start-up, not as an answer
    from rules.diagnosing import diagnose  # noqa: PLC0415
    from rules.loading import load_knowledge  # noqa: PLC0415

    knowledge = load_knowledge()
    read = [read_sheet(path) for path in sheets]
    took: dict[str, list[float]] = {}
    for sheet in (read[0], *read):
        start = time.process_time()
        diagnose(sheet, knowledge=knowledge)
        took.setdefault(sheet.machine.kind, []).append(1e3 * (time.process_time() - start))
    took[read[0].machine.kind].pop(0)
    for kind, times in sorted(took.items()):
        worst = max(times)
        shown = f"{median(times):7.0f} ms median, {worst:.0f} ms worst of {len(times)}"
        yield f"{'answer, ' + kind:36} {shown}  (target {MOST_MS:g} ms)"


def main(words: Sequence[str] | None = None) -> int:
    """Print the table."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks.speed", description=__doc__)
    parser.add_argument("folders", nargs="*", type=Path, metavar="FOLDER")
    parser.add_argument("--sheets", type=int, default=MANY, help="sheets in one process")
    chosen = parser.parse_args(words)
    for line in rows(sheets_of(chosen.folders), chosen.sheets):
        print(line, flush=True)
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
