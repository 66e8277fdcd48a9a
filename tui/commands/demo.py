"""``plateside demo``: the screens on a throw-away casebook of an invented plant."""

from __future__ import annotations

import contextlib
import shutil
import tempfile
import time
from pathlib import Path
from typing import TYPE_CHECKING

from calc.errors import PlatesideError
from tui import cli, places
from tui.commands import visit
from tui.output import say, warn

if TYPE_CHECKING:
    from argparse import Namespace

PREFIX = "plateside-demo-"
DAY_S = 86_400.0


def run(arguments: Namespace) -> int:
    """Build the plant's casebook; start the screens on it, or only write it where ``--build`` says."""
    from tui.demo.build import build

    knowledge = places.knowledge(arguments)
    if arguments.build:
        target = Path(arguments.build).expanduser()
        if target.exists():
            raise PlatesideError(f"{target} exists already; name a new file")
        say(f"{target}: {build(target, knowledge)} cases of the invented Tern Point cannery")
        return cli.DONE
    visit.need_terminal(plain=arguments.plain)
    sweep(Path(tempfile.gettempdir()))
    with tempfile.TemporaryDirectory(prefix=PREFIX, ignore_cleanup_errors=True) as folder:
        path = Path(folder) / "tern-point.db"
        warn("building the example plant, a few seconds ...")
        build(path, knowledge)
        return visit.start(path, arguments)


def sweep(folder: Path) -> None:
    """Remove what demos have left that ended with their line or their machine, a day ago or more."""
    for left in folder.glob(f"{PREFIX}*"):
        with contextlib.suppress(OSError):
            if time.time() - left.lstat().st_mtime > DAY_S:
                shutil.rmtree(left)
