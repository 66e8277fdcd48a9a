"""``plateside report``: the printed sheet of one case, or the tag for the repair shop."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from casebook.book import open_casebook
from tui import cli, page, places, report
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
        case, diagnosis = visit.case, visit.weigh().diagnosis
        cases = book.machine_cases(case.tag) if case.tag else ()
    said = visit.learned_words()
    if said:
        diagnosis = msgspec.structs.replace(diagnosis, notes=(*diagnosis.notes, said))
    if arguments.tag:
        sheet = page.shop_tag(case, diagnosis, knowledge)
    else:
        sheet = page.sheet_page(case, diagnosis, knowledge, cases=cases)
    say(report.as_html(sheet) if arguments.html else report.as_text(sheet))
    return cli.DONE
