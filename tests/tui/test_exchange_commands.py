"""``export`` and ``merge``: what leaves a casebook comes back as it was."""

import csv
import io
import json
import subprocess
import sys
from pathlib import Path

import pytest

from calc.sheet_io import read_sheet, sheet_from_text

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
