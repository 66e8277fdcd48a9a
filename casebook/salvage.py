"""A damaged casebook: what of it can be read is saved into a new one."""

from __future__ import annotations

from pathlib import Path

from casebook.book import open_casebook
from casebook.errors import CasebookError
from casebook.foreign import read_items
from casebook.merge import MergeReport, merge_items


def salvage(path: Path, target: Path) -> MergeReport:
    """Save every entry that can be read into a new casebook; the damaged file is not touched."""
    if target.exists():
        raise CasebookError(f"{target} exists", advice="Name a new file; nothing is written over")
    items = read_items(path)
    with open_casebook(target) as book:
        return merge_items(book, items, source=path.name)
