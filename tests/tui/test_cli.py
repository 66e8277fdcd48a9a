"""The command line: exit status, where things are written, and what a mistake shows."""

import json
import os
import stat
import subprocess
import sys
from pathlib import Path

import pytest

from tui import parser

ROOT = Path(__file__).resolve().parent.parent.parent
PLATESIDE = [sys.executable, "-m", "plateside"]


def spawn(*argv, **more):
    env = {**os.environ, "PYTHONPATH": str(ROOT), **more.pop("env", {})}
    return subprocess.run(
        [*PLATESIDE, *argv], capture_output=True, text=True, check=False, timeout=120, env=env, **more
    )


def test_version_goes_to_standard_output(run):
    done = run("--version")
    assert done == (0, "plateside 0.1.0\n", "")


@pytest.mark.parametrize(
    "argv", [["nonsense"], ["diagnose"], ["report"], ["export", "--csv", "--json-lines"], ["--cases"]]
)
def test_a_wrong_word_is_refused_in_one_line_with_status_2(run, argv):
    done = run(*argv)
    assert done.status == 2
    assert done.out == ""
    assert done.err.startswith("plateside: ")
    assert done.err.count("\n") == 1


def test_the_module_runs_from_another_folder(tmp_path):
    done = spawn("--version", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (0, "plateside 0.1.0\n")


def test_log_prints_a_number_per_sheet_and_cases_finds_it(run, sheet):
    done = run("log", sheet("pump_overload"), sheet("mixer_bearing"), "--person", "Ines")
    assert done.status == 0
    numbers = [line.split()[0] for line in done.out.splitlines()]
    assert len(numbers) == 2
    listed = run("cases", "brine")
    assert numbers[1] in listed.out
    assert numbers[0] not in listed.out


def test_log_tells_a_bad_sheet_and_takes_the_others(run, sheet, tmp_path):
    bad = tmp_path / "bad.yaml"
    bad.write_text(
        "format: 1\nmachine: {kind: induction_3ph, nameplate: {current: 14.9 V}}\ncomplaint: runs_hot\n"
    )
    done = run("log", str(bad), sheet("pump_overload"))
    assert done.status == 2
    assert f"{bad}, line 2" in done.err
    assert done.out.count("\n") == 1


def test_nothing_is_written_where_every_sheet_is_bad(run, casebook, tmp_path):
    assert run("log", str(tmp_path / "missing.yaml")).status == 2
    assert not casebook.exists()


def test_cases_as_json_is_one_object_per_line_newest_first(run, sheet):
    run("log", sheet("pump_overload"))
    run("log", sheet("mixer_bearing"))
    rows = [json.loads(line) for line in run("cases", "--json").out.splitlines()]
    assert [row["tag"] for row in rows] == ["MX-12 brine mixer", "WP-104 wash water"]


@pytest.mark.parametrize("argv", [["cases"], ["report", "C-7K3F9Q"], ["export"], ["copy", "copy.db"]])
def test_a_command_that_only_reads_says_where_no_casebook_is_and_makes_none(run, casebook, argv):
    done = run(*argv)
    assert (done.status, done.out) == (1, "")
    assert "no casebook" in done.err
    assert not casebook.exists()


def test_the_list_of_cases_fits_into_eighty_columns(run, tmp_path):
    text = (
        "format: 1\nmachine: {kind: induction_3ph, tag: A very long tag of a pump behind the last retort}\n"
        "complaint: noisy_or_vibrating\n"
    )
    (tmp_path / "long.yaml").write_text(text)
    run("log", str(tmp_path / "long.yaml"))
    assert max(len(line) for line in run("cases").out.splitlines()) <= 80


def test_the_casebook_can_be_named_before_or_after_the_command(run, sheet, tmp_path):
    other = str(tmp_path / "other.db")
    run("--casebook", other, "log", sheet("pump_overload"))
    assert "WP-104" in run("cases", "--casebook", other).out
    assert run("cases").status == 1


def test_a_casebook_is_readable_by_its_owner_only(run, sheet, casebook):
    run("log", sheet("pump_overload"))
    assert stat.S_IMODE(casebook.stat().st_mode) == 0o600


def test_a_copy_is_whole_and_never_written_over_another_file(run, sheet, tmp_path):
    run("log", sheet("pump_overload"))
    target = str(tmp_path / "copy.db")
    assert run("copy", target).status == 0
    assert "WP-104" in run("cases", "--casebook", target).out
    again = run("copy", target)
    assert again.status == 1
    assert "exists" in again.err


def test_a_file_that_is_no_casebook_is_named_and_left_alone(run, tmp_path):
    other = tmp_path / "notes.txt"
    other.write_text("not a casebook at all")
    done = run("cases", "--casebook", str(other))
    assert done.status == 1
    assert str(other) in done.err
    assert other.read_text() == "not a casebook at all"


def test_a_mistake_of_the_program_is_one_line_and_a_log_file(run, monkeypatch, tmp_path, sheet):
    def stumble(*_, **__):
        raise ZeroDivisionError("inner detail")

    monkeypatch.setattr("tui.commands.log.read", stumble)
    done = run("log", sheet("pump_overload"))
    assert done.status == 1
    assert done.err.count("\n") == 1
    assert "inner detail" not in done.err
    assert "Traceback" not in done.err
    log = tmp_path / "state" / "plateside" / "mishaps.log"
    assert str(log) in done.err
    assert "inner detail" in log.read_text()


@pytest.mark.skipif(sys.platform == "win32", reason="pipes that close are a matter of POSIX shells")
def test_a_reader_that_leaves_early_is_no_error(sheet, tmp_path):
    book = tmp_path / "book.db"
    sheets = [sheet("pump_overload")] * 200
    command = " ".join([*PLATESIDE, "log", *sheets]) + "; echo status $? >&2"
    done = subprocess.run(
        ["/bin/sh", "-c", f"({command}) | true"],
        capture_output=True, text=True, check=False, timeout=120,
        env={**os.environ, "PYTHONPATH": str(ROOT), "PLATESIDE_CASEBOOK": str(book)},
    )  # fmt: skip
    assert "Traceback" not in done.stderr
    assert "BrokenPipe" not in done.stderr


def test_the_screens_need_a_terminal_and_say_so(tmp_path):
    done = spawn(
        stdin=subprocess.DEVNULL, env={"PLATESIDE_CASEBOOK": str(tmp_path / "b.db"), "TERM": "xterm"}
    )
    assert done.returncode == 1
    assert "need a terminal" in done.stderr
    assert not (tmp_path / "b.db").exists()


def test_check_rules_counts_the_shipped_rules(run):
    done = run("check-rules")
    assert done.status == 0
    assert "faults" in done.out


def test_check_rules_names_file_and_line_of_a_shops_mistake(run, tmp_path):
    rule = tmp_path / "shop" / "faults.yaml"
    rule.parent.mkdir()
    rule.write_text("faults:\n  - id: turn_short\n    name: short\n    oddz: {induction_3ph: 1}\n")
    done = run("check-rules", str(rule.parent))
    assert done.status == 2
    assert f"{rule}, line " in done.err
    assert "oddz" in done.err


def test_ascii_output_keeps_its_columns_where_the_terminal_is_not_utf8(tmp_path, sheet):
    env = {"PLATESIDE_CASEBOOK": str(tmp_path / "b.db"), "PYTHONIOENCODING": "ascii"}
    spawn("log", sheet("mixer_bearing"), env=env)
    done = spawn("cases", env=env)
    assert done.returncode == 0
    assert done.stdout.isascii()


@pytest.mark.skipif(sys.platform == "win32", reason="redirections of POSIX shells")
@pytest.mark.parametrize(
    ("redirection", "status", "said"),
    [(">&-", 0, ""), ("2>&-", 0, ""), (">/dev/full", 1, "No space left"), ("| head -n 1 >/dev/null", 0, "")],
)
def test_a_closed_or_full_output_ends_without_a_traceback(sheet, redirection, status, said):
    if "/dev/full" in redirection and not Path("/dev/full").exists():
        pytest.skip("this system has no /dev/full")
    command = " ".join([*PLATESIDE, "diagnose", sheet("pump_overload"), redirection])
    done = subprocess.run(
        ["/bin/sh", "-c", command], capture_output=True, text=True, check=False, timeout=60,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    assert done.returncode == status
    assert "Traceback" not in done.stderr
    assert said in done.stderr
    assert done.stderr.count("\n") <= 1


@pytest.mark.skipif(sys.platform == "win32", reason="redirections of POSIX shells")
@pytest.mark.parametrize(
    ("words", "status", "said"), [("diagnose -", 2, "an empty file"), ("--plain", 0, "")]
)
def test_a_closed_input_is_an_empty_one(tmp_path, words, status, said):
    command = f"{' '.join(PLATESIDE)} {words} <&-"
    done = subprocess.run(
        ["/bin/sh", "-c", command], capture_output=True, text=True, check=False, timeout=60, cwd=tmp_path,
        env={**os.environ, "PYTHONPATH": str(ROOT), "PLATESIDE_CASEBOOK": str(tmp_path / "b.db")},
    )  # fmt: skip
    assert done.returncode == status
    assert said in done.stderr
    assert "mistake of the program" not in done.stderr


def test_nothing_that_only_posix_has_is_imported_at_start():
    code = (
        "import sys\n"
        "for name in ('fcntl', 'termios', 'pwd', 'grp', 'resource', 'tty', 'pty'):\n"
        "    sys.modules[name] = None\n"
        "import plateside\nfrom tui.cli import main\n"
        f"sys.exit(main(['diagnose', {str(ROOT / 'tests' / 'sheets' / 'pump_overload.yaml')!r}]))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False, cwd=ROOT)
    assert (done.returncode, done.stderr) == (0, "")


@pytest.mark.parametrize("line", [["--ascii"], ["demo", "--ascii"], ["--ascii", "demo"]])
def test_ascii_is_understood_with_and_without_the_demo(line):
    assert parser.build().parse_args(line).ascii
    assert not parser.build().parse_args([word for word in line if word != "--ascii"]).ascii
