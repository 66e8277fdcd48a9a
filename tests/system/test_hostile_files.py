"""Files that nobody means well with, given to the real program: an answer or a sentence, in bounded memory.

The time of each is printed (``pytest -s``), and asserted nowhere. ``PLATESIDE_FUZZ_SEED`` sets the seed.
"""

from __future__ import annotations

import os
import random
import subprocess
import sys
import threading
from pathlib import Path
from typing import NamedTuple

import pytest

from casebook.book import open_casebook
from tests.system import hostile

ROOT = Path(__file__).resolve().parents[2]
SEED = int(os.environ.get("PLATESIDE_FUZZ_SEED", "7"))
MOST_MB = 300
SHORT, LONG = 6, 150
# Runs the program and notes its own peak: what the system counts for a child holds its parent's memory too.
WATCHED = """
import atexit, pathlib, runpy, sys
peak = pathlib.Path(sys.argv.pop(1))
atexit.register(lambda: peak.write_text(pathlib.Path("/proc/self/status").read_text()))
runpy.run_module("plateside", run_name="__main__", alter_sys=True)
"""


class Ran(NamedTuple):
    """What a command did, and what it took."""

    status: int
    out: str
    err: str
    mb: float
    seconds: float
    """Of the processor, so that a busy machine makes no difference."""


def run(folder: Path, *words: str, given: bytes = b"") -> Ran:
    """Run a command in a process of its own; measure its memory and its time."""
    env = {
        "HOME": str(folder / "home"),
        "PATH": os.environ["PATH"],
        "PYTHONPATH": str(ROOT),
        "LANG": "C.UTF-8",
    }
    peak = folder / "peak.txt"
    process = subprocess.Popen(
        [sys.executable, "-c", WATCHED, str(peak), *words], stdin=subprocess.PIPE, stdout=subprocess.PIPE,
        stderr=subprocess.PIPE, env=env, cwd=folder,
    )  # fmt: skip
    said: dict[str, bytes] = {}
    readers = [
        threading.Thread(target=lambda name=name, pipe=pipe: said.update({name: pipe.read()}))
        for name, pipe in (("out", process.stdout), ("err", process.stderr))
    ]
    for reader in readers:
        reader.start()
    assert process.stdin is not None
    try:
        process.stdin.write(given)
        process.stdin.close()
    except BrokenPipeError:
        pass
    _, status, used = os.wait4(process.pid, 0)
    process.returncode = os.waitstatus_to_exitcode(status)
    for reader in readers:
        reader.join()
    out, err = (said[name].decode(errors="replace") for name in ("out", "err"))
    return Ran(process.returncode, out, err, peak_mb(peak), used.ru_utime + used.ru_stime)


def peak_mb(noted: Path) -> float:
    """Return the most memory that a process held, from its noted ``/proc/self/status``."""
    line = next(line for line in noted.read_text().splitlines() if line.startswith("VmHWM:"))
    return int(line.split()[1]) / 1024


def told_or_answered(ran: Ran, name: str, folder: Path) -> None:
    """See that it ended in an answer or in sentences, whatever the file was."""
    print(f"{name}: {ran.seconds:.2f} s, {ran.mb:.0f} MB, status {ran.status}, {ran.err[:100]!r}")
    assert ran.status in {0, 1, 2}, (name, ran.err[-2000:])
    assert "Traceback" not in ran.err and "mistake of the program" not in ran.err, (name, ran.err[-2000:])
    assert not list(folder.rglob("mishaps.log"))
    assert ran.mb < MOST_MB, (name, ran.mb)
    if ran.status:
        assert ran.err.startswith("plateside: ") or "0 new entries" in ran.out, name
    steering = [sign for sign in ran.out + ran.err if sign != "\n" and not sign.isprintable()]
    assert not steering, (name, steering[:5])
    assert len(ran.err) < 20_000, name


@pytest.mark.system
@pytest.mark.parametrize("name", hostile.yaml_files())
def test_hostile_yaml_is_refused_by_rules_sheets_and_merge(tmp_path: Path, name: str):
    content = hostile.yaml_files()[name]
    (tmp_path / "rules").mkdir()
    (tmp_path / "rules" / "faults.yaml").write_bytes(content)
    (tmp_path / "sheet.yaml").write_bytes(content)
    book = str(tmp_path / "book.db")
    for words in (
        ["check-rules", "rules"],
        ["--rules", "rules", "diagnose", str(hostile.SHEETS[0])],
        ["diagnose", "sheet.yaml"],
        ["diagnose", "-"],
        ["--casebook", book, "merge", "sheet.yaml"],
        ["--casebook", book, "log", "sheet.yaml"],
    ):
        ran = run(tmp_path, *words, given=content if "-" in words else b"")
        told_or_answered(ran, f"{name}: {' '.join(words[-2:])}", tmp_path)
        assert ran.status != 0, words


@pytest.mark.system
def test_hostile_lines_are_left_out_and_the_others_are_taken(tmp_path: Path):
    for name, content in hostile.line_files(tmp_path).items():
        (tmp_path / name).write_bytes(content)
        ran = run(tmp_path, "--casebook", f"{name}.db", "merge", name)
        told_or_answered(ran, name, tmp_path)
        with open_casebook(tmp_path / f"{name}.db") as book:
            assert book.store.count() == (1 if "same" in name or "ten" in name or name == "deep.jsonl" else 0)


def merged_or_told(folder: Path, many: int) -> None:
    """Merge damaged casebooks, salvage them, and use them as one's own."""
    for name, content in hostile.damaged_casebooks(folder, seed=SEED, many=many):
        (folder / name).write_bytes(content)
        own = str(folder / "own.db")
        for words in (["--casebook", own, "merge", name], ["salvage", name, f"saved {name}"]):
            told_or_answered(run(folder, *words), f"{name}: {words[-2]}", folder)
            assert (folder / name).read_bytes() == content
        for words in (["--casebook", name, "cases"], ["--casebook", name, "export", "--json-lines"]):
            told_or_answered(run(folder, *words), f"{name}: {words[2]}", folder)
    assert run(folder, "--casebook", own, "cases").status == 0


@pytest.mark.system
def test_some_damaged_casebooks_are_merged_salvaged_or_refused(tmp_path: Path):
    merged_or_told(tmp_path, SHORT)


@pytest.mark.long
def test_many_damaged_casebooks_are_merged_salvaged_or_refused(tmp_path: Path):
    merged_or_told(tmp_path, LONG)


def changed_text_is_told(folder: Path, many: int) -> None:
    """Give rules and sheets with a few things changed to the program."""
    chance = random.Random(SEED)
    (folder / "rules").mkdir()
    for number in range(many):
        source = chance.choice(hostile.RULES)
        changed = folder / "rules" / source.parent.name / source.name
        changed.parent.mkdir(exist_ok=True)
        changed.write_bytes(hostile.mutated(source.read_bytes(), chance))
        told_or_answered(run(folder, "check-rules", "rules"), f"{number}: rules {source.name}", folder)
        changed.unlink()
        sheet = chance.choice(hostile.SHEETS)
        (folder / "sheet.yaml").write_bytes(hostile.mutated(sheet.read_bytes(), chance))
        told_or_answered(run(folder, "diagnose", "sheet.yaml"), f"{number}: sheet {sheet.name}", folder)
        merge = ("--casebook", f"{number}.db", "merge", "sheet.yaml")
        told_or_answered(run(folder, *merge), f"{number}: merge {sheet.name}", folder)


@pytest.mark.system
def test_some_changed_rules_and_sheets_are_told_or_answered(tmp_path: Path):
    changed_text_is_told(tmp_path, SHORT)


@pytest.mark.long
def test_many_changed_rules_and_sheets_are_told_or_answered(tmp_path: Path):
    changed_text_is_told(tmp_path, LONG)


@pytest.mark.system
def test_a_folder_of_rules_is_read_within_limits(tmp_path: Path):
    rules = tmp_path / "rules"
    (rules / "pipe").mkdir(parents=True)
    os.mkfifo(rules / "pipe" / "faults.yaml")
    (rules / "zero.yaml").symlink_to("/dev/zero")
    (rules / "loop").symlink_to(rules)
    (rules / "gone.yaml").symlink_to(rules / "nowhere")
    with (rules / "large.yaml").open("wb") as file:
        file.truncate(3_000_000_000)
    ran = run(tmp_path, "check-rules", "rules")
    told_or_answered(ran, "odd files", tmp_path)
    assert ran.status == 2
    for said in (
        "pipe/faults.yaml: no ordinary file",
        "zero.yaml: no ordinary file",
        "large.yaml: longer than",
    ):
        assert said in ran.err
    for number in range(600):
        (rules / f"{number}.yaml").write_text("faults: []\n", encoding="utf-8")
    told = run(tmp_path, "check-rules", "rules")
    assert "more than 500 rule files; at most 500 in a folder" in told.err


@pytest.mark.system
def test_a_sheet_without_end_is_read_only_so_far(tmp_path: Path):
    for words in (["diagnose", "/dev/zero"], ["expect", "/dev/zero"]):
        told_or_answered(run(tmp_path, *words), words[0], tmp_path)
    ran = run(tmp_path, "diagnose", "-", given=b"x" * 50_000_000)
    told_or_answered(ran, "standard input", tmp_path)
    assert "longer than 1000000" in ran.err
