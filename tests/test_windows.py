"""What Windows is strict about: file names, encodings of the console, modes, paths as SQLite takes them."""

import io
import os
import subprocess
import sys
from pathlib import Path, PureWindowsPath

import pytest

from calc.errors import PlatesideError
from casebook import place
from casebook.book import open_casebook
from rules.loading import load_knowledge
from tui import look, printing
from tui.compose import Visit
from tui.drafts import Drafts
from tui.page_parts import Page

ROOT = Path(__file__).resolve().parent.parent
SHEET = ROOT / "tests" / "sheets" / "pump_overload.yaml"


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
