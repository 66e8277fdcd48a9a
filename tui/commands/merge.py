"""``plateside merge``: take in another casebook, exported entries, or case sheets."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from calc.errors import InputError, PlatesideError
from casebook.book import Casebook, open_casebook
from casebook.exchange import merge_any
from tui import cli, people, places
from tui.output import say, warn
from tui.progress import Bar

if TYPE_CHECKING:
    from argparse import Namespace

    from casebook.merge import MergeReport

REFUSALS_SHOWN = 20


def run(arguments: Namespace) -> int:
    """Merge every file; one that cannot be read is told and does not stop the others."""
    paths = [Path(name).expanduser() for name in arguments.files]
    missing = [path for path in paths if not path.exists()]
    for path in missing:
        warn(f"{path}: no such file; a casebook, exported entries or case sheets")
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
    bar = Bar(path.name)
    try:
        report = merge_any(book, path, people.login_name(), progress=bar.show if bar.is_seen else None)
    except PlatesideError as error:
        bar.end()
        warn(str(error))
        return cli.WRONG_INPUT if isinstance(error, InputError) else cli.FAILED
    finally:
        bar.end()
    tell(report)
    return cli.FAILED if report.refused else cli.DONE


def tell(report: MergeReport) -> None:
    """Say what came of a merge, and of what was left out the first ones and why."""
    say(report.says)
    for refusal in report.refusals[:REFUSALS_SHOWN]:
        warn(f"left out: {refusal.where}: {refusal.why}")
    if report.refused > REFUSALS_SHOWN:
        warn(f"and {report.refused - REFUSALS_SHOWN} more were left out")
