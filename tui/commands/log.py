"""``plateside log``: put case sheets into the casebook and print the case numbers."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calc.errors import InputError
from casebook.book import open_casebook
from tui import cli, people, places
from tui.commands.sheets import read
from tui.output import say, warn

if TYPE_CHECKING:
    from argparse import Namespace


def run(arguments: Namespace) -> int:
    """Log every sheet that can be read; one that cannot is told, and nothing of it is written."""
    person = arguments.person or people.login_name()
    status = cli.DONE
    sheets = []
    for name in arguments.sheets:
        try:
            sheets.append((name, read(name)))
        except InputError as error:
            warn(str(error))
            status = cli.WRONG_INPUT
    if not sheets:
        return status
    with open_casebook(places.casebook_path(arguments)) as book:
        for name, sheet in sheets:
            case = book.log_sheet(sheet, person)
            say(f"{book.number(case)}  {name}")
    return status
