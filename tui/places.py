"""Where things lie: the casebook file and the folders of rules."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

from calc.errors import PlatesideError

if TYPE_CHECKING:
    from argparse import Namespace

    from rules.knowledge import Knowledge


def casebook_path(arguments: Namespace) -> Path:
    """Return the casebook: from ``--casebook``, $PLATESIDE_CASEBOOK, or in the user's data folder."""
    if arguments.casebook:
        return Path(arguments.casebook).expanduser()
    from casebook.place import default_path

    return default_path()


def existing_casebook(arguments: Namespace) -> Path:
    """Return the casebook for a command that only reads; it must be there, and is never made by looking."""
    path = casebook_path(arguments)
    if not path.exists():
        raise PlatesideError(
            f"there is no casebook {path} yet; `plateside log SHEET` or `plateside` starts one"
        )
    return path


def rule_folders(arguments: Namespace) -> tuple[Path, ...]:
    """Return the folders of a shop's own rules: ``--rules``, else those of $PLATESIDE_RULES."""
    if arguments.rules:
        return (Path(arguments.rules).expanduser(),)
    named = os.environ.get("PLATESIDE_RULES", "")
    return tuple(Path(part).expanduser() for part in named.split(os.pathsep) if part)


def knowledge(arguments: Namespace) -> Knowledge:
    """Return the shipped rules with the shop's own laid over them."""
    from rules.loading import load_knowledge

    return load_knowledge(extra_folders=rule_folders(arguments))
