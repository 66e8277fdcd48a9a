"""A visit over a real OpenSSH server: a case is taken, the line drops, a sheet is written."""

from __future__ import annotations

import os
import signal
from pathlib import Path

import pytest

from casebook.book import open_casebook
from tests.system.openssh import Server, log_in, wait_until_nothing_runs
from tests.tui.terminal import Terminal

pytestmark = pytest.mark.system
F3, F4, F8 = "\x1b[13~", "\x1b[14~", "\x1b[19~"


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
