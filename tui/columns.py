"""Plain text in columns and paragraphs, for a terminal of any kind and for files."""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING

from tui.harmless import harmless, width

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

WIDTH = 80


def columns(
    rows: Sequence[Sequence[str]], *, head: Sequence[str] = (), right: Iterable[int] = ()
) -> list[str]:
    """Return rows as aligned lines; columns numbered in ``right`` are aligned at their right edge."""
    cells = [[harmless(cell) for cell in row] for row in ([head, *rows] if head else rows)]
    if not cells:
        return []
    sizes = [max(width(row[index]) for row in cells) for index in range(len(cells[0]))]
    to_right = set(right)
    lines = [
        "  ".join(_pad(cell, sizes[i], i in to_right) for i, cell in enumerate(row)).rstrip() for row in cells
    ]
    if head:
        lines.insert(1, "  ".join("-" * size for size in sizes))
    return lines


def paragraph(text: str, *, first: str = "", rest: str | None = None, width: int = WIDTH) -> list[str]:
    """Return text wrapped into lines, the first after ``first``, the others indented as far."""
    indent = " " * len(first) if rest is None else rest
    wrapped = textwrap.wrap(
        harmless(text), width, initial_indent=first, subsequent_indent=indent, break_on_hyphens=False
    )
    return wrapped or [first.rstrip()]


def _pad(cell: str, size: int, to_right: bool) -> str:
    """Return a cell as wide as its column."""
    fill = " " * (size - width(cell))
    return fill + cell if to_right else cell + fill
