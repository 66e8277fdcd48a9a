"""``plateside report``: the printed sheet of one case, or the tag for the repair shop."""

from __future__ import annotations

from typing import TYPE_CHECKING

from casebook.book import open_casebook
from tui import cli, places, printing, report
from tui.compose import Visit
from tui.output import say

if TYPE_CHECKING:
    from argparse import Namespace


def run(arguments: Namespace) -> int:
    """Print the sheet of one case as text or as HTML."""
    knowledge = places.knowledge(arguments)
    with open_casebook(places.existing_casebook(arguments)) as book:
        visit = Visit(book, arguments.case, person="", knowledge=knowledge)
        visit.use_learned = not arguments.no_learned
        sheet = printing.printed(visit, shop_tag=arguments.tag)
    say(report.as_html(sheet) if arguments.html else report.as_text(sheet))
    return cli.DONE
