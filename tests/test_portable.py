"""A laptop without POSIX: no module of it is needed, and what the system lacks is done without.

The process under test cannot import them, and its ``os`` and ``signal`` lack what Windows lacks.
"""

import json
import os
import subprocess
import sys
from pathlib import Path, PureWindowsPath

import pytest

from casebook import place

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


def test_where_files_have_no_mode_no_sentence_on_it_is_shown(tmp_path, monkeypatch):
    path = tmp_path / "casebook.db"
    path.touch()
    path.chmod(0o666)
    assert "read by everybody" in place.privacy_note(path)
    monkeypatch.setattr(os, "name", "nt")
    assert place.privacy_note(path) == ""


@pytest.mark.parametrize(
    ("path", "uri"),
    [
        (r"C:\Users\Ines Varga\casebook.db", "file:///C:/Users/Ines%20Varga/casebook.db?mode=rw"),
        (r"\\shop\share\a#b?.db", "file:////shop/share/a%23b%3F.db?mode=rw"),
    ],
)
def test_a_file_is_named_to_sqlite_as_its_documentation_asks(path, uri):
    """URI filenames, sqlite.org: "file:///C:/Documents%20and%20Settings/...", four slashes for a share."""

    class Resolved(PureWindowsPath):
        def resolve(self):
            return self

    assert place.uri(Resolved(path), "mode=rw") == uri
