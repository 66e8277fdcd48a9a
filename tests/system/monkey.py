"""Types at random on the real program in a real pty, in a window that changes its size, and watches it."""

from __future__ import annotations

import re
import sys
import termios
import time
from collections import deque
from dataclasses import dataclass, field
from pathlib import Path

import pexpect

from tests.system.keyboard import Keys, Lines

ROOT = Path(__file__).resolve().parents[2]
WATCHED = Path(__file__).with_name("watched.py")
PATIENCE_S = 60.0
USUAL = (80, 24)
FULL_SCREEN = b"\x1b[?1049h"
MOST_BYTES = 300_000
"""What is kept of the newest output, to be looked at when something went wrong."""


@dataclass
class Outcome:
    """What became of a run."""

    bursts: int = 0
    starts: int = 0
    statuses: list[int | None] = field(default_factory=list)
    peak_mb: float = 0.0
    resizes: int = 0


class Monkey:
    """Types on one casebook for a while, and starts the program again where its own key has left it."""

    LEFT: tuple[int, ...] = (0,)
    """How it may end."""

    def __init__(self, home: Path, casebook: Path, *, seed: int, arguments: tuple[str, ...] = ()) -> None:
        self.home, self.casebook, self.arguments = home, casebook, arguments
        self.keys = Keys(seed)
        self.log = home.parent / "outside.log"
        self.sent: deque[bytes] = deque(maxlen=400)
        self.raw = b""
        self.received = 0
        self.outcome = Outcome()
        self.columns, self.rows = USUAL
        self.process = self.start()

    def environment(self) -> dict[str, str]:
        """Return what the program sees: a home of its own and nothing else of the user's."""
        return {
            "HOME": str(self.home), "TMPDIR": str(self.home / "tmp"), "TERM": "xterm-256color",
            "LANG": "C.UTF-8", "PATH": "/usr/bin:/bin", "PYTHONDONTWRITEBYTECODE": "1",
        }  # fmt: skip

    def start(self) -> pexpect.spawn[bytes]:
        """Start the program in a window of the present size."""
        self.outcome.starts += 1
        command = [
            str(WATCHED),
            str(self.log),
            str(self.home),
            "--casebook",
            str(self.casebook),
        ]
        process = pexpect.spawn(
            sys.executable, [*command, *self.arguments], env=self.environment(), cwd=self.home,
            dimensions=(self.rows, self.columns),
        )  # fmt: skip
        process.delaybeforesend = None
        process.delayafterclose = process.delayafterterminate = 0.05
        self.raw = b""
        self.modes = termios.tcgetattr(process.child_fd)
        return process

    def wait_until_it_stands(self) -> None:
        """Wait for the first screen: before it stands Ctrl+C still interrupts, as in every program."""
        end = time.monotonic() + PATIENCE_S
        while FULL_SCREEN not in self.raw and self.pump(0.2):
            assert time.monotonic() < end, self.story()
        self.pump(0.3)

    def pump(self, patience_s: float) -> bool:
        """Read what is there for a while; return False when the process has ended."""
        end = time.monotonic() + patience_s
        while True:
            left = max(end - time.monotonic(), 0.0)
            try:
                data = self.process.read_nonblocking(65536, left)
            except pexpect.TIMEOUT:
                return True
            except (pexpect.EOF, OSError):
                return False
            self.received += len(data)
            self.raw = (self.raw + data)[-MOST_BYTES:]
            if not left:
                return True

    def send(self, piece: bytes) -> None:
        """Type a piece; the process may just have ended."""
        self.sent.append(piece)
        try:
            self.process.send(piece)
        except OSError:
            return

    def run(self, seconds: float) -> Outcome:
        """Type for so long, then leave."""
        end, beat = time.monotonic() + seconds, time.monotonic() + 20.0
        self.wait_until_it_stands()
        while time.monotonic() < end:
            if self.keys.chance.random() < 0.04:
                self.resize(self.keys.size())
                self.outcome.resizes += 1
            for pause, piece in self.keys.burst():
                if pause:
                    self.pump(pause)
                self.send(piece)
            self.outcome.bursts += 1
            alive = self.pump(self.keys.chance.choice((0.0, 0.0, 0.01, 0.03, 0.15)))
            if not alive:
                self.ended()
                self.process = self.start()
                self.wait_until_it_stands()
            elif time.monotonic() > beat:
                self.beat()
                beat = time.monotonic() + 20.0
        self.leave()
        self.ended()
        return self.outcome

    def resize(self, size: tuple[int, int]) -> None:
        """Give the window another size, in columns and rows; the process may just have ended."""
        self.columns, self.rows = size
        try:
            self.process.setwinsize(self.rows, self.columns)
        except OSError:
            return

    def beat(self) -> None:
        """See that it answers: a redraw brings something on the screen."""
        self.note_memory()
        end = time.monotonic() + PATIENCE_S
        while time.monotonic() < end:
            before = self.received
            self.send(b"\x1b[201~\x0c")
            if not self.pump(0.5) or self.received > before:
                return
        raise AssertionError(f"no answer for {PATIENCE_S} s\n{self.story()}")

    def note_memory(self) -> None:
        """Keep the highest memory of the process so far."""
        try:
            status = Path(f"/proc/{self.process.pid}/status").read_text(encoding="ascii", errors="replace")
        except OSError:
            return
        if found := re.search(r"VmHWM:\s+(\d+) kB", status):
            self.outcome.peak_mb = max(self.outcome.peak_mb, int(found[1]) / 1024)

    def leave(self) -> None:
        """Leave by its own key, and say yes where it asks."""
        self.note_memory()
        self.resize(USUAL)
        end = time.monotonic() + PATIENCE_S
        self.send(b"\x1b[201~")
        while time.monotonic() < end:
            self.send(b"\x07")
            if not self.pump(0.5):
                return
            self.send(b"y")
            if not self.pump(0.3):
                return
        raise AssertionError(f"it cannot be left\n{self.story()}")

    def ended(self) -> None:
        """See that it left by its own key and left the terminal as it was."""
        modes = termios.tcgetattr(self.process.child_fd)
        self.process.close(force=True)
        status = self.process.exitstatus
        self.outcome.statuses.append(status)
        assert status in self.LEFT, f"ended with {status}, signal {self.process.signalstatus}\n{self.story()}"
        assert b"Traceback" not in self.raw, self.story()
        # what was typed never comes back as a code: a title, a clipboard's answer, a reset
        for code in (b"\x1b]0;", b"\x1b]11;", b"\x1bP", b"\x1bc", b"\x1b[2J"):
            assert code not in self.raw, f"{code!r} was sent\n{self.story()}"
        assert modes[3] == self.modes[3] and modes[0] == self.modes[0], (
            f"modes of the terminal\n{self.story()}"
        )
        self.see_screen_restored()

    def see_screen_restored(self) -> None:
        """See that every mode of the terminal that was set was taken back: screen, cursor, paste, focus."""
        for mode, rests in ((b"1049", b"l"), (b"25", b"h"), (b"2004", b"l"), (b"1004", b"l"), (b"7", b"h"),
                            (b"1000", b"l"), (b"1003", b"l")):  # fmt: skip
            said = re.findall(rb"\x1b\[\?" + mode + rb"([hl])", self.raw)
            assert not said or said[-1] == rests, f"mode {mode!r} is left as {said[-1]!r}\n{self.story()}"

    def story(self) -> str:
        """Return the last keys and the last output."""
        keys = " ".join(repr(piece)[1:] for piece in list(self.sent)[-60:])
        return f"size {self.columns}x{self.rows}; last keys: {keys}\nlast output: {self.raw[-3000:]!r}"

    def kill(self) -> None:
        """End it in any case."""
        self.process.close(force=True)


class PlainMonkey(Monkey):
    """Answers the questions of the plain visit."""

    LEFT = (0, 130)  # by "leave", the end of input or a closed case; by Ctrl+C

    def __init__(self, home: Path, casebook: Path, *, seed: int) -> None:
        super().__init__(home, casebook, seed=seed, arguments=("--plain",))
        self.keys = Lines(seed)

    def wait_until_it_stands(self) -> None:
        """Wait for the first question."""
        end = time.monotonic() + PATIENCE_S
        while b"Your name" not in self.raw and self.pump(0.2):
            assert time.monotonic() < end, self.story()
        for line in Lines(self.keys.chance.randrange(10**6)).opening():
            self.send(line)
            self.pump(0.5)

    def beat(self) -> None:
        """See that it answers: a blank line brings a question."""
        self.note_memory()
        self.pump(0.5)
        end, self.raw = time.monotonic() + PATIENCE_S, b""
        self.send(b"\r")
        while self.pump(0.5) and len(self.raw) < len("\r\nx"):  # more than the echo
            assert time.monotonic() < end, f"no answer\n{self.story()}"

    def leave(self) -> None:
        """Leave by the end of input."""
        self.note_memory()
        end = time.monotonic() + PATIENCE_S
        while self.pump(0.3):
            assert time.monotonic() < end, f"it cannot be left\n{self.story()}"
            self.send(b"\r\x04")

    def see_screen_restored(self) -> None:
        """See that no escape code was sent at all."""
        assert b"\x1b" not in self.raw, self.story()
