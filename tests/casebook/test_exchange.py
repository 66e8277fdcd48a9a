"""Cases travel as sheets, lines and tables, and arrive as they left."""

import csv
import io
from datetime import UTC, datetime
from pathlib import Path

import msgspec
import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.sheet import CaseSheet, Reading
from calc.sheet_io import read_sheet, sheet_from_text, sheet_to_yaml
from casebook import bodies as b
from casebook.book import Casebook, open_casebook
from casebook.errors import UnknownCase
from casebook.exchange import (
    export_csv,
    export_lines,
    harmless_cell,
    merge_any,
    merge_sheet,
    sheet_for_export,
)
from casebook.merge import merge_file

from .conftest import a_sheet, value

SHEETS = sorted((Path(__file__).parent.parent / "sheets").rglob("*.yaml"))


@pytest.mark.parametrize("sheet_path", SHEETS, ids=lambda path: path.stem)
def test_an_exported_case_is_the_same_case_when_it_is_logged(book: Casebook, sheet_path: Path):
    case = book.case(book.log_sheet(read_sheet(sheet_path), "Ada"))
    exported = sheet_for_export(case)
    again = book.case(book.log_sheet(sheet_from_text(sheet_to_yaml(exported), file="mail.yaml"), "Bo"))
    assert again.sheet == exported
    assert untimed(again.sheet) == untimed(read_sheet(sheet_path))


def untimed(sheet):
    readings = tuple(msgspec.structs.replace(reading, taken_at=None) for reading in sheet.readings)
    return msgspec.structs.replace(sheet, readings=readings)


def test_there_are_sheets_to_try():
    assert SHEETS


def test_an_exported_reading_says_when_it_was_taken(book: Casebook):
    case = book.case(book.log_sheet(a_sheet(), "Ada"))
    taken = case.readings[0].entry.time_local.isoformat(timespec="seconds")
    assert sheet_for_export(case).readings[0].taken_at == taken


def test_a_mailed_sheet_that_says_no_time_counts_as_of_now(book: Casebook, tmp_path: Path):
    report = merge_any(book, mail(tmp_path, a_sheet("P-105")), "Ada")
    assert abs((book.cases()[0].opened_utc - datetime.now(UTC)).total_seconds()) < 60
    assert report.new == 9


def mail(folder: Path, sheet: CaseSheet) -> Path:
    (folder / "mail.yaml").write_text(sheet_to_yaml(sheet), encoding="utf-8")
    return folder / "mail.yaml"


def test_a_mailed_sheet_is_taken_in_once(book: Casebook, tmp_path: Path):
    first = merge_any(book, mail(tmp_path, a_sheet()), "Ada")
    second = merge_any(book, mail(tmp_path, a_sheet()), "Ada")
    assert (first.new, second.new, second.refused) == (9, 0, 0)
    assert len(book.cases()) == 1
    assert book.case(book.cases()[0].id).sheet == a_sheet()


def test_the_same_sheet_in_two_casebooks_merges_into_one_case(book: Casebook, tmp_path: Path):
    with open_casebook(tmp_path / "other.db") as other:
        merge_sheet(other, a_sheet(), "Ada", source="mail.yaml")
    merge_sheet(book, a_sheet(), "Ada", source="mail.yaml")
    report = merge_file(book, tmp_path / "other.db")
    assert (report.new, report.refused) == (0, 0)


def test_chosen_cases_are_exported_by_number(book: Casebook):
    case = book.log_sheet(a_sheet(), "Ada")
    book.log_sheet(a_sheet("M-7"), "Ada")
    made = io.BytesIO()
    assert export_lines(book, made, [book.number(case)]) == 8
    assert {msgspec.json.decode(line)["case"] for line in made.getvalue().splitlines()} == {case}
    with pytest.raises(UnknownCase):
        export_lines(book, made, ["C-ZZZZ"])


def test_unknown_kinds_and_fields_survive_the_journey(book: Casebook, tmp_path: Path):
    line = (
        b'{"id":"01a231aa-1420-7647-b4f4-8e88f4d3a306","case":"01a231aa-1420-7647-b4f4-8e88f4d3a307",'
        b'"person":"Ada","time_utc":"2026-03-02T06:00:00Z","offset_minutes":0,"kind":"thermogram",'
        b'"body_version":7,"body":{"hot_spot":"phase V lug","kelvin":81.5}}\n'
    )
    (tmp_path / "x.jsonl").write_bytes(line)
    merge_file(book, tmp_path / "x.jsonl")
    (row,) = book.search("lug")
    (told,) = book.case(row.id).lines
    assert told.body == b.Words(data={"hot_spot": "phase V lug", "kelvin": 81.5})
    made = io.BytesIO()
    export_lines(book, made)
    assert msgspec.json.decode(made.getvalue())["body"] == {"hot_spot": "phase V lug", "kelvin": 81.5}


def test_readings_come_out_as_a_table(book: Casebook):
    case = book.case(book.log_sheet(a_sheet(), "Ada"))
    made = io.StringIO()
    assert export_csv([case], made) == 2
    first, second = csv.DictReader(io.StringIO(made.getvalue()))
    assert (first["tag"], first["measure"], first["value_2"], first["number_2"]) == (
        "P-104", "line_current", "15.9 A", "15.9",
    )  # fmt: skip
    assert (second["value_1"], second["number_1"], second["unit"]) == ("open", "inf", "ohm")


def test_no_cell_of_a_table_is_a_formula(book: Casebook):
    nasty = Reading(
        measure="sideband_level", state="loaded", values=(value("-38 dB", -38.0, "dB"),),
        note='=HYPERLINK("x")', instrument="@SUM(A1)",
    )  # fmt: skip
    case = book.case(book.log_sheet(a_sheet("=cmd|' /C calc'!A0", readings=(nasty,)), "+Ada"))
    made = io.StringIO()
    export_csv([case], made)
    (row,) = csv.DictReader(io.StringIO(made.getvalue()))
    assert row["tag"].startswith("'=") and row["note"].startswith("'=") and row["instrument"].startswith("'@")
    assert row["person"] == "'+Ada"
    assert row["value_1"] == "'-38 dB"
    assert row["number_1"] == "-38"


@given(st.text())
def test_a_harmless_cell_begins_like_no_formula(text):
    cell = harmless_cell(text)
    assert cell in {text, "'" + text}
    if cell[:1] in {"=", "+", "-", "@", "\t", "\r"}:
        float(cell)
