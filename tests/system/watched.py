"""Plateside under watch: every file that is written outside one folder, every program and every connection
that is started, goes into a log. ``python watched.py LOG FOLDER ARGUMENT...``
"""

from __future__ import annotations

import importlib
import os
import sys
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parents[2]
WRITES = os.O_WRONLY | os.O_RDWR | os.O_CREAT | os.O_APPEND | os.O_TRUNC
MAKES = {
    "os.mkdir",
    "os.rename",
    "os.link",
    "os.symlink",
    "os.remove",
    "os.rmdir",
    "os.truncate",
    "shutil.move",
}
STARTS = {
    "subprocess.Popen", "os.system", "os.exec", "os.posix_spawn", "os.spawn", "os.fork", "os.forkpty",
    "pty.spawn", "socket.connect", "socket.bind", "socket.getaddrinfo", "urllib.Request", "webbrowser.open",
}  # fmt: skip
DEVICES = ("/dev/null", "/dev/tty", "/dev/pts/", "/dev/urandom", "/proc/self/")


def watch(log: int, folder: Path) -> None:
    """Write a line to ``log`` for everything that happens outside the folder."""

    def is_outside(path: object) -> bool:
        if not isinstance(path, str | bytes | os.PathLike):
            return False
        name = os.fsdecode(path)
        if name in {"", ":memory:"} or name.startswith(DEVICES):
            return False
        name = name.removeprefix("file://").partition("?")[0]
        return not Path(name).resolve().is_relative_to(folder)

    def told(event: str, arguments: tuple[Any, ...]) -> None:
        if event in STARTS:
            os.write(log, f"{event} {arguments!r:.200}\n".encode(errors="replace"))
            return
        if event == "open":
            path, mode, flags = arguments
            writes = bool(flags & WRITES) if isinstance(flags, int) else False
            if not (writes or set(str(mode or "")) & set("wax+")):
                return
            paths: tuple[Any, ...] = (path,)
        elif event in MAKES or event == "sqlite3.connect":
            paths = tuple(part for part in arguments if isinstance(part, str | bytes | os.PathLike))
        else:
            return
        if any(is_outside(path) for path in paths):
            os.write(log, f"{event} {paths!r:.300}\n".encode(errors="replace"))

    sys.addaudithook(told)


def main() -> int:
    """Watch, then run the program."""
    log, folder, *arguments = sys.argv[1:]
    sys.path[0] = str(ROOT)
    handle = os.open(log, os.O_WRONLY | os.O_CREAT | os.O_APPEND, 0o600)
    watch(handle, Path(folder).resolve())
    sys.argv = ["plateside", *arguments]
    importlib.import_module("plateside")  # puts the layers on the path
    status: int = importlib.import_module("tui.cli").main()
    return status


if __name__ == "__main__":
    raise SystemExit(main())
