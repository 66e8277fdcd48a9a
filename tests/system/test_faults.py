"""Kills, dropped lines, odd zones and drafts, a casebook that goes away or changes while it is open."""

from __future__ import annotations

import os
import signal
import sqlite3
import sys
import time
from pathlib import Path

import pytest

from casebook.book import open_casebook
from tests.system.faults import CTRL_G, CTRL_N, SHEET, at_worksheet, has_ended, plateside, wait_for
from tui.drafts import Drafts

pytestmark = pytest.mark.system


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
