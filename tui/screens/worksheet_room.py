"""How the blocks of the worksheet share the lines of a page."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from collections.abc import Sequence

    from textual.content import Content

KEPT: Final = ("next", "first", "leads")
"""Rows of the next reading that are rather shown in part than not at all."""
Share = tuple["Sequence[Content]", int, int]
"""Lines of a block, how many it should have at least, and how many on the smallest page."""


def share_out(blocks: Sequence[Share], height: int) -> list[list[Content]]:
    """Give each block its lines: first everybody's least, then one by one until the page is full."""
    given = [min(least, len(lines)) for lines, least, _ in blocks]
    if sum(given) > height:
        given = [min(smallest, len(lines)) for lines, _, smallest in blocks]
    left = height - sum(given)
    while left > 0 and any(had < len(lines) for had, (lines, *_) in zip(given, blocks, strict=True)):
        for index, (lines, *_) in enumerate(blocks):
            if left > 0 and given[index] < len(lines):
                given[index] += 1
                left -= 1
    return [list(lines[:had]) for had, (lines, *_) in zip(given, blocks, strict=True)]


def whole_rows(lines: Sequence[Content], shown: Sequence[Content]) -> list[Content]:
    """Return what is shown of a block without a sentence that is cut off at its end; never without leads."""
    out = list(shown)
    while len(out) < len(lines) and lines[len(out)].plain.startswith(" ") and len(out) > 1:
        out.pop()
    return list(shown) if len(out) < len(lines) and lines[len(out)].plain.startswith(KEPT) else out
