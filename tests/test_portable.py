"""A laptop without POSIX: no module of it is needed, and what the system lacks is done without.

The process under test cannot import them, and its ``os`` and ``signal`` lack what Windows lacks.
"""

import json
import subprocess
import sys
from pathlib import Path

from tui import driver

ROOT = Path(__file__).resolve().parent.parent
SHEET = ROOT / "tests" / "sheets" / "pump_overload.yaml"

# Modules and attributes that the documentation of Python gives for Unix only; without those that a library
# asks for by the name of the platform, as it would not on Windows.
LESS = """
import builtins, os, signal, sys
POSIX = {"fcntl", "termios", "tty", "pty", "pwd", "grp", "resource", "curses", "readline", "syslog"}
class Refuse:
    def find_spec(self, name, path=None, target=None):
        if name.partition(".")[0] in POSIX:
            raise ModuleNotFoundError(f"No module named {name!r}", name=name)
sys.meta_path.insert(0, Refuse())
for name in POSIX:
    sys.modules.pop(name, None)
for name in ("fchmod", "fchown", "chown", "lchown", "getgroups", "setsid", "fork", "forkpty", "openpty",
             "killpg", "mkfifo", "O_DIRECTORY", "O_NOFOLLOW", "O_NONBLOCK", "O_CLOEXEC", "sync", "fdatasync",
             "statvfs", "sched_getaffinity", "getloadavg"):
    if hasattr(os, name):
        delattr(os, name)
for name in ("SIGHUP", "SIGKILL", "SIGWINCH", "SIGTSTP", "SIGCONT", "SIGUSR1", "SIGALRM", "alarm",
             "setitimer", "pthread_sigmask", "SIGPIPE", "SIGQUIT", "SIGCHLD"):
    if hasattr(signal, name):
        delattr(signal, name)
"""


def without_posix(code: str, folder: Path) -> str:
    """Run code in such a process; return what it printed."""
    environment = {
        "PATH": "", "PYTHONPATH": str(ROOT), "HOME": str(folder), "USERNAME": "ines",
        "PLATESIDE_CASEBOOK": str(folder / "book" / "casebook.db"),
    }  # fmt: skip
    command = [sys.executable, "-c", LESS + "import plateside\n" + code]
    done = subprocess.run(
        command, capture_output=True, text=True, env=environment, cwd=folder, check=False, timeout=120
    )
    assert done.returncode == 0, done.stderr
    assert "a mistake of the program" not in done.stderr
    return done.stdout


def test_the_process_under_test_lacks_what_it_should(tmp_path):
    code = """
import os, signal
for name in ("fcntl", "termios", "pwd"):
    try:
        __import__(name)
    except ImportError:
        print(name)
print(hasattr(os, "fchmod"), hasattr(signal, "SIGHUP"))
"""
    assert without_posix(code, tmp_path).split() == ["fcntl", "termios", "pwd", "False", "False"]


def test_a_case_is_logged_listed_reported_merged_and_copied(tmp_path):
    code = f"""
from tui.cli import main
assert main(["log", {str(SHEET)!r}, "--person", "Ines"]) == 0
assert main(["export", "--to", "sheets"]) == 0
assert main(["copy", "copy.db"]) == 0
assert main(["merge", "copy.db", "--casebook", "other.db"]) == 0
assert main(["cases", "--json"]) == 0
"""
    lines = without_posix(code, tmp_path).splitlines()
    assert json.loads(lines[-1])["tag"] == "WP-104 wash water"
    assert ", 0 left out" in lines[-2]
    assert len(list((tmp_path / "sheets").iterdir())) == 1


def test_a_case_is_weighed_and_printed(tmp_path):
    code = f"""
from tui.cli import main
assert main(["log", {str(SHEET)!r}]) == 0
assert main(["diagnose", {str(SHEET)!r}]) == 0
from casebook.book import open_casebook
with open_casebook() as book:
    assert book.notes == ()
    number = book.number(book.cases()[0].id)
assert main(["report", number]) == 0
"""
    out = without_posix(code, tmp_path)
    assert "Likely faults" in out
    assert "by ines" in out


def test_a_draft_outlives_the_form(tmp_path):
    code = """
from pathlib import Path
from tui.drafts import Drafts
Drafts(Path("casebook.db")).save("nameplate-ines", {"power": "7.5 kW"})
print(Drafts(Path("casebook.db")).load("nameplate-ines"))
"""
    assert without_posix(code, tmp_path).strip() == "{'power': '7.5 kW'}"


def test_every_module_of_the_headless_program_is_imported_without_posix(tmp_path):
    code = """
import importlib, pkgutil
import calc, rules, casebook, tui.commands
for package in (calc, rules, casebook, tui.commands):
    for found in pkgutil.walk_packages(package.__path__, package.__name__ + "."):
        importlib.import_module(found.name)
import tui.plain, tui.drafts, tui.mishaps, tui.desk, tui.progress
print("imported")
"""
    assert without_posix(code, tmp_path).strip() == "imported"


def test_the_screens_are_imported_without_posix(tmp_path):
    code = "from tui.app import prepare\nprepare()\nimport tui.application\nprint('imported')"
    assert without_posix(code, tmp_path).strip() == "imported"


SCREENS = """
import asyncio
from pathlib import Path
from tui.app import prepare
prepare()
from textual.drivers.headless_driver import HeadlessDriver
from tui import application

class Console(HeadlessDriver):
    is_headless = property(lambda self: False)  # the program takes it for a person's terminal

def no_signals(loop, number, act):
    raise NotImplementedError  # as the loops of Windows do

asyncio.SelectorEventLoop.add_signal_handler = no_signals
application.cell_driver = lambda: Console

async def walk(pilot):
    await pilot.press("n")
    await pilot.press(*"P-9")
    pilot.app.exit(0)

app = application.PlatesideApp(Path("casebook.db"), person="Ines")
status = app.run(auto_pilot=walk, size=(80, 24), mouse=False)
print("ended with", status, app.return_code, app.is_headless)
"""


def test_the_screens_run_where_no_signal_can_be_heard(tmp_path):
    """Documentation of Python: ``loop.add_signal_handler`` and ``signal.SIGHUP`` are there on Unix only."""
    assert without_posix(SCREENS, tmp_path).strip() == "ended with 0 0 False"


def test_where_textual_has_a_driver_of_its_own_for_the_system_that_one_is_taken(monkeypatch):
    assert driver.cell_driver() is not None
    monkeypatch.setattr(sys, "platform", "win32")
    assert driver.cell_driver() is None


def test_a_python_that_is_too_old_is_told_so_in_one_line(tmp_path):
    code = "import sys\nsys.version_info = (3, 10, 13)\nimport plateside"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, cwd=ROOT, check=False, timeout=60
    )
    assert done.returncode == 1
    assert done.stderr == "plateside: needs Python 3.11 or newer; this is 3.10\n"
