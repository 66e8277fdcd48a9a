"""Plateside behind a real OpenSSH server: a login that can do nothing else, and a line that drops."""

from __future__ import annotations

import os
import shlex
import shutil
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

from casebook.book import open_casebook
from tests.tui.helpers import KIT, known_machine, new_app
from tests.tui.terminal import ROOT, Terminal
from tui.drafts import Drafts

pytestmark = pytest.mark.system
PATIENCE_S = 20.0
F3, F4, F5, F6, F7, F8, F9 = (f"\x1b[{code}~" for code in (13, 14, 15, 17, 18, 19, 20))
HELPERS = ("EDITOR", "VISUAL", "PAGER", "BROWSER", "SHELL")
CONFIG = """
Port {port}
ListenAddress 127.0.0.1
HostKey {folder}/host_key
PidFile {folder}/sshd.pid
AuthorizedKeysFile {folder}/authorized_keys
StrictModes no
PermitRootLogin prohibit-password
PasswordAuthentication no
KbdInteractiveAuthentication no
UsePAM {pam}
AllowTcpForwarding no
AllowAgentForwarding no
X11Forwarding no
PermitUserRC no
ForceCommand {command}
"""


@dataclass(frozen=True)
class Server:
    """A server of its own on loopback, and how to log in to it."""

    process: subprocess.Popen[bytes]
    port: int
    folder: Path

    @property
    def casebook(self) -> Path:
        """The casebook of everybody who logs in."""
        return self.folder / "book" / "casebook.db"

    @property
    def marker(self) -> Path:
        """A file that is there once an editor, a pager or a shell was started."""
        return self.folder / "something_was_started"

    def login(self, *command: str) -> list[str]:
        """Return the command that logs in; with words, one that asks for something else than the screens."""
        return [
            "ssh", "-F", "none", "-e", "none", "-p", str(self.port), "-i", str(self.folder / "key"),
            "-o", f"UserKnownHostsFile={self.folder}/known_hosts", "-o", "IdentitiesOnly=yes",
            *([] if command else ["-tt"]), "127.0.0.1", *command,
        ]  # fmt: skip

    def processes(self) -> list[str]:
        """Return the command lines of everything that runs below the server."""
        parents: dict[int, int] = {}
        for entry in Path("/proc").iterdir():
            if entry.name.isdigit():
                try:
                    stat = (entry / "stat").read_text()
                except OSError:
                    continue
                parents[int(entry.name)] = int(stat.rpartition(")")[2].split()[1])
        found, new = {self.process.pid}, True
        while new:
            new = {child for child, parent in parents.items() if parent in found} - found
            found |= new
        lines = []
        for pid in found:
            try:
                lines.append(Path(f"/proc/{pid}/cmdline").read_bytes().replace(b"\0", b" ").decode().strip())
            except OSError:
                continue
        return [line for line in lines if line and not line.startswith("sshd")]


def key(path: Path) -> None:
    """Make a key pair."""
    made = ["ssh-keygen", "-q", "-t", "ed25519", "-N", "", "-f", str(path)]
    subprocess.run(made, check=True, timeout=30)


def forced(folder: Path) -> str:
    """Return the one command that a login runs; whatever would start a helper leaves a mark instead."""
    helper = folder / "helper"
    helper.write_text(f"#!/bin/sh\ntouch {folder}/something_was_started\n")
    helper.chmod(0o755)
    own = {
        "PYTHONPATH": str(ROOT),
        "LANG": "C.UTF-8",
        "XDG_STATE_HOME": str(folder / "state"),
        **dict.fromkeys(HELPERS, str(helper)),
    }
    words = [f"{name}={value}" for name, value in own.items()]
    program = [sys.executable, "-m", "plateside", "--casebook", str(folder / "book" / "casebook.db")]
    return f"exec {shlex.join(['env', *words, *program])}"


@pytest.fixture
def server(tmp_path: Path) -> Iterator[Server]:
    """An OpenSSH server that runs nothing but Plateside."""
    sshd = shutil.which("sshd", path=f"{os.environ.get('PATH', '')}:/usr/sbin:/usr/local/sbin")
    assert sshd and shutil.which("ssh"), "OpenSSH server and client are needed for this test"
    if os.geteuid() == 0:
        Path("/run/sshd").mkdir(mode=0o755, exist_ok=True)
    key(tmp_path / "host_key")
    key(tmp_path / "key")
    (tmp_path / "authorized_keys").write_bytes((tmp_path / "key.pub").read_bytes())
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    host = " ".join((tmp_path / "host_key.pub").read_text().split()[:2])
    (tmp_path / "known_hosts").write_text(f"[127.0.0.1]:{port} {host}\n")
    (tmp_path / "book").mkdir()
    pam = "yes" if os.geteuid() == 0 and Path("/etc/pam.d/sshd").exists() else "no"
    config = tmp_path / "sshd_config"
    config.write_text(CONFIG.format(port=port, folder=tmp_path, pam=pam, command=forced(tmp_path)))
    with (tmp_path / "sshd.log").open("wb") as log:
        process = subprocess.Popen([sshd, "-D", "-e", "-f", str(config)], stderr=log)
    made = Server(process, port, tmp_path)
    try:
        wait_for_port(made)
        yield made
    finally:
        process.send_signal(signal.SIGTERM)
        process.wait(timeout=10)


def wait_for_port(server: Server) -> None:
    """Wait until the server answers."""
    end = time.monotonic() + PATIENCE_S
    while time.monotonic() < end and server.process.poll() is None:
        with socket.socket() as probe:
            if probe.connect_ex(("127.0.0.1", server.port)) == 0:
                return
        time.sleep(0.05)
    raise AssertionError((server.folder / "sshd.log").read_text())


@pytest.fixture
def book(server: Server) -> Path:
    """A casebook on the server with one known machine, the technician known."""
    app = known_machine(new_app(server.folder / "book"))
    app.desk.close()
    drafts = Drafts(server.casebook)
    drafts.remember("person", "R. Varga")
    drafts.remember("kit", KIT)
    return server.casebook


@pytest.fixture
def lines(server: Server) -> Iterator[list[Terminal]]:
    """Logins that a test opened; they are ended after it."""
    opened: list[Terminal] = []
    yield opened
    for line in opened:
        line.kill()


def log_in(server: Server, lines: list[Terminal]) -> Terminal:
    """Log in as a technician does."""
    line = Terminal(server.casebook, command=server.login())
    lines.append(line)
    try:
        line.wait("Cases, newest first")
    except AssertionError as error:
        raise AssertionError(f"{error}\n{(server.folder / 'sshd.log').read_text()}") from error
    return line


def test_a_case_is_taken_over_ssh_and_a_dropped_line_keeps_what_was_typed(
    server: Server, book: Path, lines: list[Terminal]
):
    line = log_in(server, lines)
    line.type("n")
    line.wait("Which machine")
    line.type("P-104\r")
    line.wait("What is wrong")
    line.type("runs hot\r")
    line.wait("faults")
    line.type(f"{F3}line current loaded\r")
    line.wait("three values in A")
    line.type("15.2 15.9 14")
    line.wait("15.2 15.9 14")
    os.kill(line.process.pid, signal.SIGKILL)  # the client is gone, as when the line drops
    wait_until_nothing_runs(server)
    again = log_in(server, lines)
    again.type("\r")
    again.wait("From your draft")
    assert "15.2 15.9 14" in again.text()
    with open_casebook(book) as stored:
        newest = stored.case(stored.cases()[0].id)
    assert (newest.complaint, newest.readings) == ("runs_hot", ())


def wait_until_nothing_runs(server: Server) -> None:
    """Wait until the program has noticed that its line is gone."""
    end = time.monotonic() + PATIENCE_S
    while time.monotonic() < end:
        if not server.processes():
            return
        time.sleep(0.1)
    raise AssertionError(server.processes())


PAGES = {
    "casebook": "",
    "worksheet": "\r",
    "reasons": f"\r{F5}",
    "gate": f"\r{F6}",
    "tick list": f"\r{F7}",
    "what was found": f"\r{F8}",
    "closing": f"\r{F8}\r",
    "sheet": f"\r{F8}\r{F4}",
    "machine": "m",
}
LEAVING = "\x03\x07\x11\x1b"  # they leave, or begin a code
CONTROL = [chr(code) for code in range(1, 32) if chr(code) not in LEAVING]
TRIED = [
    "!",
    ":",
    "|",
    "!sh",
    ":!sh",
    *CONTROL,
    "\x1bx",
    "\x1b!",
    *(f"\x1b[{code}~" for code in range(11, 20)),
]


@pytest.mark.parametrize("page", PAGES)
def test_no_key_opens_a_shell_an_editor_or_a_pager(
    server: Server, book: Path, lines: list[Terminal], page: str
):
    line = log_in(server, lines)
    for keys in PAGES[page]:
        line.type(keys)
    line.pump(1.0)
    for keys in TRIED:
        line.type(keys)
        line.pump(0.02)
        running = server.processes()
        assert running and all("-m plateside" in command for command in running), (keys, running)
    line.pump(0.5)
    assert not server.marker.exists()
    assert "keys" in line.text()


def test_a_command_or_a_file_transfer_is_not_what_a_login_gets(server: Server, book: Path):
    wanted = server.folder / "made_by_command"
    ran = subprocess.run(
        server.login("touch", str(wanted)), capture_output=True, text=True, timeout=60, check=False
    )
    assert ran.returncode == 1
    assert "the screens need a terminal" in ran.stderr
    assert not wanted.exists()


def test_a_sheet_is_written_beside_the_casebook_and_nowhere_else(
    server: Server, book: Path, lines: list[Terminal]
):
    line = log_in(server, lines)
    line.type("\r")
    line.wait("faults")
    line.type(F8)
    line.wait("What was it really")
    line.type("\r")
    line.wait("known by")
    line.type(F4)
    line.wait("Energising")
    before = {path for path in server.folder.rglob("*") if "book" not in path.parts}
    for name in ("../outside", "/tmp/plateside-outside", "~/outside"):
        line.type(F8)
        line.wait("beside the casebook")
        line.type(f"{name}\r")
        line.wait("without a folder")
    line.type(F8)
    line.wait("beside the casebook")
    line.type("mine\r")
    line.wait("written:")
    assert (book.parent / "sheets" / "mine.txt").read_text(encoding="utf-8").splitlines()[0].endswith("P-104")
    assert {path for path in server.folder.rglob("*") if "book" not in path.parts} == before
    assert not Path("/tmp/plateside-outside").exists()
