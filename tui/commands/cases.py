"""``plateside cases``: list cases, or search them."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from casebook.book import Casebook, open_casebook
from casebook.store import machine_key
from tui import cli, places
from tui.columns import columns, paragraph
from tui.harmless import harmless
from tui.output import say, say_json, warn
from tui.page_history import LEAST_POINTS, trend_sentences
from tui.words import plain

if TYPE_CHECKING:
    from argparse import Namespace

    from casebook.store import CaseRow

HEAD = ("case", "last entry", "machine", "complaint", "fault; ? still open")
ROOM = (9, 10, 18, 16, 19)  # eighty columns with the gaps between


def run(arguments: Namespace) -> int:
    """Print the cases that hold every word, newest first; below them where one machine's readings lead."""
    with open_casebook(places.existing_casebook(arguments)) as book:
        rows = book.search(" ".join(arguments.words), limit=arguments.limit)
        trends = _trends(book, rows, arguments)
    if arguments.json:
        more = {"trends": trends} if trends else {}
        for row in rows:
            say_json({**msgspec.to_builtins(row), **more})
        return cli.DONE
    if not rows:
        warn("no case holds all of these words" if arguments.words else "the casebook is empty")
        return cli.DONE
    say(columns([_cells(row) for row in rows], head=HEAD))
    for sentence in trends:
        say(paragraph(sentence, first="trend: "))
    return cli.DONE


def _trends(book: Casebook, rows: list[CaseRow], arguments: Namespace) -> list[str]:
    """Return the trends in words where all cases that were found are of one machine."""
    keys = {machine_key(row.tag) for row in rows}
    if len(rows) < LEAST_POINTS or len(keys) > 1 or keys == {""}:
        return []
    tag, now = rows[0].tag, max(row.last_utc for row in rows)
    knowledge = places.knowledge(arguments)
    return trend_sentences(book.machine_cases(tag), tag=tag, now=now, knowledge=knowledge)


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
