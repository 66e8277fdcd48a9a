"""Reading the entries of a file that anybody may have made: another casebook, or JSON Lines.

Nothing of the file is trusted: a casebook file is opened to read only, with its own
triggers, views and functions out of play, and each row is checked like a line of text.
"""

from __future__ import annotations

import shutil
import sqlite3
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any, Final, NamedTuple

import msgspec

from casebook import schema
from casebook.check import MAX_BODY, check_entry
from casebook.entry import Entry, canonical_json
from casebook.errors import BadEntry, CasebookError, NewerCasebook, NotACasebook
from casebook.opening import translated
from casebook.place import MAGIC, uri
from casebook.rows import entry_of_row, moment_of, stamp
from casebook.walk import UNREADABLE, Gap, walk
from casebook.wire import entry_of_line, read_lines

_MAX_CELL: Final = 4 * MAX_BODY


class Item(NamedTuple):
    """One entry of a foreign file, or why it is left out, and where it stands."""

    where: str
    entry: Entry | None
    why: str = ""


def kind_of_file(path: Path) -> str:
    """Return "casebook", "lines" or "sheet", by what the file begins with."""
    try:
        with path.open("rb") as file:
            head = file.read(4096)
    except OSError as error:
        raise CasebookError(f"{path} cannot be read: {error.strerror}") from error
    if head.startswith(MAGIC):
        return "casebook"
    return "lines" if head.lstrip(b"\xef\xbb\xbf \t\r\n").startswith(b"{") else "sheet"


def count_items(path: Path) -> int:
    """Return about how many entries a file holds, for a progress bar."""
    if kind_of_file(path) == "casebook":
        with translated(path), closing(open_foreign(path)) as connection:
            return _count(connection)
    with path.open("rb") as file:
        return sum(piece.count(b"\n") for piece in iter(lambda: file.read(1 << 20), b""))


def _count(connection: sqlite3.Connection) -> int:
    try:
        return int(connection.execute("SELECT count(*) FROM entry").fetchone()[0])
    except UNREADABLE:
        return 0  # damaged: what can be read is read, without a bar


def read_items(path: Path) -> Iterator[Item]:
    """Yield every entry of a casebook file or of JSON Lines, good or bad."""
    return _casebook_items(path) if kind_of_file(path) == "casebook" else _line_items(path)


def _line_items(path: Path) -> Iterator[Item]:
    with path.open("rb") as file:
        for number, line in read_lines(file):
            where = f"line {number}"
            try:
                entry = entry_of_line(line.removeprefix(b"\xef\xbb\xbf") if number == 1 else line)
            except BadEntry as error:
                yield Item(where, None, str(error))
            else:
                yield Item(where, entry)


def _casebook_items(path: Path) -> Iterator[Item]:
    if Path(f"{path}-wal").exists():
        # The newest entries may lie in the journal; a private copy reads both and changes neither.
        with TemporaryDirectory(prefix="plateside-") as folder:
            copy = Path(folder) / "copy.db"
            shutil.copyfile(path, copy)
            shutil.copyfile(f"{path}-wal", f"{copy}-wal")
            yield from _items_of(copy)
    else:
        yield from _items_of(path)


def _items_of(path: Path) -> Iterator[Item]:
    with translated(path), closing(open_foreign(path)) as connection:
        for found in walk(connection):
            if isinstance(found, Gap):
                yield Item(found.where, None, f"cannot be read ({found.why})")
            else:
                yield _item_of_row(found)


def _item_of_row(row: tuple[Any, ...]) -> Item:
    where = f"entry {row[-1]!s:.20}"
    try:
        return Item(where, _entry_of_foreign_row(row[:-1]))
    except BadEntry as error:
        return Item(where, None, str(error))


def _plain(sql: str) -> str:
    return " ".join(sql.split())


_KNOWN_TABLES: Final = frozenset(
    _plain(statement)
    for migration in schema.MIGRATIONS
    for statement in migration.statements
    if statement.startswith("CREATE TABLE entry")
)


def open_foreign(path: Path) -> sqlite3.Connection:
    """Open a foreign casebook; refuse one that is no casebook, newer, or not what it claims to be."""
    options = "mode=ro" if Path(f"{path}-wal").exists() else "immutable=1"
    connection = sqlite3.connect(uri(path, options), uri=True)
    try:
        connection.setlimit(sqlite3.SQLITE_LIMIT_LENGTH, _MAX_CELL)
        for pragma in ("trusted_schema = OFF", "cell_size_check = ON", "query_only = ON", "mmap_size = 0"):
            connection.execute(f"PRAGMA {pragma}")
        # No text decoding before the check: a foreign cell may hold any bytes.
        connection.text_factory = lambda data: data.decode("utf-8", "surrogateescape")
        _refuse_unless_casebook(connection, path)
    except BaseException:
        connection.close()
        raise
    return connection


def _refuse_unless_casebook(connection: sqlite3.Connection, path: Path) -> None:
    if connection.execute("PRAGMA application_id").fetchone()[0] != schema.APPLICATION_ID:
        raise NotACasebook(f"{path.name} is a database, but no casebook")
    version = connection.execute("PRAGMA user_version").fetchone()[0]
    if version > schema.VERSION:
        raise NewerCasebook(
            f"{path.name} has tables of version {version}; this Plateside knows {schema.VERSION}"
        )
    ask = "SELECT type, sql FROM sqlite_master WHERE name = 'entry' COLLATE NOCASE"
    for kind, sql in connection.execute(ask).fetchall() or [("", "")]:
        # A view, a virtual table or a computed column could run what its maker likes when it is read.
        if kind != "table" or _plain(str(sql)) not in _KNOWN_TABLES:
            raise NotACasebook(f"{path.name} has no table of entries")


def _in_utc(text: str) -> str:
    moment = moment_of(text)
    return stamp(moment) if moment.tzinfo is not None else text


def _entry_of_foreign_row(row: tuple[Any, ...]) -> Entry:
    """Return the checked entry of a row. Raises ``BadEntry``."""
    if not isinstance(row[8], str):
        raise BadEntry("body", row[8], "JSON text")
    try:
        row[8].encode()
        body_json = canonical_json(msgspec.json.decode(row[8]))
        entry = entry_of_row((*row[:3], _in_utc(row[3]), *row[4:8], body_json))
    except (msgspec.DecodeError, RecursionError, ValueError, OverflowError) as error:
        raise BadEntry("row", f"{row[0]!r:.40}", f"an entry ({error})") from error
    check_entry(entry)
    return entry
