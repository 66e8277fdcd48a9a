"""Several processes write at once, and some of them die: nothing that was acknowledged is lost."""

import os
import random
import signal
import subprocess
import sys
import time
from collections import Counter
from pathlib import Path

import pytest

from casebook import bodies as b
from casebook.book import open_casebook
from casebook.errors import CasebookError, DiskFull

from .conftest import a_sheet, is_sound

WRITER = Path(__file__).with_name("writer.py")


def start(path: Path, person: str, count: int) -> subprocess.Popen[str]:
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(entry for entry in sys.path if entry)}
    return subprocess.Popen(
        [sys.executable, str(WRITER), str(path), person, str(count)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        env=environment,
    )


def write_at_once(path: Path, processes: int, count: int) -> None:
    running = [start(path, f"person {place}", count) for place in range(processes)]
    acknowledged: set[str] = set()
    for process in running:
        out, errors = process.communicate(timeout=300)
        assert (process.returncode, errors) == (0, "")
        acknowledged |= set(out.split())
    with open_casebook(path) as book:
        held = list(book.store.all_entries())
        assert acknowledged <= {entry.id for entry in held}
        assert len(acknowledged) == processes * count
        per_person = Counter(entry.person for entry in held)
        assert set(per_person.values()) == {count + 1}
        assert sum(row.entries for row in book.cases()) == len(held)
        assert len(book.search("note")) == processes
    assert is_sound(path)


def kill_at_random_moments(path: Path, times: int) -> None:
    chance = random.Random(7)
    acknowledged: set[str] = set()
    for place in range(times):
        process = start(path, f"person {place}", 1_000_000)
        assert process.stdout is not None
        acknowledged.add(process.stdout.readline().strip())  # it writes now
        time.sleep(chance.uniform(0.0, 0.25))
        process.send_signal(signal.SIGKILL)
        out, _ = process.communicate(timeout=60)
        lines = out.splitlines(keepends=True)
        acknowledged |= {line.strip() for line in lines if line.endswith("\n")}
    with open_casebook(path) as book:
        held = {entry.id for entry in book.store.all_entries()}
        assert acknowledged <= held
        assert len(acknowledged) >= times
        assert sum(row.entries for row in book.cases(limit=1000)) == len(held)
    assert is_sound(path)


def test_three_processes_that_start_a_casebook_together_lose_nothing(path: Path):
    write_at_once(path, processes=3, count=20)


@pytest.mark.system
def test_eight_processes_that_write_at_once_lose_nothing(path: Path):
    write_at_once(path, processes=8, count=500)


@pytest.mark.system
def test_what_was_acknowledged_survives_a_kill(path: Path):
    kill_at_random_moments(path, times=4)


@pytest.mark.long
def test_what_was_acknowledged_survives_a_hundred_kills(path: Path):
    kill_at_random_moments(path, times=100)


@pytest.mark.system
def test_a_full_disk_takes_nothing_half_and_says_so(tmp_path: Path):
    """Needs the right to mount a small memory disk; where that is missing, a smaller limit does it."""
    disk = tmp_path / "disk"
    disk.mkdir()
    mounted = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=2m", "tmpfs", str(disk)], check=False, capture_output=True
    )
    if mounted.returncode:
        fill_with_a_limit(tmp_path / "casebook.db")
        return
    try:
        fill_until_refused(disk / "casebook.db")
    finally:
        subprocess.run(["umount", "-l", str(disk)], check=True)


def fill_with_a_limit(path: Path) -> None:
    with open_casebook(path) as book:
        book.store._connection.execute("PRAGMA max_page_count = 200")
        _fill(book, DiskFull)


def fill_until_refused(path: Path) -> None:
    with open_casebook(path) as book:
        _fill(book, CasebookError)
    with open_casebook(path) as book:
        assert book.store.count() > 0
    assert is_sound(path)


def _fill(book, error) -> None:
    case = book.log_sheet(a_sheet(), "Ada")
    written = [entry.id for entry in book.store.case_entries(case)]
    with pytest.raises(error, match="full") as refused:
        for place in range(10_000):
            other = book.log_sheet(a_sheet(), "Ada") if place % 20 == 0 else case
            written.append(
                book.record(other, b.Note(text=f"{place} " + "filling " * 200), person="Ada")[0].id
            )
    assert "Nothing was written. Free some space" in str(refused.value)
    held = {entry.id for entry in book.store.all_entries()}
    assert set(written) <= held
    assert book.case(case).sheet == a_sheet()
