"""``plateside`` without a command: the screens, or the same visit as plain questions and answers."""

from __future__ import annotations

import os
import sys
from typing import TYPE_CHECKING

from calc.errors import PlatesideError
from tui import places
from tui.output import screen_stream

if TYPE_CHECKING:
    from argparse import Namespace
    from pathlib import Path


def run(arguments: Namespace) -> int:
    """Start on the user's casebook."""
    need_terminal(plain=arguments.plain)
    return start(places.casebook_path(arguments), arguments)


def start(casebook: Path, arguments: Namespace) -> int:
    """Start the screens on a casebook, or plain questions where the terminal can do no more."""
    folders = places.rule_folders(arguments)
    if is_plain(arguments):
        from tui.plain import converse

        return converse(casebook, places.knowledge(arguments), use_learned=not arguments.no_learned)
    from tui.app import run_app

    return run_app(
        casebook,
        rule_folders=folders,
        ascii_only=arguments.ascii,
        use_learned=not arguments.no_learned,
    )


def is_plain(arguments: Namespace) -> bool:
    """Whether the visit is held in plain lines."""
    return bool(arguments.plain) or os.environ.get("TERM") == "dumb"


def need_terminal(*, plain: bool) -> None:
    """Refuse where there is no terminal to draw on; plain lines can be piped."""
    if plain or os.environ.get("TERM") == "dumb":
        return
    if not all(stream is not None and stream.isatty() for stream in (sys.__stdin__, screen_stream())):
        raise PlatesideError("the screens need a terminal; `plateside --plain` and the commands do not")
