"""``plateside expect``: what a healthy machine with this nameplate should read."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from tui import cli, places
from tui.answer_text import NO_MODEL, band_lines, item_lines, titled
from tui.columns import paragraph
from tui.commands.sheets import read
from tui.jsonout import as_json
from tui.output import say, say_json
from tui.words import kind_name

if TYPE_CHECKING:
    from argparse import Namespace

KEYS = ("sheet", "model", "expected", "plate_remarks", "notes")


def run(arguments: Namespace) -> int:
    """Print the bands of one sheet."""
    from rules.diagnosing import expect

    sheet = read(arguments.sheet)
    found = msgspec.structs.replace(
        expect(sheet, knowledge=places.knowledge(arguments)), sheet=arguments.sheet
    )
    if arguments.json:
        answer = as_json(found)
        say_json({key: answer[key] for key in KEYS})
        return cli.DONE
    machine = sheet.machine
    say(paragraph(f"{machine.tag or '(no tag)'}: {kind_name(machine.kind)}; 9 of 10 healthy ones read"))
    say(band_lines(found.expected) or item_lines([NO_MODEL]))
    say(titled("Nameplate", item_lines(found.plate_remarks)))
    say(titled("Note", item_lines(found.notes)))
    return cli.DONE
