"""A laptop without POSIX: no module of it is needed, and what the system lacks is done without.

The process under test cannot import them, and its ``os`` and ``signal`` lack what Windows lacks.
"""

import io
import json
import os
import subprocess
import sys
from pathlib import Path, PureWindowsPath

import pytest

from calc.errors import PlatesideError
from casebook import place
from casebook.book import open_casebook
from rules.loading import load_knowledge
from tui import driver, look, printing
from tui.compose import Visit
from tui.drafts import Drafts
from tui.page_parts import Page

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


@pytest.mark.parametrize(
    ("encoding", "is_ascii"), [("utf-8", False), ("cp437", True), ("cp1252", True), ("", True)]
)
def test_on_windows_the_encoding_of_the_console_alone_decides_what_can_be_shown(
    monkeypatch, encoding, is_ascii
):
    console = io.TextIOWrapper(io.BytesIO(), encoding=encoding) if encoding else None
    monkeypatch.setattr(sys, "platform", "win32")
    monkeypatch.setattr(sys, "__stdout__", console)
    assert look.needs_ascii({}) is is_ascii


# Kept for devices, with any ending: "Naming Files, Paths, and Namespaces", learn.microsoft.com (from memory).
DEVICES = ("CON", "PRN", "AUX", "NUL", *(f"COM{n}" for n in range(10)), *(f"LPT{n}" for n in range(10)))
EMPTY = Page(title="x", facts=(), blocks=())


@pytest.mark.parametrize("name", [*DEVICES, "nul.txt", "Aux.tar.html", "com1 .txt"])
def test_a_sheet_never_gets_the_name_of_a_device_of_windows(name, tmp_path):
    with pytest.raises(PlatesideError, match="Windows keeps that name for a device"):
        printing.write(EMPTY, tmp_path / "casebook.db", name)
    assert not (tmp_path / "sheets").exists()


@pytest.mark.parametrize("name", ["a:b", "a.", "a ", "a*", "a?", "a\\b", 'a"', "a|b", "<a>", "..", "a\n"])
def test_a_sheet_never_gets_a_name_that_windows_cannot_write(name, tmp_path):
    with pytest.raises(PlatesideError, match="a name without a folder"):
        printing.write(EMPTY, tmp_path / "casebook.db", name)


def shipped_files():
    """Yield the files of the project as a checkout has them."""
    for folder in ("plateside", "calc", "rules", "casebook", "tui", "tests", "benchmarks", "tools", "docs"):
        for path in (ROOT / folder).rglob("*"):
            if path.is_file() and "__pycache__" not in path.parts:
                yield path.relative_to(ROOT).as_posix()


def test_every_file_of_the_project_can_be_unpacked_on_windows():
    names = list(shipped_files())
    assert len(names) == len({name.lower() for name in names})
    assert [name for name in names if not is_a_name_on_windows(name)] == []


def is_a_name_on_windows(name):
    """Whether Windows can have a file of this name; the parts stand between slashes."""
    return not set(name) & set('<>:"|?*\\') and all(
        part.partition(".")[0].upper() not in DEVICES and not part.endswith((".", " "))
        for part in name.split("/")
    )


def test_every_file_that_the_program_writes_has_a_name_that_windows_can_have(tmp_path):
    sheet = tmp_path / "given.yaml"
    text = SHEET.read_text(encoding="utf-8")
    sheet.write_text(text.replace("WP-104 wash water", "'NUL: a/b*?.'"), encoding="utf-8")
    for words in (
        ["log", str(sheet), "--person", "CON: *?"],
        ["export", "--to", "sheets"],
        ["copy", "copy.db"],
        ["demo", "--build", "plant.db"],
    ):
        assert program(words, tmp_path, PLATESIDE_CASEBOOK="book/casebook.db").returncode == 0
    Drafts(tmp_path / "book" / "casebook.db").save("case-1-CON: *?", {"typed": "15.2"})
    with open_casebook(tmp_path / "book" / "casebook.db") as book:
        visit = Visit(book, book.cases()[0].id, person="x", knowledge=load_knowledge())
        printing.write(EMPTY, tmp_path / "book" / "casebook.db", printing.usual_name(visit))
    written = [path.relative_to(tmp_path).as_posix() for path in tmp_path.rglob("*") if path.is_file()]
    assert len(written) >= 6
    assert [name for name in written if not is_a_name_on_windows(name)] == []


def program(words, folder, *options, typed=b"", **environment):
    """Run the program with options of Python and an environment of its own."""
    return subprocess.run(
        [sys.executable, *options, "-m", "plateside", *words],
        input=typed,
        capture_output=True,
        env={"PATH": "", "PYTHONPATH": str(ROOT), "HOME": str(folder), **environment},
        cwd=folder,
        check=False,
        timeout=120,
    )


def test_no_file_is_opened_in_the_encoding_of_the_day(tmp_path):
    """PEP 597: Python itself says where text is read or written without a named encoding."""
    (tmp_path / "shop").mkdir()
    for words in (
        ["log", str(SHEET), "--person", "Ines"],
        ["diagnose", str(SHEET)],
        ["cases"],
        ["export", "--to", "sheets"],
        ["export", "--csv"],
        ["copy", "copy.db"],
        ["merge", "copy.db"],
        ["salvage", "copy.db", "saved.db"],
        ["demo", "--build", "plant.db"],
        ["check-rules", "shop"],
    ):
        done = program(words, tmp_path, "-X", "warn_default_encoding", "-W", "error::EncodingWarning")
        assert done.returncode == 0, (words, done.stderr)


@pytest.mark.parametrize("encoding", ["cp437", "cp1252", "ascii"])
def test_on_a_console_without_utf_8_every_command_says_what_it_has_to_say(encoding, tmp_path):
    sheet = tmp_path / "ö.yaml"
    text = SHEET.read_text(encoding="utf-8")
    sheet.write_text(text.replace("WP-104 wash water", "WP-104 Köhler Ω 水"), encoding="utf-8")
    for words in (
        ["--help"],
        ["diagnose", "--help"],
        ["log", str(sheet), "--person", "Žofie"],
        ["diagnose", str(sheet)],
        ["cases"],
        ["export"],
        ["learned"],
        ["check-rules"],
    ):
        done = program(words, tmp_path, PYTHONIOENCODING=encoding, PYTHONUTF8="0")
        assert (done.returncode, done.stderr) == (0, b""), words
        done.stdout.decode("utf-8" if words[0] == "export" else encoding)


@pytest.mark.parametrize("encoding", ["cp437", "utf-8", "ascii"])
def test_a_typed_line_that_is_not_of_the_consoles_encoding_is_asked_for_again(encoding, tmp_path):
    typed = b"J\xf6rg\xff\nJoerg\n\n"
    done = program(["--plain"], tmp_path, typed=typed, PYTHONIOENCODING=encoding, PYTHONUTF8="0")
    assert (done.returncode, done.stderr) == (0, b"")
    out = done.stdout.decode(encoding)
    asked = 1 if encoding == "cp437" else 2  # cp437 has a letter for every byte
    assert out.count("Your name") == asked
    assert out.count(f"That line is no {encoding}: type it again, or without accents.") == asked - 1


def test_a_python_that_is_too_old_is_told_so_in_one_line(tmp_path):
    code = "import sys\nsys.version_info = (3, 10, 13)\nimport plateside"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, cwd=ROOT, check=False, timeout=60
    )
    assert done.returncode == 1
    assert done.stderr == "plateside: needs Python 3.11 or newer; this is 3.10\n"


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
