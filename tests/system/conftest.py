"""What system tests share: an SSH server with its casebook, a small disk, the program on it, shut places."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from tests.system.faults import Disk
from tests.system.openssh import Server, serving
from tests.tui.helpers import known_machine, new_app, open_case_in, remember
from tests.tui.terminal import Terminal
from tui.drafts import Drafts

# over SSH


@pytest.fixture
def server(tmp_path: Path) -> Iterator[Server]:
    """An OpenSSH server that runs nothing but Plateside."""
    with serving(tmp_path) as made:
        yield made


@pytest.fixture
def book(server: Server) -> Path:
    """A casebook on the server with one known machine, the technician known."""
    app = known_machine(new_app(server.folder / "book"))
    app.desk.close()
    remember(server.casebook)
    return server.casebook


@pytest.fixture
def lines(server: Server) -> Iterator[list[Terminal]]:
    """Logins that a test opened; they are ended after it."""
    opened: list[Terminal] = []
    yield opened
    for line in opened:
        line.kill()


# faults


@pytest.fixture
def disk(tmp_path: Path) -> Iterator[Disk]:
    """A disk of its own for the casebook."""
    disk = Disk(tmp_path / "disk")
    yield disk
    disk.end()


@pytest.fixture
def casebook(tmp_path: Path, disk: Disk) -> Path:
    """A casebook with one open case and a known technician."""
    return open_case_in(disk.folder / "shop" / "casebook.db")


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
