"""The real program in a real pty and in tmux: terminals, locales, signals, drafts."""

from __future__ import annotations

import os
import signal
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from casebook.book import open_casebook
from tests.tui.helpers import open_case_in, remember
from tests.tui.terminal import ROOT, Terminal, Tmux

pytestmark = pytest.mark.system
F4, F8, F9 = "\x1b[14~", "\x1b[19~", "\x1b[20~"
CTRL_G, CTRL_L = "\x07", "\x0c"


@pytest.fixture
def casebook(tmp_path: Path) -> Path:
    """A casebook with one open case and a known technician."""
    return open_case_in(tmp_path / "casebook.db")


@pytest.fixture
def started(casebook: Path) -> Iterator[list[Terminal]]:
    """Terminals that a test started; they are ended after it."""
    terminals: list[Terminal] = []
    yield terminals
    for terminal in terminals:
        terminal.kill()


ENVIRONMENTS = {
    "xterm": {},
    "vt100": {"TERM": "vt100"},
    "linux": {"TERM": "linux"},
    "screen": {"TERM": "screen"},
    "unset": {"TERM": None},
    "nonsense": {"TERM": "no-such-terminal"},
    "no colour": {"NO_COLOR": "1"},
    "locale C": {"LANG": "C", "LC_CTYPE": None},
    "ascii output": {"PYTHONIOENCODING": "ascii"},
    "wrong colour system": {"TEXTUAL_COLOR_SYSTEM": "none"},
}


@pytest.mark.parametrize("name", ENVIRONMENTS)
def test_a_case_opens_and_the_program_leaves_cleanly_on_any_terminal(
    casebook: Path, started: list[Terminal], name: str
):
    terminal = Terminal(casebook, env=ENVIRONMENTS[name])
    started.append(terminal)
    terminal.wait("P-104")
    terminal.type("\r")
    terminal.wait("type")
    terminal.wait("faults")
    terminal.type(CTRL_G)
    assert terminal.end() == 0


@pytest.mark.parametrize("name", ["vt100", "locale C", "ascii output"])
def test_where_utf_8_is_not_sure_only_ascii_is_sent(casebook: Path, started: list[Terminal], name: str):
    terminal = Terminal(casebook, env=ENVIRONMENTS[name])
    started.append(terminal)
    terminal.wait("P-104")
    terminal.type("\r")
    terminal.wait("faults")
    assert terminal.raw.isascii()
    assert b"\\u" not in terminal.raw


def test_ascii_can_be_asked_for_on_any_terminal(casebook: Path, started: list[Terminal]):
    command = [sys.executable, "-m", "plateside", "--ascii", "--casebook", str(casebook)]
    terminal = Terminal(casebook, command=command)
    started.append(terminal)
    terminal.wait("P-104")
    assert terminal.raw.isascii()


def test_without_colour_no_colour_is_sent(casebook: Path, started: list[Terminal]):
    terminal = Terminal(casebook, env={"NO_COLOR": "1"})
    started.append(terminal)
    terminal.wait("P-104")
    terminal.type("\r")
    terminal.wait("faults")
    cells = [terminal.screen.buffer[y][x] for y in range(24) for x in range(80)]
    assert {(cell.fg, cell.bg) for cell in cells} == {("default", "default")}


def test_the_line_that_has_the_bar_is_reverse_so_that_it_shows_without_colour(
    casebook: Path, started: list[Terminal]
):
    terminal = Terminal(casebook, env={"NO_COLOR": "1"})
    started.append(terminal)
    terminal.wait("P-104")
    row = next(y for y, line in enumerate(terminal.screen.display) if "P-104" in line)
    assert terminal.screen.buffer[row][12].reverse


@pytest.mark.parametrize("which", [signal.SIGHUP, signal.SIGTERM])
def test_a_dropped_line_keeps_what_was_typed(casebook: Path, started: list[Terminal], which: signal.Signals):
    terminal = Terminal(casebook)
    started.append(terminal)
    terminal.wait("P-104")
    terminal.type("\r")
    terminal.wait("faults")
    terminal.type("15.2 15.9 14")
    terminal.wait("15.2 15.9 14")
    os.kill(terminal.process.pid, which)
    terminal.end()
    again = Terminal(casebook)
    started.append(again)
    again.wait("P-104")
    again.type("\r")
    again.wait("From your draft")
    assert "15.2 15.9 14" in again.text()


def test_a_new_case_that_was_begun_is_taken_up_after_a_dropped_line(casebook: Path, started: list[Terminal]):
    terminal = Terminal(casebook)
    started.append(terminal)
    terminal.wait("P-104")
    terminal.type("nF-7\rhot\r\r10 hp\r230/460\r26")
    terminal.wait("26 A: rated amps")
    os.kill(terminal.process.pid, signal.SIGHUP)
    terminal.end()
    again = Terminal(casebook)
    started.append(again)
    again.wait("F-7: a new case was begun")
    again.type("\r")
    again.wait("10 hp: rated output")
    again.wait("26 A: rated amps")


def test_leaving_asks_where_something_is_typed(casebook: Path, started: list[Terminal]):
    terminal = Terminal(casebook)
    started.append(terminal)
    terminal.wait("P-104")
    terminal.type("\r")
    terminal.wait("faults")
    terminal.type("15.2")
    terminal.wait("15.2")
    terminal.type(CTRL_G)
    terminal.wait("Leave?")
    terminal.type("n")
    terminal.wait("faults")
    terminal.type(CTRL_G)
    terminal.wait("Leave?")
    terminal.type("y")
    assert terminal.end() == 0


def test_ctrl_l_draws_everything_again_after_noise_on_the_line(casebook: Path, started: list[Terminal]):
    terminal = Terminal(casebook)
    started.append(terminal)
    terminal.wait("Cases, newest first")
    terminal.pump(0.3)
    before = terminal.text()
    terminal.stream.feed(b"\x1b[5;1Hnoise from another program")
    assert terminal.text() != before
    terminal.type(CTRL_L)
    terminal.pump(0.5)
    assert terminal.text() == before


# The program with the driver that Textual itself would take.
WHOLE_FRAMES = """
import sys
import plateside
from tui.app import prepare
prepare()
from tui import application
application.cell_driver = lambda: None
from tui.cli import main
sys.exit(main(["--casebook", sys.argv[1]]))
"""


def test_the_screen_is_the_same_with_and_without_the_cell_diffing_driver(
    casebook: Path, started: list[Terminal]
):
    steps = ["\r", "\x1b[13~", "line", "\r", "15.2", " 15.9 14.8", F9]
    shown, sent = [], []
    for command in ([sys.executable, "-m", "plateside", "--casebook"], [sys.executable, "-c", WHOLE_FRAMES]):
        own = casebook.with_name(f"{len(shown)}.db")  # what is typed stays there as a draft
        with open_casebook(casebook) as book:
            book.safe_copy(own)
        remember(own)
        terminal = Terminal(own, command=[*command, str(own)])
        started.append(terminal)
        terminal.wait("P-104")
        screens = []
        for step in steps:
            terminal.type(step)
            terminal.pump(1.5)
            cells = terminal.screen.buffer
            screens.append(
                [
                    [(cells[y][x].data, cells[y][x].reverse, cells[y][x].bold) for x in range(80)]
                    for y in range(24)
                ]
            )
        shown.append(screens)
        sent.append(len(terminal.raw))
        terminal.kill()
    assert shown[0] == shown[1]
    assert 2 * sent[0] < sent[1]  # else both were the same driver


def test_a_window_that_changes_its_size_is_laid_out_anew(casebook: Path, started: list[Terminal]):
    terminal = Terminal(casebook, columns=120, rows=40)
    started.append(terminal)
    terminal.wait("P-104")
    terminal.type("\r")
    terminal.wait("faults")
    terminal.screen.resize(12, 40)
    terminal.process.setwinsize(12, 40)
    terminal.wait("F2 help F3 pick F9 back")  # the key line of so narrow a page
    assert "gate" in terminal.text() and "next" in terminal.text()
    assert "keys" in terminal.screen.display[11]
    assert "type" in terminal.screen.display[10]


def test_a_mistake_of_the_program_shows_one_line_and_no_values(
    casebook: Path, tmp_path: Path, started: list[Terminal]
):
    code = (
        "import plateside, pathlib, tui.app, tui.application as a;"
        "a.PlatesideApp.load = lambda self: 1 / 0;"
        f"raise SystemExit(tui.app.run_app(pathlib.Path({str(casebook)!r})))"
    )
    env = {"XDG_STATE_HOME": str(tmp_path)}
    terminal = Terminal(casebook, env=env, command=[sys.executable, "-c", code])
    started.append(terminal)
    assert terminal.end() == 1
    last = terminal.raw.rpartition(b"\x1b[?1049l")[2].decode()
    assert "mistake of the program (ZeroDivisionError)" in last
    assert "Traceback" not in last and "locals" not in last
    assert "ZeroDivisionError" in (tmp_path / "plateside" / "mishaps.log").read_text()


def test_a_case_is_taken_in_tmux_with_tags_typed_ahead(casebook: Path):
    command = f"cd {ROOT} && {sys.executable} -m plateside --casebook {casebook}"
    tmux = Tmux(command)
    try:
        tmux.wait("P-104")
        tmux.type("n")
        tmux.type("P-104")
        tmux.keys("Enter")
        tmux.type("hot")
        tmux.keys("Enter")
        tmux.wait("faults")
        tmux.keys("F3")
        tmux.type("line current loaded")
        tmux.keys("Enter")
        tmux.type("15.2 15.9 14.8")
        tmux.keys("Enter")
        tmux.wait("Before readings")
        tmux.keys("Enter")
        tmux.wait("stored: line current")
        tmux.keys("F8")
        tmux.wait("What was it really")
        tmux.keys("Enter")
        tmux.wait("known by")
        tmux.keys("F8")
        tmux.wait("Cases, newest first")
        tmux.keys("F9")
        tmux.wait("EXIT=0")
    finally:
        tmux.kill()
    with open_casebook(casebook) as book:
        assert book.case(book.cases()[0].id).status == "closed"
