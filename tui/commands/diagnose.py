"""``plateside diagnose``: weigh case sheets. One bad sheet is told and does not stop the others."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calc.errors import InputError, PlatesideError
from tui import cli, places
from tui.answer_text import answer_lines
from tui.commands.sheets import read
from tui.compose import weigh
from tui.jsonout import as_json, error_json
from tui.output import say, say_json, warn

if TYPE_CHECKING:
    from argparse import Namespace

    from rules.knowledge import Knowledge


def run(arguments: Namespace) -> int:
    """Answer every sheet in the order given; return the worst exit status."""
    knowledge = places.knowledge(arguments)
    worst = cli.DONE
    for place, name in enumerate(arguments.sheets):
        if place and not arguments.json:
            say()
        worst = max(worst, _answer(name, knowledge, as_lines=arguments.json))
    return worst


def _answer(name: str, knowledge: Knowledge, *, as_lines: bool) -> int:
    """Answer one sheet, or say why not; return its exit status."""
    try:
        sheet = read(name)
        diagnosis = weigh(sheet, knowledge, name=name)
        if as_lines:
            answer = as_json(diagnosis)
        else:
            lines = answer_lines(diagnosis, sheet, knowledge)
    except Exception as error:  # the other sheets are still answered
        return _refused(name, error, as_lines=as_lines)
    if as_lines:
        say_json(answer)
    else:
        say(lines)
    return cli.DONE


def _refused(name: str, error: Exception, *, as_lines: bool) -> int:
    """Tell why a sheet has no answer, on standard error and in its own line; return its exit status."""
    known = isinstance(error, PlatesideError)
    told = str(error) if known else f"{name}: {cli.unexpected(error)}"
    warn(told)
    if as_lines:
        say_json(error_json(name, error if known else PlatesideError(told)))
    return cli.WRONG_INPUT if isinstance(error, InputError) else cli.FAILED
