"""``plateside merge``: take in another casebook, exported entries, or a mailed case sheet."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TYPE_CHECKING

from calc.errors import InputError, PlatesideError
from casebook.book import Casebook, open_casebook
from casebook.exchange import merge_any
from tui import cli, people, places
from tui.output import say, warn

if TYPE_CHECKING:
    from argparse import Namespace

    from casebook.merge import Progress

REFUSALS_SHOWN = 20


def run(arguments: Namespace) -> int:
    """Merge every file; one that cannot be read is told and does not stop the others."""
    paths = [Path(name).expanduser() for name in arguments.files]
    missing = [path for path in paths if not path.exists()]
    for path in missing:
        warn(f"{path}: no such file; a casebook, exported entries or a case sheet")
    if len(missing) == len(paths):
        return cli.WRONG_INPUT
    worst = cli.WRONG_INPUT if missing else cli.DONE
    with open_casebook(places.casebook_path(arguments)) as book:
        for path in paths:
            if path not in missing:
                worst = max(worst, _one(book, path))
    return worst


def _one(book: Casebook, path: Path) -> int:
    """Merge one file and say what came of it; return the exit status."""
    try:
        report = merge_any(book, path, people.login_name(), progress=_progress(path))
    except PlatesideError as error:
        warn(str(error))
        return cli.WRONG_INPUT if isinstance(error, InputError) else cli.FAILED
    say(report.says)
    for refusal in report.refusals[:REFUSALS_SHOWN]:
        warn(f"left out: {refusal.where}: {refusal.why}")
    return cli.FAILED if report.refused else cli.DONE


def _progress(path: Path) -> Progress | None:
    """Return what shows how far a merge is, on a terminal only."""
    if not sys.stderr.isatty():
        return None

    def show(done: int, of: int) -> None:
        end = "\n" if done >= of else ""
        print(f"\r{path.name}: {done} of {of} entries", end=end, file=sys.stderr, flush=True)

    return show
