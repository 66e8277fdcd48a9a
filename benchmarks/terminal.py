"""What the screens cost: first paint, key latency, bytes, idle, memory.

Run ``python benchmarks/terminal.py [rounds]``. Ratios are taken pair by pair against a bare
Textual app in the same run, because absolute times differ between machines and moments.
The targets stand beside the figures; the exit status is 1 where one is missed.
"""

from __future__ import annotations

import statistics
import sys
import tempfile
import time
import zlib
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

import plateside  # noqa: F401  (puts the layers on the import path)
from calc.sheet_io import sheet_from_plain
from casebook.book import open_casebook
from tests.tui.helpers import KIT, MACHINE
from tests.tui.terminal import Terminal
from tui.drafts import Drafts

HELLO = """
from textual.app import App
from textual.widgets import Static
class Hello(App):
    def compose(self):
        yield Static("P-104")
Hello().run(mouse=False)
"""
CASES = 300
F3, F5, F9 = "\x1b[13~", "\x1b[15~", "\x1b[20~"


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


def first_paint_s(path: Path, *, bare: bool) -> float:
    """Return the seconds from the start of the process to the words on the screen."""
    command = [sys.executable, "-c", HELLO] if bare else None
    start = time.perf_counter()
    terminal = Terminal(path, command=command)
    while b"P-104" not in terminal.raw and terminal.pump(0.002):
        pass
    took = time.perf_counter() - start
    terminal.kill()
    return took


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


def echo_s(terminal: Terminal, key: str) -> tuple[float, int]:
    """Press a key; return the seconds to the first byte back, and the bytes of its frame."""
    had, start = len(terminal.raw), time.perf_counter()
    terminal.type(key)
    while len(terminal.raw) == had:
        terminal.pump(0.001)
    took = time.perf_counter() - start
    terminal.pump(0.02)
    return took, len(terminal.raw) - had


def percentile(values: list[float], share: float) -> float:
    """Return the value below which a share of the values lies."""
    return sorted(values)[min(int(len(values) * share), len(values) - 1)]


def memory_mb(pid: int) -> float:
    """Return the resident memory of a process."""
    for line in Path(f"/proc/{pid}/status").read_text().splitlines():
        if line.startswith("VmRSS"):
            return int(line.split()[1]) / 1024
    return 0.0


def measure(rounds: int) -> list[tuple[str, float, str, float]]:
    """Return name, figure, unit and target of each measurement."""
    out: list[tuple[str, float, str, float]] = []
    with tempfile.TemporaryDirectory() as folder:
        path = casebook(Path(folder))
        pairs = [(first_paint_s(path, bare=False), first_paint_s(path, bare=True)) for _ in range(rounds)]
        out.append(("first paint, against a bare app", statistics.median(a / b for a, b in pairs), "x", 1.35))
        out.append(("first paint", 1000 * statistics.median(a for a, _ in pairs), "ms", 0))
        terminal = Terminal(path)
        terminal.wait("P-104")
        typing = []
        terminal.pump(2.0)
        out.append(("start, bytes", len(terminal.raw), "bytes", 10000))
        out.append(("start, compressed", len(zlib.compress(terminal.raw)), "bytes", 0))
        out.append(("table row down", after(terminal, "\x1b[B")[1], "bytes", 0))
        terminal.type("\x1b[A\r")
        terminal.wait("faults")
        terminal.pump(0.5)
        had = len(terminal.raw)
        terminal.pump(5.0)
        out.append(("idle for 5 s", len(terminal.raw) - had, "bytes", 0.5))
        opened = [after(terminal, key)[1] for key in (F5, F9, F3, F9)]
        out.append(("new screen, bytes", max(opened), "bytes", 10000))
        terminal.type(F3 + "line current loaded\r")
        terminal.wait("line current, loaded")
        terminal.pump(0.5)
        for _ in range(4):
            for key in "15.2 15.9":
                typing.append(echo_s(terminal, key))
                time.sleep(0.02)
            terminal.type("\x15" + "\x7f" * 12)
            terminal.pump(0.3)
        out.append(("key echo, p95", 1000 * percentile([took for took, _ in typing], 0.95), "ms", 25))
        out.append(("key, bytes", percentile([float(size) for _, size in typing], 0.9), "bytes", 200))
        terminal.type("15.2 15.9 14.8\r")
        terminal.wait("Before readings")
        terminal.type("\r")
        terminal.wait("stored")
        terminal.pump(1.0)
        took = []
        for _ in range(5):
            terminal.type(F3 + "line current loaded\r")
            terminal.pump(0.5)
            terminal.type("15.2 15.9 14.9")
            terminal.pump(0.3)
            took.append(after(terminal, "\r", 0.6)[0])
        out.append(("Enter to weighed, stored, shown", 1000 * statistics.median(took), "ms", 250))
        out.append(("memory", memory_mb(terminal.process.pid), "MB", 90))
        terminal.kill()
    return out


def main() -> int:
    """Print every figure with its target; return 1 where one is missed."""
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 7
    missed = False
    for name, figure, unit, target in measure(rounds):
        verdict = "" if not target else ("  reached" if figure <= target else "  MISSED")
        missed |= verdict == "  MISSED"
        print(f"{name:<34} {figure:>9.2f} {unit:<6}{f' (target {target:g})' if target else ''}{verdict}")
    return int(missed)


if __name__ == "__main__":
    raise SystemExit(main())
