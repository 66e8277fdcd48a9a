"""``plateside copy``: a whole copy of the casebook, taken while others write."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from calc.errors import PlatesideError
from casebook.book import open_casebook
from tui import cli, places
from tui.output import say

if TYPE_CHECKING:
    from argparse import Namespace


def run(arguments: Namespace) -> int:
    """Write the copy; an existing file is never written over."""
    target = Path(arguments.file).expanduser()
    if target.exists():
        raise PlatesideError(f"{target} exists already; name a new file")
    with open_casebook(places.existing_casebook(arguments)) as book:
        book.safe_copy(target)
    say(f"{target}")
    return cli.DONE
