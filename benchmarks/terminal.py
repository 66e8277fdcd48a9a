"""What the screens cost: first paint, key latency at rest and under load, bytes, memory.

``python -m benchmarks.terminal [ROUNDS]``

Ratios are against a bare Textual app in the same run, start for start, because absolute times differ
between machines and moments. The exit status is 3 where a target is missed.
"""

from __future__ import annotations

import argparse
import os
import statistics
import sys
import tempfile
import time
import zlib
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path

from benchmarks.rows import Row, at_most, percentile, told
from calc.sheet_io import sheet_from_plain
from casebook.book import open_casebook
from tests.tui.helpers import KIT, MACHINE
from tests.tui.terminal import Terminal
from tui.drafts import Drafts

BARE = """
from textual.app import App
from textual.widgets import Input, Static
class Bare(App):
    def compose(self):
        yield Static("P-104")
        yield Input()
Bare().run(mouse=False)
"""
# Every weighing but the first goes on for so long, as if the case were that hard.
BUSY_S = 8.0
BUSY = f"""
import sys, time
import plateside
import rules.diagnosing as engine
once, calls = engine.diagnose, []
def again_and_again(*sheet, **more):
    calls.append(time.monotonic())
    while True:
        answer = once(*sheet, **more)
        if len(calls) == 1 or time.monotonic() > calls[-1] + {BUSY_S}:
            return answer
engine.diagnose = again_and_again
from tui.cli import main
sys.exit(main(["--casebook", sys.argv[1]]))
"""
CASES = 300
F3, F5, F9 = "\x1b[13~", "\x1b[15~", "\x1b[20~"
UP, DOWN, CLEAR = "\x1b[A", "\x1b[B", "\x15" + "\x7f" * 12
TYPED = "15.2 15.9"
READING = "line current loaded"
PLATE = ("7.5 kW", "400 V", "14.9 A", "50 Hz", "1455 rpm", "0.3 kW")  # the last is no power factor
FURTHER = 24  # lines of the plate, more than fit on the page


def casebook(folder: Path) -> Path:
    """Make a casebook with many cases, the newest of P-104."""
    path = folder / "casebook.db"
    with open_casebook(path) as book, book.store.atomic():
        for place in range(CASES):
            tag = "P-104" if place == CASES - 1 else f"M-{place:03d}"
            machine = {"tag": tag, **MACHINE}
            sheet = sheet_from_plain({"format": 1, "machine": machine, "complaint": "runs_hot"})
            book.log_sheet(sheet, "bench")
    drafts = Drafts(path)
    drafts.remember("person", "bench")
    drafts.remember("kit", KIT)
    return path


@contextmanager
def started(path: Path, code: str = "") -> Iterator[Terminal]:
    """Start Plateside, or other code on the casebook, wait for the first page, and end it after use."""
    terminal = Terminal(path, command=[sys.executable, "-c", code, str(path)] if code else None)
    try:
        while b"P-104" not in terminal.raw and terminal.pump(0.002):
            pass
        yield terminal
    finally:
        terminal.kill()


def first_paint_s(path: Path, code: str = "") -> float:
    """Return the seconds from the start of the process to the words on the screen."""
    start = time.perf_counter()
    with started(path, code):
        return time.perf_counter() - start


def after(terminal: Terminal, keys: str, quiet_s: float = 0.25) -> tuple[float, int]:
    """Press keys; return seconds to the last byte that came, and the bytes."""
    terminal.pump(0.05)
    had, start = len(terminal.raw), time.perf_counter()
    terminal.type(keys)
    last = start
    while time.perf_counter() - last < quiet_s:
        before = len(terminal.raw)
        terminal.pump(0.002)
        if len(terminal.raw) != before:
            last = time.perf_counter()
    return last - start, len(terminal.raw) - had


def echo(terminal: Terminal, key: str) -> tuple[float, int]:
    """Press a key; return the milliseconds to the first byte back, and the bytes of its frame."""
    had, start = len(terminal.raw), time.perf_counter()
    terminal.type(key)
    while len(terminal.raw) == had:
        terminal.pump(0.001)
    took = time.perf_counter() - start
    terminal.pump(0.02)
    return 1e3 * took, len(terminal.raw) - had


def typing(terminal: Terminal, rounds: int) -> list[tuple[float, int]]:
    """Type the same numbers over and over; return what each key took and sent."""
    keys = []
    for _ in range(rounds):
        for key in TYPED:
            keys.append(echo(terminal, key))
            time.sleep(0.02)
        terminal.type(CLEAR)
        terminal.pump(0.2)
    return keys


def starts(path: Path, rounds: int) -> Iterator[Row]:
    """Measure the first paint, pair by pair with a bare app."""
    pairs = [(first_paint_s(path), first_paint_s(path, BARE)) for _ in range(rounds)]
    ratio = statistics.median(own / bare for own, bare in pairs)
    yield at_most("first paint, against a bare Textual app", ratio, "x", 1.35, decimals=2)
    yield at_most("first paint", 1e3 * statistics.median(own for own, _ in pairs), "ms")


def screens(terminal: Terminal) -> Iterator[Row]:
    """Measure the bytes of whole screens; leaves the worksheet of P-104 open."""
    terminal.pump(2.0)
    packed = len(zlib.compress(terminal.raw))
    yield at_most("first screen", len(terminal.raw), "bytes", 10_000)
    yield at_most("first screen, compressed as SSH can", packed, "bytes")
    yield at_most("one row down in the list", after(terminal, DOWN)[1], "bytes")
    terminal.type(UP + "\r")
    terminal.wait("faults")
    terminal.pump(0.5)
    had = len(terminal.raw)
    terminal.pump(5.0)
    yield at_most("nothing happens for 5 s", len(terminal.raw) - had, "bytes", 0)
    opened = [after(terminal, key)[1] for key in (F5, F9, F3, F9)]
    yield at_most("another screen, the largest of 4", max(opened), "bytes", 10_000)


def choose(terminal: Terminal) -> None:
    """Choose the reading that is typed on the worksheet."""
    terminal.type(f"{F3}{READING}\r")
    terminal.wait("line current, loaded")
    terminal.pump(0.5)


def at_rest(terminal: Terminal, rounds: int, bare_ms: float) -> Iterator[Row]:
    """Measure keys and readings on the worksheet while nothing else runs."""
    choose(terminal)
    keys = typing(terminal, rounds)
    p95 = percentile((ms for ms, _ in keys), 0.95)
    yield at_most("key to its echo, p95", p95, "ms", 25, decimals=1)
    yield at_most("the same, against a bare app", p95 / bare_ms, "x", decimals=2)
    yield at_most("one key, p90", percentile((size for _, size in keys), 0.9), "bytes", 200)
    terminal.type("15.2 15.9 14.8\r")
    terminal.wait("Before readings")  # a case with none is asked once
    terminal.type("\r")
    terminal.wait("stored")
    terminal.pump(1.0)
    took = []
    for _ in range(rounds):
        choose(terminal)
        terminal.type("15.2 15.9 14.9")
        terminal.pump(0.3)
        took.append(1e3 * after(terminal, "\r", 0.6)[0])
    yield at_most("Enter to stored, weighed, shown, median", statistics.median(took), "ms", 250)


def under_load(path: Path) -> Iterator[Row]:
    """Measure keys while the engine weighs without a pause; the open case has readings."""
    with started(path, BUSY) as terminal:
        terminal.pump(1.5)
        terminal.type("\r")
        terminal.wait("faults")
        choose(terminal)
        terminal.type("15.2 15.9 14.7\r")
        terminal.wait("stored")
        began, worked, keys = time.monotonic(), processor_s(terminal), []
        while time.monotonic() < began + BUSY_S - 2.0:
            keys += typing(terminal, 1)
        busy = 100 * (processor_s(terminal) - worked) / (time.monotonic() - began)
    ms = percentile((ms for ms, _ in keys), 0.95)
    yield at_most("key to its echo while the engine runs, p95", ms, "ms", 45, decimals=1)
    yield at_most(f"meanwhile ({len(keys)} keys) the program takes", busy, "% of a core")


def bare(path: Path, rounds: int) -> tuple[float, float]:
    """Return the 95 % point of a key's echo in a bare app with an input, in ms, and its memory in MB."""
    with started(path, BARE) as terminal:
        terminal.pump(0.5)
        return percentile((ms for ms, _ in typing(terminal, rounds)), 0.95), memory_mb(terminal)


def fields(terminal: Terminal) -> Iterator[Row]:
    """Measure the bytes from one line of the nameplate to the next: typed, refused, rolling to the last."""
    for page in ("n", "X-9\r", "runs hot\r", "three-phase\r"):
        terminal.type(page)
        terminal.pump(0.5)
    terminal.wait("Nameplate of a three-phase induction motor")
    sizes = []
    for text in PLATE:
        terminal.type(text)
        terminal.pump(0.5)
        sizes.append(after(terminal, "\r", 0.6)[1])
    sizes += [after(terminal, DOWN, 0.4)[1] for _ in range(FURTHER)]
    yield at_most(f"one field to the next, the largest of {len(sizes)}", max(sizes), "bytes", 6_000)


def memory_mb(terminal: Terminal) -> float:
    """Return the resident memory of the program in a terminal."""
    status = Path(f"/proc/{terminal.process.pid}/status").read_text(encoding="utf-8")
    (resident,) = (line.split()[1] for line in status.splitlines() if line.startswith("VmRSS"))
    return int(resident) / 1024


def processor_s(terminal: Terminal) -> float:
    """Return the processor time that the program in a terminal has taken so far."""
    status = Path(f"/proc/{terminal.process.pid}/stat").read_text(encoding="utf-8")
    user, system = status.rpartition(")")[2].split()[11:13]
    return (int(user) + int(system)) / os.sysconf("SC_CLK_TCK")


def rows(rounds: int) -> Iterator[Row]:
    """Yield every figure with its target."""
    with tempfile.TemporaryDirectory() as folder:
        path = casebook(Path(folder))
        yield from starts(path, rounds)
        bare_ms, bare_mb = bare(path, rounds)
        with started(path) as terminal:
            yield from screens(terminal)
            yield from at_rest(terminal, rounds, bare_ms)
            memory = memory_mb(terminal)
            yield at_most("memory after this visit", memory, "MB", 90)
            yield at_most("the same, against a bare app", memory / bare_mb, "x", decimals=2)
        yield from under_load(path)
        with started(path) as terminal:
            terminal.pump(1.0)
            yield from fields(terminal)


def main(words: Sequence[str] | None = None) -> int:
    """Print every figure with its target; return 3 where one is missed."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks.terminal", description=__doc__)
    parser.add_argument("rounds", nargs="?", type=int, default=7)
    return told(rows(parser.parse_args(words).rounds))


if __name__ == "__main__":
    raise SystemExit(main())
