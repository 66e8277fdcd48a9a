"""``plateside cases``: list cases, or search them."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from casebook.book import open_casebook
from tui import cli, places
from tui.columns import columns
from tui.harmless import harmless
from tui.output import say, say_json, warn
from tui.words import plain

if TYPE_CHECKING:
    from argparse import Namespace

    from casebook.store import CaseRow

HEAD = ("case", "last entry", "machine", "complaint", "fault; ? still open")
ROOM = (9, 10, 18, 16, 19)  # eighty columns with the gaps between


def run(arguments: Namespace) -> int:
    """Print the cases that hold every word, newest first."""
    with open_casebook(places.existing_casebook(arguments)) as book:
        rows = book.search(" ".join(arguments.words), limit=max(1, arguments.limit))
        for row in rows if arguments.json else ():
            say_json(msgspec.to_builtins(row))
    if arguments.json:
        return cli.DONE
    if not rows:
        warn("no case holds all of these words" if arguments.words else "the casebook is empty")
        return cli.DONE
    say(columns([_cells(row) for row in rows], head=HEAD))
    return cli.DONE


def _cells(row: CaseRow) -> list[str]:
    """Return one case as cells that fit into eighty columns."""
    fault = row.found if row.status == "closed" else f"{row.suspect}?"
    texts = (
        row.number,
        f"{row.last_utc.astimezone():%Y-%m-%d}",
        row.tag or "-",
        plain(row.complaint),
        plain(fault),
    )
    return [harmless(text, limit=room) for text, room in zip(texts, ROOM, strict=True)]
