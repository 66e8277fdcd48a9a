"""A full disk, and places that may not be written: a sentence, and nothing that was typed is lost."""

from __future__ import annotations

import contextlib
import resource
import sys
from pathlib import Path

import pytest

from casebook.book import open_casebook
from tests.system.faults import (
    CTRL_G,
    CTRL_N,
    SHEET,
    Disk,
    at_home,
    at_worksheet,
    heed_modes,
    mishaps,
    plateside,
)

pytestmark = pytest.mark.system


def test_on_a_full_disk_what_was_typed_stays_and_is_stored_once_there_is_room(
    start, casebook: Path, disk: Disk, tmp_path: Path
):
    terminal = at_worksheet(start())
    terminal.type(CTRL_N)
    terminal.wait("for the log")
    disk.fill(terminal)
    terminal.type("oil at the seal")
    terminal.wait("oil at the seal")
    terminal.type("\r")
    terminal.wait("Nothing was written.")
    assert "oil at the seal" in terminal.text()
    terminal.type(CTRL_G)
    terminal.wait("Leave?")
    terminal.type("n")
    terminal.wait("oil at the seal")
    disk.free(terminal)
    terminal.type("\r")
    terminal.wait("stored: remark")
    terminal.type(CTRL_G)
    assert terminal.end() == 0
    assert not mishaps(tmp_path)
    with open_casebook(casebook) as book:
        assert [note.what.text for note in book.case(book.cases()[0].id).notes] == ["oil at the seal"]


def test_a_command_on_a_full_disk_says_so_and_writes_nothing(casebook: Path, disk: Disk):
    before = plateside("export", "--json-lines", "--casebook", str(casebook)).stdout
    with contextlib.suppress(OSError), (disk.folder / "filler").open("wb", buffering=0) as file:
        while disk.is_mounted:
            file.write(b"x" * 4096)
    limit = None if disk.is_mounted else lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (8192, 8192))
    ran = plateside("log", str(SHEET), "--casebook", str(casebook), before=limit)
    assert (ran.returncode, ran.stdout) == (1, "")
    assert ran.stderr.startswith("plateside: ")
    assert "Nothing was written." in ran.stderr
    assert "Traceback" not in ran.stderr
    (disk.folder / "filler").unlink()
    assert plateside("export", "--json-lines", "--casebook", str(casebook)).stdout == before


def test_a_casebook_that_may_not_be_written_is_shown_and_what_is_typed_is_not_lost(
    start, casebook: Path, shut: Path
):
    terminal = start(before=heed_modes, env=at_home(shut))
    terminal.wait("casebook.db may not be written by you: read only")
    at_worksheet(terminal)
    terminal.type(CTRL_N)
    terminal.wait("for the log")
    terminal.type("oil at the seal\r")
    terminal.wait("Nothing was written. Ask its owner for write permission")
    assert "oil at the seal" in terminal.text()
    terminal.type(CTRL_G)
    terminal.wait("Leave?")
    terminal.type("y")
    terminal.wait("No draft can be kept (Permission denied)")
    terminal.type("y")
    assert terminal.end() == 0
    assert b"Traceback" not in terminal.raw


def test_without_a_folder_that_may_be_written_everything_that_only_reads_works(casebook: Path, shut: Path):
    env = {name: str(value) for name, value in at_home(shut).items()}
    number = plateside("cases", "--casebook", str(casebook), before=heed_modes, **env)
    assert (number.returncode, number.stderr) == (0, "")
    case = number.stdout.splitlines()[-1].split()[0]
    for words in (["report", case], ["export", case], ["learned"]):
        ran = plateside(*words, "--casebook", str(casebook), before=heed_modes, **env)
        assert (ran.returncode, ran.stderr) == (0, ""), words
    for words in (["diagnose", str(SHEET)], ["expect", str(SHEET)], ["check-rules"]):
        ran = plateside(*words, before=heed_modes, **env)
        assert (ran.returncode, ran.stderr) == (0, ""), words
    assert list(shut.iterdir()) == []


@pytest.mark.parametrize("words", [["log", str(SHEET)], ["merge", str(SHEET)], ["--plain"]])
def test_where_no_casebook_can_be_made_it_is_said_where_and_what_to_do(shut: Path, words: list[str]):
    env = {name: str(value) for name, value in at_home(shut).items()}
    ran = plateside(*words, before=heed_modes, PLATESIDE_CASEBOOK="", **env)
    assert ran.returncode == 1
    assert str(shut / "data" / "plateside" / "casebook.db") in ran.stderr
    assert "Nothing was written. Ask its owner for write permission" in ran.stderr
    assert "Traceback" not in ran.stderr and "mistake" not in ran.stderr


def test_the_screens_say_the_same_where_no_casebook_can_be_made(start, casebook: Path, shut: Path):
    command = [sys.executable, "-m", "plateside"]
    env = {**at_home(shut), "PLATESIDE_CASEBOOK": None}
    terminal = start(before=heed_modes, env=env, command=command)
    assert terminal.end() == 1
    assert b"Ask its owner for write permission" in terminal.raw
    assert b"Traceback" not in terminal.raw and b"mistake" not in terminal.raw
