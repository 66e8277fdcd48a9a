"""What goes wrong around the program: kills, a stalled line, a full disk, no permission, other versions.

The real program in a real pty; root's right to pass over the modes of files is given away first.
"""

from __future__ import annotations

import contextlib
import ctypes
import os
import resource
import signal
import sqlite3
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from calc.sheet_io import sheet_from_plain
from casebook.book import open_casebook
from tests.tui.helpers import KIT, MACHINE
from tests.tui.terminal import PATIENCE_S, ROOT, Terminal
from tui.drafts import Drafts

pytestmark = pytest.mark.system
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


@pytest.fixture
def disk(tmp_path: Path) -> Iterator[Disk]:
    """A disk of its own for the casebook."""
    disk = Disk(tmp_path / "disk")
    yield disk
    disk.end()


@pytest.fixture
def casebook(tmp_path: Path, disk: Disk) -> Path:
    """A casebook with one open case and a known technician."""
    path = disk.folder / "shop" / "casebook.db"
    sheet = sheet_from_plain({"format": 1, "machine": {"tag": "P-104", **MACHINE}, "complaint": "runs_hot"})
    with open_casebook(path) as book:
        book.log_sheet(sheet, "R. Varga")
    drafts = Drafts(path)
    drafts.remember("person", "R. Varga")
    drafts.remember("kit", KIT)
    return path


@pytest.fixture
def start(casebook: Path, tmp_path: Path) -> Iterator[Callable[..., Terminal]]:
    """Start the program on the casebook; it is ended after the test."""
    started: list[Terminal] = []
    home = {f"XDG_{kind}_HOME": str(tmp_path / kind.lower()) for kind in ("CACHE", "STATE", "DATA")}

    def start_it(**more: object) -> Terminal:
        terminal = Terminal(casebook, env={**home, **more.pop("env", {})}, **more)  # type: ignore[arg-type, dict-item]
        started.append(terminal)
        return terminal

    yield start_it
    for terminal in started:
        terminal.kill()


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


# killed, hung up


def test_what_was_typed_before_a_kill_is_there_again(start, casebook: Path):
    terminal = at_worksheet(start())
    terminal.type("15.2 15.9 14")
    terminal.wait("15.2 15.9 14")
    wait_for(lambda: bool(Drafts(casebook).names()))
    os.kill(terminal.process.pid, signal.SIGKILL)
    terminal.end()
    again = at_worksheet(start())
    again.wait("From your draft")
    assert "15.2 15.9 14" in again.text()


def wait_for(holds: Callable[[], bool]) -> None:
    """Wait until something holds."""
    end = time.monotonic() + PATIENCE_S
    while not holds():
        assert time.monotonic() < end
        time.sleep(0.02)


@pytest.mark.parametrize("how", ["hung up", "gone"])
def test_a_line_that_stalls_and_then_drops_keeps_what_was_typed(start, casebook: Path, how: str):
    terminal = at_worksheet(start())
    terminal.type("15.2 15.9 14")
    terminal.wait("15.2 15.9 14")
    for _ in range(100):  # each draws the screen anew; nobody reads, so that the line takes no more
        os.write(terminal.process.child_fd, b"\x0c")
        time.sleep(0.03)
    pid = terminal.process.pid
    if how == "hung up":
        os.kill(pid, signal.SIGHUP)
    else:
        terminal.process.ptyproc.fileobj.close()
        terminal.process.ptyproc.closed = terminal.process.closed = True
    wait_for(lambda: has_ended(pid))
    terminal.process.wait()
    (name,) = Drafts(casebook).names()
    assert Drafts(casebook).load(name)["typed"] == "15.2 15.9 14"


def has_ended(pid: int) -> bool:
    """Whether a child has ended; its status still waits to be taken."""
    return Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0] == "Z"


# a disk that is full


def test_on_a_full_disk_what_was_typed_stays_and_is_stored_once_there_is_room(
    start, casebook: Path, disk: Disk, tmp_path: Path
):
    terminal = at_worksheet(start())
    terminal.type(CTRL_N)
    terminal.wait("for the log")
    disk.fill(terminal)
    terminal.type("oil at the seal")
    terminal.wait("oil at the seal")
    terminal.type("\r")
    terminal.wait("Nothing was written.")
    assert "oil at the seal" in terminal.text()
    terminal.type(CTRL_G)
    terminal.wait("Leave?")
    terminal.type("n")
    terminal.wait("oil at the seal")
    disk.free(terminal)
    terminal.type("\r")
    terminal.wait("stored: remark")
    terminal.type(CTRL_G)
    assert terminal.end() == 0
    assert not mishaps(tmp_path)
    with open_casebook(casebook) as book:
        assert [note.what.text for note in book.case(book.cases()[0].id).notes] == ["oil at the seal"]


def test_a_command_on_a_full_disk_says_so_and_writes_nothing(casebook: Path, disk: Disk):
    before = plateside("export", "--json-lines", "--casebook", str(casebook)).stdout
    with contextlib.suppress(OSError), (disk.folder / "filler").open("wb", buffering=0) as file:
        while disk.is_mounted:
            file.write(b"x" * 4096)
    limit = None if disk.is_mounted else lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (8192, 8192))
    ran = plateside("log", str(SHEET), "--casebook", str(casebook), before=limit)
    assert (ran.returncode, ran.stdout) == (1, "")
    assert ran.stderr.startswith("plateside: ")
    assert "Nothing was written." in ran.stderr
    assert "Traceback" not in ran.stderr
    (disk.folder / "filler").unlink()
    assert plateside("export", "--json-lines", "--casebook", str(casebook)).stdout == before


# no permission


@pytest.fixture
def shut(casebook: Path, tmp_path: Path) -> Iterator[Path]:
    """The casebook and its folder may be read and not be written, nor any folder of the user's own."""
    folders = [casebook.parent, Drafts(casebook).folder, tmp_path / "home"]
    folders[-1].mkdir()
    for path in (casebook, *casebook.parent.glob("casebook.db-*")):
        path.chmod(0o444)
    for folder in folders:
        folder.chmod(0o555)
    yield folders[-1]
    for folder in folders:
        folder.chmod(0o755)


def at_home(home: Path) -> dict[str, str | None]:
    """Return an environment whose every folder of the user is in one home."""
    own = {f"XDG_{kind}_HOME": str(home / kind.lower()) for kind in ("CACHE", "STATE", "DATA", "CONFIG")}
    return {"HOME": str(home), **own}


def test_a_casebook_that_may_not_be_written_is_shown_and_what_is_typed_is_not_lost(
    start, casebook: Path, shut: Path
):
    terminal = start(before=heed_modes, env=at_home(shut))
    terminal.wait("casebook.db may not be written by you: read only")
    at_worksheet(terminal)
    terminal.type(CTRL_N)
    terminal.wait("for the log")
    terminal.type("oil at the seal\r")
    terminal.wait("Nothing was written. Ask its owner for write permission")
    assert "oil at the seal" in terminal.text()
    terminal.type(CTRL_G)
    terminal.wait("Leave?")
    terminal.type("y")
    terminal.wait("No draft can be kept (Permission denied)")
    terminal.type("y")
    assert terminal.end() == 0
    assert b"Traceback" not in terminal.raw


def test_without_a_folder_that_may_be_written_everything_that_only_reads_works(casebook: Path, shut: Path):
    env = {name: str(value) for name, value in at_home(shut).items()}
    number = plateside("cases", "--casebook", str(casebook), before=heed_modes, **env)
    assert (number.returncode, number.stderr) == (0, "")
    case = number.stdout.splitlines()[-1].split()[0]
    for words in (["report", case], ["export", case], ["learned"]):
        ran = plateside(*words, "--casebook", str(casebook), before=heed_modes, **env)
        assert (ran.returncode, ran.stderr) == (0, ""), words
    for words in (["diagnose", str(SHEET)], ["expect", str(SHEET)], ["check-rules"]):
        ran = plateside(*words, before=heed_modes, **env)
        assert (ran.returncode, ran.stderr) == (0, ""), words
    assert list(shut.iterdir()) == []


@pytest.mark.parametrize("words", [["log", str(SHEET)], ["merge", str(SHEET)], ["--plain"]])
def test_where_no_casebook_can_be_made_it_is_said_where_and_what_to_do(shut: Path, words: list[str]):
    env = {name: str(value) for name, value in at_home(shut).items()}
    ran = plateside(*words, before=heed_modes, PLATESIDE_CASEBOOK="", **env)
    assert ran.returncode == 1
    assert str(shut / "data" / "plateside" / "casebook.db") in ran.stderr
    assert "Nothing was written. Ask its owner for write permission" in ran.stderr
    assert "Traceback" not in ran.stderr and "mistake" not in ran.stderr


def test_the_screens_say_the_same_where_no_casebook_can_be_made(start, casebook: Path, shut: Path):
    command = [sys.executable, "-m", "plateside"]
    env = {**at_home(shut), "PLATESIDE_CASEBOOK": None}
    terminal = start(before=heed_modes, env=env, command=command)
    assert terminal.end() == 1
    assert b"Ask its owner for write permission" in terminal.raw
    assert b"Traceback" not in terminal.raw and b"mistake" not in terminal.raw


# clocks and zones


@pytest.mark.parametrize(
    "zone",
    ["Nowhere/Nothing", "", ":", "XYZ-99", "XYZ-20", "Pacific/Kiritimati", "../../etc/passwd", "\x1b[31m"],
)
def test_a_wrong_time_zone_changes_what_is_shown_and_nothing_that_is_stored(casebook: Path, zone: str):
    ran = plateside("log", str(SHEET), "--casebook", str(casebook), TZ=zone)
    seen = plateside("cases", "--casebook", str(casebook), TZ=zone)
    told = f"plateside: there is no time zone {zone}: times are shown in UTC\n" if "XYZ" in zone else ""
    assert [(one.returncode, one.stderr) for one in (ran, seen)] == [(0, told)] * 2
    with open_casebook(casebook) as book:
        moment = book.cases()[0].last_utc
    assert abs(time.time() - moment.timestamp()) < 3600


# the casebook goes away, or changes, while it is open


def test_a_casebook_that_is_removed_meanwhile_is_put_back_with_the_next_entry(start, casebook: Path):
    terminal = at_worksheet(start())
    for path in casebook.parent.glob("casebook.db*"):
        if path.is_file():
            path.unlink()
    terminal.type(f"{CTRL_N}oil at the seal\r")
    terminal.wait("stored: remark")
    terminal.type("\x1b[20~")
    terminal.wait("was removed while it was open; it was put back")
    terminal.type(CTRL_G)
    assert terminal.end() == 0
    with open_casebook(casebook) as book:
        assert [note.what.text for note in book.case(book.cases()[0].id).notes] == ["oil at the seal"]


def test_a_newer_program_that_changes_the_tables_meanwhile_is_told(start, casebook: Path):
    terminal = at_worksheet(start())
    newer = sqlite3.connect(casebook)
    newer.execute("PRAGMA user_version = 99")
    newer.close()
    terminal.type(f"{CTRL_N}oil at the seal\r")
    terminal.wait("a newer Plateside has changed the tables")
    assert "oil at the seal" in terminal.text()
    terminal.type(CTRL_G)
    terminal.wait("Leave?")
    terminal.type("y")
    assert terminal.end() == 0
    assert any("note" in name for name in Drafts(casebook).names())


def test_a_casebook_of_a_newer_program_is_refused_in_words_by_the_screens(start, casebook: Path):
    newer = sqlite3.connect(casebook)
    newer.execute("PRAGMA user_version = 99")
    newer.close()
    terminal = start()
    assert terminal.end() == 1
    assert b"Update Plateside here; nothing in the file was changed" in b" ".join(terminal.raw.split())
    assert b"Traceback" not in terminal.raw and b"mistake" not in terminal.raw


def test_a_casebook_that_another_program_holds_is_told_and_what_is_typed_stays(start, casebook: Path):
    code = (
        "import plateside, pathlib, functools, tui.app, casebook.sqlite_store as s;"
        "s.SqliteStore.__init__.__kwdefaults__['timeout_s'] = 0.2;"
        f"raise SystemExit(tui.app.run_app(pathlib.Path({str(casebook)!r})))"
    )
    terminal = at_worksheet(start(command=[sys.executable, "-c", code]))
    holder = sqlite3.connect(casebook, isolation_level=None)
    holder.execute("BEGIN IMMEDIATE")
    terminal.type(f"{CTRL_N}oil at the seal\r")
    terminal.wait("casebook.db is held by another program")
    assert "oil at the seal" in terminal.text()
    holder.execute("ROLLBACK")
    holder.close()
    terminal.type("\r")
    terminal.wait("stored: remark")


def test_ctrl_c_pressed_again_and_again_leaves_once_and_quietly(start, casebook: Path):
    terminal = start()
    terminal.wait("P-104")
    for _ in range(200):
        terminal.type("\x03")
        if not terminal.pump(0.005):
            break
    assert terminal.end() == 0
    assert b"Traceback" not in terminal.raw and b"KeyboardInterrupt" not in terminal.raw


def test_a_draft_that_other_hands_were_at_steers_nothing(start, casebook: Path):
    with open_casebook(casebook) as book:
        case = book.cases()[0].id
    typed = '{"typed": "15\\ud800.2 \\u001b]0;t\\u0007\\u202e", "case": "x"}'
    Drafts(casebook)._path(f"case-{case}-R. Varga").write_text(typed, encoding="ascii")
    lines = '"lines": {"power": {}, "no": "\\u0007"}'
    begun = f'{{"tag": "F-7\\ud800\\u001b[2J", "complaint": ["x"], "kind": 7, {lines}}}'
    Drafts(casebook)._path("new_case").write_text(begun, encoding="ascii")
    terminal = start()
    terminal.wait("a new case was begun")
    terminal.type("\x1b[B")
    at_worksheet(terminal)
    terminal.wait("From your draft")
    assert "15 .2" in terminal.text()
    terminal.type("\x1b[20~")
    terminal.wait("a new case was begun")
    terminal.type("\x1b[H\r")
    terminal.wait("What is wrong")
    terminal.type("hot\r")
    terminal.wait("What kind")
    terminal.type("\r")
    terminal.wait("Nameplate")
    assert b"\x1b]0;" not in terminal.raw and b"\x1b[2J" not in terminal.raw
