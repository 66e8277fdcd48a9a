"""What the tests over SSH share: a server of their own, its casebook, and the lines that they open."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.system.openssh import Server, serving
from tests.tui.helpers import KIT, known_machine, new_app
from tests.tui.terminal import Terminal
from tui.drafts import Drafts


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
