"""``plateside salvage``: what can be read of a damaged casebook, saved into a new one."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from calc.errors import PlatesideError
from casebook.salvage import salvage
from tui import cli
from tui.commands.merge import tell

if TYPE_CHECKING:
    from argparse import Namespace


def run(arguments: Namespace) -> int:
    """Save what can be read; the damaged file is only read."""
    source, target = Path(arguments.file).expanduser(), Path(arguments.target).expanduser()
    if not source.is_file():
        raise PlatesideError(f"{source}: no such file")
    if target.exists():
        raise PlatesideError(f"{target} exists already; name a new file")
    report = salvage(source, target)
    tell(report)
    return cli.DONE if report.new else cli.FAILED
