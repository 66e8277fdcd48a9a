"""Print the whole table of measurements.

``python -m benchmarks [FOLDER...] [--quick] [--only PART...] [--readme] [--cases N] [--entries N]``

accuracy    invented cases of the plant in ``benchmarks/generator``, and any folders of graded cases given
robustness  what is lost under other meters, odds, plates and people
speed       starts, answers, memory, as ratios to a bare Python
terminal    first paint, key latency at rest and under load, bytes, memory, as ratios to a bare app
casebook    a million entries

All take about twenty minutes, ``--quick`` three. ``--readme`` also puts each part that ran into its
place in README.md, with the day and the machine; the other parts stay as they are.
"""

from __future__ import annotations

import argparse
import subprocess
import sys
import tempfile
from collections.abc import Iterator, Sequence
from pathlib import Path

from benchmarks import readme
from benchmarks.rows import MISSED

ROOT = Path(__file__).resolve().parent.parent
SEED = 1
CASES, QUICK_CASES = 300, 40
ENTRIES, QUICK_ENTRIES = 1_000_000, 20_000
SHEETS, QUICK_SHEETS = 300, 40
ROUNDS, QUICK_ROUNDS = 7, 3
PARTS = ("accuracy", "robustness", "speed", "terminal", "casebook")


def run(words: Sequence[str]) -> tuple[str, int]:
    """Run a module of the benchmarks, showing what it prints; return that and its exit status."""
    lines = []
    with subprocess.Popen(
        [sys.executable, "-m", *words], cwd=ROOT, stdout=subprocess.PIPE, text=True, encoding="utf-8"
    ) as child:
        assert child.stdout is not None
        for line in child.stdout:
            print(line, end="", flush=True)
            lines.append(line)
    return "".join(lines), child.returncode


def commands(part: str, chosen: argparse.Namespace, made: str) -> Iterator[tuple[str, list[str]]]:
    """Yield what a part runs: a title, and the words of the module."""
    quick = chosen.quick
    cases = str(chosen.cases or (QUICK_CASES if quick else CASES))
    if part in {"accuracy", "robustness"}:
        more = ["--interactive", "--short"] if part == "accuracy" else []
        for folder in (made, *(str(path.resolve()) for path in chosen.folders)):
            title = f"invented plant, seed {SEED}" if folder == made else Path(folder).name
            yield f"{part}: {title}", [f"benchmarks.{part}", folder, "--limit", cases, *more]
    elif part == "speed":
        yield part, ["benchmarks.speed", "--sheets", str(QUICK_SHEETS if quick else SHEETS)]
    elif part == "terminal":
        yield part, ["benchmarks.terminal", str(QUICK_ROUNDS if quick else ROUNDS)]
    else:
        entries = str(chosen.entries or (QUICK_ENTRIES if quick else ENTRIES))
        yield part, ["benchmarks.casebook", "--entries", entries]


def measure(part: str, chosen: argparse.Namespace, made: str) -> bool:
    """Run one part, put it into the README where that is asked for; False where it failed."""
    said, worst = [], 0
    for title, words in commands(part, chosen, made):
        print(f"\n== {title}", flush=True)
        text, status = run(words)
        said.append(f"{title}\n{text}")
        worst = max(worst, 0 if status == MISSED else status)
    if worst == 0 and chosen.readme and not readme.put(part, "\n".join(said), readme.machine()):
        print(f"README.md has no place for {part}", file=sys.stderr)
    return worst == 0


def arguments(words: Sequence[str] | None = None) -> argparse.Namespace:
    """Read the command line."""
    parser = argparse.ArgumentParser(
        prog="python -m benchmarks",
        description=__doc__,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("folders", nargs="*", type=Path, metavar="FOLDER", help="folders of graded cases")
    parser.add_argument("--only", nargs="+", choices=PARTS, default=PARTS, metavar="PART")
    parser.add_argument("--quick", action="store_true", help="few cases, entries and rounds")
    parser.add_argument("--readme", action="store_true", help="write what was measured into README.md")
    parser.add_argument("--cases", type=int, help="of each folder")
    parser.add_argument("--entries", type=int, help="of the casebook")
    chosen = parser.parse_args(words)
    for folder in chosen.folders:
        if not any(folder.glob("*.truth.json")):
            parser.error(f"{folder}: no graded cases (NNNN.yaml with NNNN.truth.json)")
    return chosen


def main(words: Sequence[str] | None = None) -> int:
    """Run the chosen parts; 0 where all could be measured, whatever the figures are."""
    chosen = arguments(words)
    with tempfile.TemporaryDirectory() as made:
        if {"accuracy", "robustness"} & set(chosen.only):
            count = str(chosen.cases or (QUICK_CASES if chosen.quick else CASES))
            run(["benchmarks.cases", made, "--n", count, "--seed", str(SEED)])
        failed = [part for part in chosen.only if not measure(part, chosen, made)]
        return 1 if failed else 0


if __name__ == "__main__":
    raise SystemExit(main())
