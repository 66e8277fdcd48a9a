"""A dumb terminal gets the plain visit, in a real pty."""

import os
import sys
from pathlib import Path

import pexpect
import pytest

ROOT = Path(__file__).resolve().parent.parent.parent
SHEET = ROOT / "tests" / "sheets" / "pump_overload.yaml"
pytestmark = pytest.mark.system


@pytest.fixture
def terminal(tmp_path):
    own = {"TERM": "dumb", "PYTHONPATH": str(ROOT), "PLATESIDE_CASEBOOK": str(tmp_path / "book.db")}
    env = {**os.environ, **own}
    command = [sys.executable, "-m", "plateside"]
    pexpect.run(" ".join([*command, "log", str(SHEET)]), env=env)
    child = pexpect.spawn(command[0], command[1:], env=env, encoding="utf-8", timeout=30)
    yield child
    child.close(force=True)


def test_a_dumb_terminal_gets_questions_in_lines_and_no_escape_code(terminal):
    terminal.expect("Your name")
    terminal.sendline("Ines")
    terminal.expect("Machine tag")
    terminal.sendline("WP-104 wash water")
    terminal.expect("Is it this one")
    terminal.sendline("yes")
    terminal.expect("What is wrong")
    assert "\x1b" not in terminal.before
    terminal.sendeof()
    terminal.expect("is in the casebook")
    terminal.expect(pexpect.EOF)
    terminal.close()
    assert terminal.exitstatus == 0


def test_an_interrupt_leaves_without_a_traceback(terminal):
    terminal.expect("Your name")
    terminal.sendintr()
    terminal.expect(pexpect.EOF)
    assert "Traceback" not in terminal.before
