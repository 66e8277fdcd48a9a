"""A stranger's file: nothing in it breaks the casebook, steers the terminal or runs as SQL."""

import json
import sqlite3
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from msgspec import structs

from casebook.book import Casebook, open_casebook
from casebook.entry import steers_terminal
from casebook.errors import BadEntry, CasebookError, NewerCasebook, NotACasebook
from casebook.merge import merge_file
from casebook.wire import MAX_LINE, entry_of_line, line_of_entry

from .conftest import a_sheet

GOOD = {
    "id": "01a231aa-1420-7647-b4f4-8e88f4d3a306",
    "case": "01a231aa-1420-7647-b4f4-8e88f4d3a307",
    "after": None,
    "person": "Ada",
    "time_utc": "2026-03-02T06:00:00.000000Z",
    "offset_minutes": 60,
    "kind": "note",
    "body_version": 1,
    "body": {"text": "hums"},
}


def line(**changes: object) -> bytes:
    return json.dumps({**GOOD, **changes}).encode()


def deep(levels: int) -> object:
    return {"in": deep(levels - 1)} if levels else 1


def test_a_good_line_is_taken_and_written_back_the_same():
    entry = entry_of_line(line())
    assert json.loads(line_of_entry(entry)) == GOOD


@pytest.mark.parametrize(
    ("changes", "named"),
    [
        ({"id": "7"}, "id"),
        ({"id": "01A231AA-1420-7647-B4F4-8E88F4D3A306"}, "id"),
        ({"id": "01a231aa-1420-4647-b4f4-8e88f4d3a306"}, "id"),
        ({"case": "../../etc/passwd/../../etc/passwd/..x"}, "case"),
        ({"after": "'; DROP TABLE entry; --"}, "after"),
        ({"person": ""}, "person"),
        ({"person": "A\u001b[2Jda"}, "person"),
        ({"person": "A\nda"}, "person"),
        ({"person": "x" * 81}, "person"),
        ({"time_utc": "2026-03-02T06:00:00"}, "time_utc"),
        ({"time_utc": "1969-12-31T23:59:59Z"}, "time_utc"),
        ({"time_utc": "9999-12-31T23:59:59-23:00"}, "time_utc"),
        ({"time_utc": "0001-01-01T00:00:00+23:00"}, "time_utc"),
        ({"time_utc": "yesterday"}, "line"),
        ({"offset_minutes": 841}, "offset_minutes"),
        ({"offset_minutes": 10**30}, "offset_minutes"),
        ({"kind": "Note"}, "kind"),
        ({"kind": "note; --"}, "kind"),
        ({"kind": "n" * 41}, "kind"),
        ({"body_version": 0}, "body_version"),
        ({"body": [1]}, "line"),
        ({"body": {"text": 7}}, "body"),
        ({"body": {"text": "a\u0007"}}, "body"),
        ({"body": {"text": "\u202eevil"}}, "body"),
        ({"body": {"\u009b31m": 1}, "kind": "unknown"}, "body"),
        ({"body": {"text": "x" * 300_000}}, "body"),
        ({"body": deep(17), "kind": "unknown"}, "body"),
        ({"body": deep(400), "kind": "unknown"}, "body"),
        ({"colour": "red"}, "line"),
        ({"person": None}, "line"),
    ],
)
def test_a_bad_line_names_its_field(changes: dict[str, object], named: str):
    with pytest.raises(BadEntry) as refused:
        entry_of_line(line(**changes))
    assert refused.value.field == named


@pytest.mark.parametrize(
    "raw",
    [
        b"", b"\xff\xfe", b"nul", b"[" * 100_000, b'{"a":' * 100_000, b"{}", b'"' + b"x" * (MAX_LINE + 1),
        line().replace(b'"hums"', b'"\\ud800"'), line().replace(b'"hums"', b'"\xff"'), b"\0" * 50,
        line(kind="unknown").replace(b'"hums"', b"1e400"),
        line(kind="unknown").replace(b'"hums"', b"9" * 5000),
        line().replace(b'"hums"', b"NaN"),
    ],
)  # fmt: skip
def test_what_is_no_entry_is_refused_in_words(raw: bytes):
    with pytest.raises(BadEntry):
        entry_of_line(raw)


@given(st.binary(max_size=200))
def test_no_bytes_do_worse_than_being_refused(raw: bytes):
    try:
        entry_of_line(raw)
    except BadEntry:
        return
    raise AssertionError("random bytes made an entry")


@settings(max_examples=300, deadline=None)
@given(st.data())
def test_a_mutated_line_is_refused_or_clean(data):
    raw = bytearray(line())
    for _ in range(data.draw(st.integers(1, 4))):
        place = data.draw(st.integers(0, len(raw) - 1))
        raw[place : place + data.draw(st.integers(0, 2))] = data.draw(st.binary(max_size=3))
    try:
        entry = entry_of_line(bytes(raw))
    except BadEntry:
        return
    assert not any(steers_terminal(character) for character in entry.person + entry.kind)
    assert entry_of_line(line_of_entry(entry)) == entry


@pytest.mark.parametrize("endless", [b"x" * (3 * MAX_LINE), b"\n" * 5000 + b"{"])
def test_an_endless_line_is_one_bad_line(book: Casebook, tmp_path: Path, endless: bytes):
    (tmp_path / "x.jsonl").write_bytes(b'{"id"' + endless + b"\n" + line() + b"\n")
    report = merge_file(book, tmp_path / "x.jsonl")
    assert report.new == 1
    assert report.refused >= 1


def a_foreign_casebook(tmp_path: Path, *statements: str) -> Path:
    path = tmp_path / "foreign.db"
    with open_casebook(path) as other:
        other.log_sheet(a_sheet(), "Bo")
    connection = sqlite3.connect(path)
    for statement in statements:
        connection.execute(statement)
    connection.commit()
    connection.close()
    return path


BAD_ROW = (
    "INSERT INTO entry (id, case_id, person, time_utc, offset_minutes, kind, body_version, after, body)"
    " VALUES ('01a231aa-1420-7647-b4f4-8e88f4d3a306', '01a231aa-1420-7647-b4f4-8e88f4d3a307',"
    " {person}, {time}, {offset}, 'note', 1, NULL, {body})"
)


@pytest.mark.parametrize(
    "cells",
    [
        {"person": "x'ff00'"},
        {"person": "char(27) || '[2J'"},
        {"person": "CAST(x'ff' AS TEXT)"},
        {"time": "'2026-03-02T06:00:00.000000 '"},
        {"time": "'9999-99-99T99:99:99.999999Z'"},
        {"offset": "1e300"},
        {"offset": "'x'"},
        {"body": "'{'"},
        {"body": "x'7b7d'"},
        {"body": "CAST(x'7b2274657874223a22ff227d' AS TEXT)"},
        {"body": "zeroblob(2000000)"},
        {"body": "'[]'"},
    ],
)
def test_a_bad_row_of_a_casebook_is_left_out(book: Casebook, tmp_path: Path, cells: dict[str, str]):
    good = {
        "person": "'Bo'",
        "time": "'2026-03-02T06:00:00.000000Z'",
        "offset": "0",
        "body": '\'{"text":"x"}\'',
    }
    path = a_foreign_casebook(tmp_path, BAD_ROW.format(**{**good, **cells}))
    report = merge_file(book, path)
    assert (report.new, report.refused) == (8, 1)
    assert not any(steers_terminal(character) for character in report.refusals[0].why)


@pytest.mark.parametrize(
    "statements",
    [
        ("ALTER TABLE entry RENAME TO hidden", "CREATE VIEW entry AS SELECT * FROM hidden"),
        ("ALTER TABLE entry ADD COLUMN more TEXT AS (upper(body))",),
        ("ALTER TABLE entry RENAME TO hidden",),
        ("PRAGMA application_id = 7",),
    ],
)
def test_a_casebook_with_strange_tables_is_refused(
    book: Casebook, tmp_path: Path, statements: tuple[str, ...]
):
    path = a_foreign_casebook(tmp_path, *statements)
    with pytest.raises(NotACasebook):
        merge_file(book, path)
    assert book.store.count() == 0


def test_a_newer_casebook_is_refused_politely(book: Casebook, tmp_path: Path):
    path = a_foreign_casebook(tmp_path, "PRAGMA user_version = 99")
    with pytest.raises(NewerCasebook, match="version 99"):
        merge_file(book, path)


@pytest.mark.long
@settings(max_examples=400, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.data())
def test_a_casebook_with_bytes_changed_at_random_never_breaks_the_merge(tmp_path_factory, data):
    folder = tmp_path_factory.mktemp("fuzz")
    merged_or_refused(folder, data)


@settings(max_examples=25, deadline=None)
@given(st.data())
def test_a_casebook_with_some_bytes_changed_never_breaks_the_merge(tmp_path_factory, data):
    merged_or_refused(tmp_path_factory.mktemp("fuzz"), data)


def merged_or_refused(folder: Path, data: st.DataObject) -> None:
    raw = bytearray(a_foreign_casebook(folder).read_bytes())
    for _ in range(data.draw(st.integers(1, 30))):
        raw[data.draw(st.integers(0, len(raw) - 1))] = data.draw(st.integers(0, 255))
    (folder / "foreign.db").write_bytes(raw)
    with open_casebook(folder / "own.db") as book:
        kept = book.log_sheet(a_sheet("M-1"), "Ada")
        try:
            merge_file(book, folder / "foreign.db")
        except CasebookError as error:
            assert str(error)
        assert book.case(kept).sheet == a_sheet("M-1")
        assert book.store.case_entries(kept)


@given(st.characters())
def test_what_steers_a_terminal_is_written_as_its_code(character):
    body = '{"text":"a' + ("" if character in '"\\' or character.isascii() else character) + '"}'
    entry = structs.replace(entry_of_line(line()), body_json=body, person=f"A{character}")
    written = line_of_entry(entry).decode()
    assert not any(steers_terminal(found) or found == "\t" for found in written[:-1])
    assert json.loads(written)["body"] == json.loads(body)
    assert json.loads(written)["person"] == f"A{character}"


def test_a_control_in_a_damaged_body_breaks_no_line(book: Casebook):
    entry = structs.replace(entry_of_line(line()), body_json='{"text":"a\x1b[2J\n\x01"}')
    assert line_of_entry(entry).count(b"\n") == 1
    assert json.loads(line_of_entry(entry))["body"] == {"text": "a\x1b[2J\n\x01"}
