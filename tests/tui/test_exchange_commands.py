"""``export`` and ``merge``: what leaves a casebook comes back as it was."""

import csv
import io
import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from calc.sheet_io import read_sheet, sheet_from_text
from tui.cli import main

ROOT = Path(__file__).resolve().parent.parent.parent


@pytest.fixture
def number(run, sheet):
    return run("log", sheet("pump_overload"), "--person", "Ines").out.split()[0]


def test_an_exported_case_is_a_sheet_with_the_same_machine_and_readings(run, number, sheet):
    text = run("export", number).out
    given = read_sheet(sheet("pump_overload"))
    back = sheet_from_text(text, file="back")
    assert back.machine == given.machine
    assert [reading.values for reading in back.readings] == [reading.values for reading in given.readings]
    assert back.observations == given.observations


def test_an_exported_case_can_be_logged_again(run, number, tmp_path):
    path = tmp_path / "case.yaml"
    path.write_text(run("export", number).out, encoding="utf-8")
    assert run("log", str(path)).status == 0


@pytest.fixture
def numbers(run, sheet):
    names = [sheet(name) for name in ("pump_overload", "mixer_bearing", "series_hoist_open_coil")]
    return [line.split()[0] for line in run("log", *names, "--person", "Ines").out.splitlines()]


def test_many_cases_as_sheets_in_one_text_are_merged_whole(run, numbers, tmp_path):
    path, other = tmp_path / "all.yaml", str(tmp_path / "other.db")
    path.write_text(run("export", *numbers).out, encoding="utf-8")
    done = run("merge", str(path), "--casebook", other)
    assert (done.status, done.err) == (0, "")
    assert "in 3 cases, 0 known before, 0 left out" in done.out
    again = run("merge", str(path), "--casebook", other)
    assert again.status == 0
    assert ": 0 new entries in 0 cases" in again.out
    back = run("export", "--casebook", other).out
    assert untold(back) == untold(run("export").out)


def untold(text):
    """What stands in sheets, in any order, without their case numbers."""
    return sorted(re.sub(r"^#.*\n", "", part.strip() + "\n") for part in text.split("---\n"))


def test_many_cases_as_files_are_merged_and_no_file_is_written_over(run, numbers, tmp_path):
    folder, other = tmp_path / "sheets", str(tmp_path / "other.db")
    done = run("export", *numbers, "--to", str(folder))
    assert done.status == 0
    assert done.out.split() == [str(folder / f"{number}.yaml") for number in numbers]
    files = sorted(str(path) for path in folder.iterdir())
    assert run("merge", *files, "--casebook", other).status == 0
    assert len(run("cases", "--json", "--casebook", other).out.splitlines()) == 3
    before = (folder / f"{numbers[0]}.yaml").read_bytes()
    again = run("export", numbers[0], "--to", str(folder))
    assert again.status == 1
    assert "exists already" in again.err
    assert (folder / f"{numbers[0]}.yaml").read_bytes() == before


def test_a_sheet_that_comes_again_in_another_file_is_one_case_still(run, numbers, tmp_path):
    folder, other = tmp_path / "sheets", str(tmp_path / "other.db")
    path = tmp_path / "all.yaml"
    path.write_text(run("export", *numbers).out, encoding="utf-8")
    run("export", *numbers, "--to", str(folder))
    run("merge", str(path), "--casebook", other)
    done = run("merge", *map(str, folder.iterdir()), "--casebook", other)
    assert (done.status, done.err) == (0, "")
    assert len(run("cases", "--json", "--casebook", other).out.splitlines()) == 3


def test_one_bad_sheet_among_many_is_told_with_its_line_and_the_others_come_in(run, numbers, tmp_path):
    path, other = tmp_path / "all.yaml", str(tmp_path / "other.db")
    parts = run("export", *numbers).out.split("---\n")
    parts[1] = parts[1].replace("format: 1", "format: 7").replace("format: '1'", "format: 7")
    path.write_text("---\n".join(parts), encoding="utf-8")
    line = parts[0].count("\n") + 1 + parts[1].split("format: 7")[0].count("\n") + 1
    done = run("merge", str(path), "--casebook", other)
    assert done.status == 1
    assert "in 2 cases" in done.out
    assert f"line {line}: format: 7" in done.err


def test_a_merge_draws_a_bar_on_a_terminal_and_clears_it(run, casebook, number, tmp_path, monkeypatch):
    class Terminal(io.StringIO):
        def isatty(self):
            return True

    seen = Terminal()
    monkeypatch.setattr(sys, "stderr", seen)
    assert main(["merge", str(casebook), "--casebook", str(tmp_path / "other.db")]) == 0
    drawn = seen.getvalue().split("\r")
    assert any("taking in [" in line and "100 %" in line for line in drawn)
    assert any("updating lists [" in line and "1 of 1" in line for line in drawn)
    assert drawn[-1] == ""
    assert not drawn[-2].strip()


def test_a_merge_draws_nothing_where_there_is_no_terminal(run, casebook, number, tmp_path):
    assert run("merge", str(casebook), "--casebook", str(tmp_path / "other.db")).err == ""


def test_json_lines_merge_into_another_casebook_and_twice_changes_nothing(run, number, casebook, tmp_path):
    command = [sys.executable, "-m", "plateside", "export", "--json-lines", "--casebook", str(casebook)]
    lines = subprocess.run(command, capture_output=True, check=True, cwd=ROOT, timeout=60).stdout
    assert all(json.loads(line)["case"] for line in lines.splitlines())
    path, other = tmp_path / "entries.jsonl", str(tmp_path / "other.db")
    path.write_bytes(lines)
    assert " 0 left out" in run("merge", str(path), "--casebook", other).out
    assert ": 0 new entries" in run("merge", str(path), "--casebook", other).out


def test_csv_has_a_row_per_reading(run, number):
    rows = list(csv.DictReader(io.StringIO(run("export", "--csv").out)))
    assert [row["measure"] for row in rows][:2] == ["supply_voltage", "line_current"]
    assert rows[1]["value_1"] == "18.9 A"


def test_a_casebook_merges_into_another(run, number, casebook, tmp_path):
    other = str(tmp_path / "other.db")
    assert run("merge", str(casebook), "--casebook", other).status == 0
    assert "WP-104" in run("cases", "--casebook", other).out


def test_a_file_that_is_not_there_is_told_and_the_others_are_merged(run, number, casebook, tmp_path):
    other = str(tmp_path / "other.db")
    done = run("merge", str(tmp_path / "missing.db"), str(casebook), "--casebook", other)
    assert done.status == 2
    assert "missing.db" in done.err
    assert "new entries in 1 case" in done.out


def test_salvage_reads_a_sound_casebook_into_a_new_file(run, number, casebook, tmp_path):
    new = str(tmp_path / "new.db")
    assert run("salvage", str(casebook), new).status == 0
    assert "WP-104" in run("cases", "--casebook", new).out
    assert run("salvage", str(casebook), new).status == 1


@pytest.mark.parametrize("form", [(), ("--csv",)])
def test_no_letter_is_lost_where_the_terminal_knows_ascii_only(run, casebook, tmp_path, form):
    path = tmp_path / "odd.yaml"
    path.write_text(
        "format: 1\nmachine: {kind: induction_3ph, tag: 'Lüfter Ø3 技'}\ncomplaint: runs_hot\n"
        "readings: [{measure: speed, state: loaded, value: 1450 rpm}]\n",
        encoding="utf-8",
    )
    run("log", str(path), "--person", "Ines")
    command = [sys.executable, "-m", "plateside", "export", *form, "--casebook", str(casebook)]
    environment = {**os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0"}
    out = subprocess.run(
        command, capture_output=True, check=True, cwd=ROOT, timeout=60, env=environment
    ).stdout
    assert "Lüfter Ø3 技" in out.decode("utf-8")
    assert (b"\r\r" not in out) and (b"\r\n" in out) is bool(form)
