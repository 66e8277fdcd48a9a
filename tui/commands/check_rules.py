"""``plateside check-rules``: everything that is wrong with the rules, at once."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from rules.check import check_rules
from rules.loading import load_knowledge
from tui import cli, places
from tui.output import say, warn

if TYPE_CHECKING:
    from argparse import Namespace

TOLD = 500
"""Problems that are told; the others are counted."""


def run(arguments: Namespace) -> int:
    """Tell every problem with file, line and field; else count the rules, and name what a shop loosens."""
    folders = tuple(Path(folder).expanduser() for folder in arguments.folders) or places.rule_folders(
        arguments
    )
    problems = check_rules(folders)
    if problems:
        warn("\n".join(str(problem) for problem in problems[:TOLD]))
        if len(problems) > TOLD:
            warn(f"and {len(problems) - TOLD} more problems")
        return cli.WRONG_INPUT
    known = load_knowledge(extra_folders=folders)
    parts = ("faults", "readings", "observations", "complaints", "limits", "hazards", "gates")
    say(", ".join(f"{len(getattr(known, part))} {part}" for part in parts) + ": no problem found")
    say(f"loosened: {sentence}" for sentence in known.loosened)
    return cli.DONE
