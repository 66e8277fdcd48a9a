"""Print the whole table of measurements.

``python -m benchmarks [FOLDER...] [--quick] [--cases N] [--entries N]``

Accuracy on invented cases of the plant in ``benchmarks/generator`` and on any folders given, what is
lost under other meters and odds, times and memory, key latency and bytes of the terminal, and the
casebook. The whole takes about half an hour; ``--quick`` a few minutes.
"""

from __future__ import annotations

import argparse
import subprocess
import sys
import tempfile
from collections.abc import Sequence
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
SEED = 1
CASES, QUICK_CASES = 300, 40
ENTRIES, QUICK_ENTRIES = 1_000_000, 20_000


def part(title: str, words: Sequence[str]) -> bool:
    """Print one part under its title; False when it ended with an error."""
    print(f"\n== {title}", flush=True)
    return subprocess.run([sys.executable, "-m", *words], cwd=ROOT, check=False).returncode == 0


def main() -> int:
    """Run every part that is there."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks", description=__doc__)
    parser.add_argument("folders", nargs="*", type=Path, metavar="FOLDER", help="folders of graded cases")
    parser.add_argument("--quick", action="store_true")
    parser.add_argument("--cases", type=int, help="of each folder")
    parser.add_argument("--entries", type=int, help="of the casebook")
    chosen = parser.parse_args()
    count = str(chosen.cases or (QUICK_CASES if chosen.quick else CASES))
    entries = str(chosen.entries or (QUICK_ENTRIES if chosen.quick else ENTRIES))
    with tempfile.TemporaryDirectory() as made:
        parts = [("making cases", ["benchmarks.cases", made, "--n", count, "--seed", str(SEED)])]
        for folder in (made, *(str(path.resolve()) for path in chosen.folders)):
            named = "invented plant" if folder == made else folder
            limit = ["--limit", count]
            parts += [
                (f"accuracy: {named}", ["benchmarks.accuracy", folder, "--interactive", *limit]),
                (f"robustness: {named}", ["benchmarks.robustness", folder, *limit]),
            ]
        parts += [
            ("start, time, memory", ["benchmarks.speed"]),
            ("terminal", ["benchmarks.terminal"]),
            ("casebook", ["benchmarks.casebook", "--entries", entries]),
        ]
        there = [
            (title, words) for title, words in parts if (ROOT / f"{words[0].replace('.', '/')}.py").exists()
        ]
        failed = [title for title, words in there if not part(title, words)]
        return 1 if failed else 0


if __name__ == "__main__":
    raise SystemExit(main())
