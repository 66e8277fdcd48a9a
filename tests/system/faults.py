"""What the tests of faults share: a small disk, a right to give away, ways to run the program."""

from __future__ import annotations

import contextlib
import ctypes
import os
import resource
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

from tests.tui.terminal import PATIENCE_S, ROOT, Terminal

CTRL_G, CTRL_N = "\x07", "\x0e"
SHEET = ROOT / "tests" / "sheets" / "pump_overload.yaml"
LIBC = ctypes.CDLL(None, use_errno=True)
PR_CAPBSET_DROP, CAP_DAC_OVERRIDE, CAP_DAC_READ_SEARCH = 24, 1, 2  # linux/prctl.h, linux/capability.h


def heed_modes() -> None:
    """Give away root's right to pass over the modes of files; for a process about to start a program."""
    if os.geteuid() == 0:
        for right in (CAP_DAC_OVERRIDE, CAP_DAC_READ_SEARCH):
            assert LIBC.prctl(PR_CAPBSET_DROP, right, 0, 0, 0) == 0


class Disk:
    """A small disk that can be filled and freed; where none may be mounted, a limit on files does it."""

    def __init__(self, folder: Path) -> None:
        folder.mkdir()
        self.folder = folder
        command = ["mount", "-t", "tmpfs", "-o", "size=4m,mode=700", "tmpfs", str(folder)]
        self.is_mounted = subprocess.run(command, check=False, capture_output=True).returncode == 0

    def fill(self, terminal: Terminal) -> None:
        """Leave no room for another byte."""
        if not self.is_mounted:
            held = max(path.stat().st_size for path in self.folder.rglob("*") if path.is_file())
            resource.prlimit(terminal.process.pid, resource.RLIMIT_FSIZE, (held, resource.RLIM_INFINITY))
            return
        with contextlib.suppress(OSError), (self.folder / "filler").open("wb", buffering=0) as file:
            while True:
                file.write(b"x" * 4096)

    def free(self, terminal: Terminal) -> None:
        """Make room again."""
        if self.is_mounted:
            (self.folder / "filler").unlink()
        else:
            unlimited = (resource.RLIM_INFINITY, resource.RLIM_INFINITY)
            resource.prlimit(terminal.process.pid, resource.RLIMIT_FSIZE, unlimited)

    def end(self) -> None:
        """Take the disk away."""
        if self.is_mounted:
            subprocess.run(["umount", "-l", str(self.folder)], check=True)


def at_worksheet(terminal: Terminal) -> Terminal:
    """Go to the worksheet of the one case."""
    terminal.wait("P-104")
    terminal.type("\r")
    terminal.wait("faults")
    return terminal


def plateside(
    *words: str, before: Callable[[], None] | None = None, **env: str
) -> subprocess.CompletedProcess[str]:
    """Run a command to its end."""
    wanted = {**os.environ, "PYTHONPATH": str(ROOT), **env}
    return subprocess.run(
        [sys.executable, "-m", "plateside", *words],
        capture_output=True, text=True, env=wanted, check=False, timeout=120, preexec_fn=before,
    )  # fmt: skip


def mishaps(folder: Path) -> list[Path]:
    """Return the logs of mistakes of the program."""
    return list(folder.rglob("mishaps.log"))


def wait_for(holds: Callable[[], bool]) -> None:
    """Wait until something holds."""
    end = time.monotonic() + PATIENCE_S
    while not holds():
        assert time.monotonic() < end
        time.sleep(0.02)


def at_home(home: Path) -> dict[str, str | None]:
    """Return an environment whose every folder of the user is in one home."""
    own = {f"XDG_{kind}_HOME": str(home / kind.lower()) for kind in ("CACHE", "STATE", "DATA", "CONFIG")}
    return {"HOME": str(home), **own}


def has_ended(pid: int) -> bool:
    """Whether a child has ended; its status still waits to be taken."""
    return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] == "Z"
