"""A real process in a real pty, watched by pyte; and in tmux. For the system tests and the benchmark."""

from __future__ import annotations

import os
import re
import subprocess
import sys
import time
from collections.abc import Callable, Mapping
from pathlib import Path

import pexpect
import pyte

ROOT = Path(__file__).resolve().parents[2]
# pyte does not know the answers that Textual asks the terminal for
_UNKNOWN = re.compile(rb"\x1b\[[<>=?][\d;]*(?:u|\$p)")
PATIENCE_S = 20.0


class Terminal:
    """Plateside in a pty: keys in, screen and bytes out."""

    def __init__(
        self,
        casebook: Path,
        *,
        columns: int = 80,
        rows: int = 24,
        env: Mapping[str, str | None] | None = None,
        command: list[str] | None = None,
        before: Callable[[], None] | None = None,
    ) -> None:
        self.screen = pyte.Screen(columns, rows)
        self.stream = pyte.ByteStream(self.screen)
        self.raw = b""
        wanted = {
            **os.environ,
            "TERM": "xterm-256color",
            "LANG": "C.UTF-8",
            "PYTHONPATH": str(ROOT),
            **(env or {}),
        }
        for name in ("COLUMNS", "LINES", "LC_ALL"):
            wanted.pop(name, None)
        command = command or [sys.executable, "-m", "plateside", "--casebook", str(casebook)]
        self.process = pexpect.spawn(
            command[0],
            command[1:],
            dimensions=(rows, columns),
            env={name: value for name, value in wanted.items() if value is not None},
            cwd=ROOT,
            preexec_fn=before,
        )

        self.process.delaybeforesend = None

    def pump(self, patience_s: float = 0.03) -> bool:
        """Read what is there; return False when the process has ended."""
        try:
            while True:
                data = self.process.read_nonblocking(65536, patience_s)
                self.raw += data
                self.stream.feed(_UNKNOWN.sub(b"", data))
        except pexpect.TIMEOUT:
            return True
        except pexpect.EOF:
            return False

    def text(self) -> str:
        """The screen as text."""
        return "\n".join(line.rstrip() for line in self.screen.display)

    def wait(self, words: str) -> str:
        """Wait until words stand on the screen, across line ends."""
        end = time.monotonic() + PATIENCE_S
        while time.monotonic() < end:
            alive = self.pump()
            flat = " ".join(self.text().replace("│", " ").replace("|", " ").split())
            if words in flat:
                return self.text()
            if not alive:
                break
        raise AssertionError(f"no {words!r}:\n{self.text()}")

    def type(self, text: str) -> None:
        """Type text as it is, or escape codes."""
        self.process.send(text)

    def end(self) -> int | None:
        """Wait for the end of the process; return its exit status."""
        self.process.expect(pexpect.EOF, timeout=PATIENCE_S)
        self.raw += self.process.before or b""
        self.process.close()
        status: int | None = self.process.exitstatus
        return status

    def kill(self) -> None:
        """End it in any case."""
        self.process.close(force=True)


class Tmux:
    """A tmux of its own: one window with one command."""

    def __init__(self, command: str, *, columns: int = 80, rows: int = 24) -> None:
        self.socket = f"plateside-{os.getpid()}"
        self.run(
            "-f",
            "/dev/null",
            "new-session",
            "-d",
            "-x",
            str(columns),
            "-y",
            str(rows),
            f"{command}; echo EXIT=$?; sleep 60",
        )
        self.run("set-option", "-g", "status", "off")

    def run(self, *arguments: str) -> str:
        """Run one tmux command."""
        call = ["tmux", "-L", self.socket, *arguments]
        return subprocess.run(call, capture_output=True, text=True, check=True, timeout=10).stdout

    def wait(self, words: str) -> str:
        """Wait until words stand on the screen."""
        end = time.monotonic() + PATIENCE_S
        screen = ""
        while time.monotonic() < end:
            screen = self.run("capture-pane", "-p")
            if words in " ".join(screen.replace("│", " ").replace("|", " ").split()):
                return screen
            time.sleep(0.03)
        raise AssertionError(f"no {words!r}:\n{screen}")

    def keys(self, *names: str) -> None:
        """Press keys by their tmux names."""
        self.run("send-keys", *names)

    def type(self, text: str) -> None:
        """Type text as it is."""
        self.run("send-keys", "-l", text)

    def kill(self) -> None:
        """End the tmux server that this object started."""
        subprocess.run(["tmux", "-L", self.socket, "kill-server"], capture_output=True, check=False)
