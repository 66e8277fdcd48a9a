"""``plateside export``: cases as YAML sheets, every entry as JSON Lines, or the readings as CSV."""

from __future__ import annotations

import io
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from calc.sheet_io import sheet_to_yaml
from casebook.book import Casebook, open_casebook
from casebook.exchange import export_csv, export_lines, sheet_for_export
from tui import cli, places
from tui.output import say, warn

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Iterator

    from casebook.fold import Case

PAGE = 500


def run(arguments: Namespace) -> int:
    """Write the named cases, or all, to standard output or as files."""
    with open_casebook(places.existing_casebook(arguments)) as book:
        if arguments.json_lines:
            export_lines(book, sys.stdout.buffer, arguments.cases or None)
        elif arguments.csv:
            _as_utf8()
            export_csv(_cases(book, arguments.cases), sys.stdout)
        elif arguments.to:
            return _files(book, arguments.cases, Path(arguments.to).expanduser())
        else:
            _as_utf8()
            _sheets(book, arguments.cases)
    return cli.DONE


def _as_utf8() -> None:
    """Write every letter as it was typed and end lines as told here, whatever the terminal does."""
    if isinstance(sys.stdout, io.TextIOWrapper):
        sys.stdout.reconfigure(encoding="utf-8", newline="")


def _files(book: Casebook, names: list[str], folder: Path) -> int:
    """Write cases as one file each, named by their numbers; return the exit status."""
    folder.mkdir(parents=True, exist_ok=True)
    status = cli.DONE
    for case in _cases(book, names):
        path = folder / f"{book.number(case.id)}.yaml"
        try:
            with path.open("x", encoding="utf-8", newline="\n") as file:
                file.write(sheet_to_yaml(sheet_for_export(case)))
        except FileExistsError:
            warn(f"{path} exists already and stays as it is")
            status = cli.FAILED
        else:
            say(str(path))
    return status


def _sheets(book: Casebook, names: list[str]) -> None:
    """Write cases as YAML documents, one after the other."""
    for place, case in enumerate(_cases(book, names)):
        if place:
            say("---")
        say(f"# {book.number(case.id)}")
        say(sheet_to_yaml(sheet_for_export(case)).rstrip("\n"))


def _cases(book: Casebook, names: list[str]) -> Iterator[Case]:
    """Yield the named cases in their order, or all, newest first, without holding them all."""
    if names:
        yield from [book.case(name) for name in names]
        return
    before: int | None = None
    while rows := book.cases(limit=PAGE, before=before):
        yield from (book.case(row.id) for row in rows)
        before = rows[-1].place
