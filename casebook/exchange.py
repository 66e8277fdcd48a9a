"""Cases on their way to other programs: JSON Lines, case sheets, CSV, and whole casebooks."""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator
from datetime import UTC, datetime, timedelta
from itertools import islice
from pathlib import Path
from typing import TYPE_CHECKING, BinaryIO, Final, TextIO

import msgspec

from calc.sheet import CaseSheet, Reading, Value
from casebook.bodies import Note, bodies_of_sheet
from casebook.book import Casebook
from casebook.entry import Entry, clean_line, encode_body, id_from_content, make_entry
from casebook.fold import Case
from casebook.foreign import Item
from casebook.history import inner_unit, moment_of_reading
from casebook.merge import MergeReport, Progress, is_sheet, merge_file, merge_items
from casebook.wire import write_lines

if TYPE_CHECKING:
    from calc.sheet_stream import SheetAt

# A spreadsheet takes a cell that begins so for a formula (CSV injection; OWASP names these).
_FORMULA: Final = ("=", "+", "-", "@", "\t", "\r", "\n", "|", "%")
_CSV_HEAD: Final = (
    "case", "tag", "taken_local", "taken_utc", "person", "measure", "state",
    "value_1", "value_2", "value_3", "unit", "number_1", "number_2", "number_3",
    "temperature", "test_voltage", "speed", "at", "links", "method", "instrument", "note",
)  # fmt: skip


def export_lines(book: Casebook, file: BinaryIO, cases: Iterable[str] | None = None) -> int:
    """Write the entries of some cases (ids or numbers; None: all) as JSON Lines; return how many."""
    if cases is None:
        return write_lines(book.store.all_entries(), file)
    return sum(write_lines(book.store.case_entries(book.case_id(name)), file) for name in cases)


def sheet_for_export(case: Case) -> CaseSheet:
    """Return a case as a sheet whose readings say when they were taken."""
    readings = []
    for logged in case.taken:
        reading = logged.what
        if reading.taken_at is None:
            when = logged.entry.time_local.isoformat(timespec="seconds")
            reading = msgspec.structs.replace(reading, taken_at=when)
        readings.append(reading)
    return msgspec.structs.replace(case.sheet, readings=tuple(readings))


def merge_sheet(book: Casebook, sheet: CaseSheet, person: str, *, source: str = "case sheet") -> MergeReport:
    """Take in a case sheet as a case whose ids are made from its content: twice changes nothing.

    ``Casebook.log_sheet`` makes a new case each time; this is for sheets that were mailed. A sheet
    whose readings do not say when they were taken counts as of now.
    """
    entries = entries_of_sheet(sheet, person, source=source)
    return merge_items(book, (Item(source, entry) for entry in entries), source=source)


def entries_of_sheet(sheet: CaseSheet, person: str, *, source: str) -> list[Entry]:
    """Return the entries of a sheet, with ids that depend on its content alone."""
    content = [encode_body(body) for body in bodies_of_sheet(sheet)]
    case = id_from_content("case", clean_line(person), *content)
    times = [moment for reading in sheet.readings if (moment := moment_of_reading(reading)) is not None]
    start = min(times, default=datetime.now().astimezone())
    origin = Note(text=f"taken in from {clean_line(source)[:80]}")
    entries: list[Entry] = []
    for place, body in enumerate((*bodies_of_sheet(sheet), origin)):
        entry = make_entry(
            body,
            case=case,
            person=person,
            after=entries[-1].id if entries else None,
            at=start + timedelta(microseconds=place),
            # The sheet may come again in another file, which is another note on the same case.
            entry_id=id_from_content(case, origin.text if body is origin else str(place)),
        )
        entries.append(entry)
    return entries


def merge_any(book: Casebook, path: Path, person: str, *, progress: Progress | None = None) -> MergeReport:
    """Merge a casebook, JSON Lines, or case sheets (one or many), whichever a file is."""
    if not is_sheet(path):
        return merge_file(book, path, progress=progress)
    from calc.sheet_io import read_sheet  # noqa: PLC0415  (YAML only where a sheet comes)
    from calc.sheet_stream import read_sheets  # noqa: PLC0415

    if sum(1 for _ in islice(read_sheets(path), 2)) < 2:
        return merge_sheet(book, read_sheet(path), person, source=path.name)
    items = _items_of_sheets(read_sheets(path), person, source=path.name)
    return merge_items(book, items, source=path.name, progress=progress)


def _items_of_sheets(sheets: Iterable[SheetAt], person: str, *, source: str) -> Iterator[Item]:
    """Yield the entries of every sheet that can be read, and why where one cannot."""
    for found in sheets:
        where = f"the sheet from line {found.line}"
        if found.sheet is not None:
            yield from (Item(where, one) for one in entries_of_sheet(found.sheet, person, source=source))
        else:
            yield Item(where, None, str(found.error))


def export_csv(cases: Iterable[Case], file: TextIO) -> int:
    """Write every reading of some cases as CSV, one row each; return how many.

    Numbers are in the inner unit of their dimension (W, V, A, Hz, rpm, ohm, degC, ...). Text that a
    spreadsheet would take for a formula gets an apostrophe in front.
    """
    writer = csv.writer(file, lineterminator="\r\n")
    writer.writerow(_CSV_HEAD)
    rows = 0
    for case in cases:
        for logged in case.taken:
            writer.writerow(_csv_row(case, logged.what, logged.entry))
            rows += 1
    return rows


def _csv_row(case: Case, reading: Reading, entry: Entry) -> list[str]:
    moment = moment_of_reading(reading) or entry.time_local
    texts = [value.text for value in reading.values[:3]]
    numbers = [f"{value.number:.12g}" if value.is_read else "" for value in reading.values[:3]]
    cells = [
        case.number,
        case.tag,
        moment.isoformat(timespec="seconds"),
        moment.astimezone(UTC).isoformat(timespec="seconds"),
        entry.person,
        reading.measure,
        reading.state,
        *_three(texts),
        inner_unit(reading.measure),
        *_three(numbers),
        *(_text(value) for value in (reading.temperature, reading.test_voltage, reading.speed)),
        *(
            word or ""
            for word in (reading.at, reading.links, reading.method, reading.instrument, reading.note)
        ),
    ]
    return [harmless_cell(cell) for cell in cells]


def _three(texts: list[str]) -> list[str]:
    return [*texts, "", "", ""][:3]


def _text(value: Value | None) -> str:
    return value.text if value is not None else ""


def harmless_cell(text: str) -> str:
    """Return a cell that no spreadsheet runs as a formula; plain numbers stay numbers."""
    if not text.startswith(_FORMULA):
        return text
    try:
        float(text)
    except ValueError:
        return "'" + text
    return text if text.isascii() and text.strip() == text else "'" + text
