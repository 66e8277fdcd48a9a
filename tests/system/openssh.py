"""A real OpenSSH server on loopback that runs nothing but Plateside, and logins to it."""

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
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from tests.tui.terminal import ROOT, Terminal

PATIENCE_S = 20.0
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


@contextmanager
def serving(folder: Path) -> Iterator[Server]:
    """An OpenSSH server that runs nothing but Plateside."""
    sshd = shutil.which("sshd", path=f"{os.environ.get('PATH', '')}:/usr/sbin:/usr/local/sbin")
    assert sshd and shutil.which("ssh"), "OpenSSH server and client are needed for this test"
    if os.geteuid() == 0:
        Path("/run/sshd").mkdir(mode=0o755, exist_ok=True)
    key(folder / "host_key")
    key(folder / "key")
    (folder / "authorized_keys").write_bytes((folder / "key.pub").read_bytes())
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        port = free.getsockname()[1]
    host = " ".join((folder / "host_key.pub").read_text().split()[:2])
    (folder / "known_hosts").write_text(f"[127.0.0.1]:{port} {host}\n")
    (folder / "book").mkdir()
    pam = "yes" if os.geteuid() == 0 and Path("/etc/pam.d/sshd").exists() else "no"
    config = folder / "sshd_config"
    config.write_text(CONFIG.format(port=port, folder=folder, pam=pam, command=forced(folder)))
    with (folder / "sshd.log").open("wb") as log:
        process = subprocess.Popen([sshd, "-D", "-e", "-f", str(config)], stderr=log)
    made = Server(process, port, folder)
    try:
        wait_for_port(made)
        yield made
    finally:
        process.send_signal(signal.SIGTERM)
        process.wait(timeout=10)


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


def wait_for_port(server: Server) -> None:
    """Wait until the server answers."""
    end = time.monotonic() + PATIENCE_S
    while time.monotonic() < end and server.process.poll() is None:
        with socket.socket() as probe:
            if probe.connect_ex(("127.0.0.1", server.port)) == 0:
                return
        time.sleep(0.05)
    raise AssertionError((server.folder / "sshd.log").read_text())


def log_in(server: Server, lines: list[Terminal]) -> Terminal:
    """Log in as a technician does."""
    line = Terminal(server.casebook, command=server.login())
    lines.append(line)
    try:
        line.wait("Cases, newest first")
    except AssertionError as error:
        raise AssertionError(f"{error}\n{(server.folder / 'sshd.log').read_text()}") from error
    return line


def wait_until_nothing_runs(server: Server) -> None:
    """Wait until the program has noticed that its line is gone."""
    end = time.monotonic() + PATIENCE_S
    while time.monotonic() < end:
        if not server.processes():
            return
        time.sleep(0.1)
    raise AssertionError(server.processes())
