"""Lines of the ruled page: a word in the margin, a rule, and what belongs to the word."""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING, Final

from textual.content import Content
from textual.widgets import Static

from tui.harmless import harmless, width
from tui.look import FAINT, MARGIN, RULE, STRONG

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

INDENT: Final = MARGIN + 2
"""Cells before the text of a line."""

Part = str | tuple[str, str]


def row(word: str, *parts: Part) -> Content:
    """Return one line: the word in the margin, the rule, then parts as text or (text, style)."""
    clean = [harmless(part) if isinstance(part, str) else (harmless(part[0]), part[1]) for part in parts]
    margin = harmless(word)[: MARGIN - 1].ljust(MARGIN)
    return Content.assemble((margin, STRONG), (RULE + " ", FAINT), *clean)


def rows(word: str, text: str, room: int, *, style: str = "", most: int = 99) -> list[Content]:
    """Return text wrapped beside its word, at most ``most`` lines; a cut text ends in three dots."""
    lines = wrapped(text, room - INDENT, most)
    return [row(word if index == 0 else "", (line, style)) for index, line in enumerate(lines)]


def wrapped(text: str, room: int, most: int = 99) -> list[str]:
    """Return text in lines of at most ``room`` cells, at most ``most`` of them."""
    lines = textwrap.wrap(harmless(text), max(room, 8), break_on_hyphens=False) or [""]
    if len(lines) > most:
        lines = [*lines[: most - 1], cut(lines[most - 1] + " ...", room)]
        if not lines[-1].endswith("..."):
            lines[-1] = cut(lines[-1], room - 3) + "..."
    return lines


def tagged(tag: str, text: str) -> tuple[str, str]:
    """Return margin word and text of a line about a machine; a tag too long for the margin leads the text."""
    if width(tag) < MARGIN:
        return tag or "no tag", text
    return "machine", f"{tag}: {text}"


def blank() -> Content:
    """Return a line with the rule only."""
    return row("")


def cut(text: str, room: int) -> str:
    """Return text that takes at most ``room`` cells."""
    taken = 0
    for place, character in enumerate(text):
        taken += width(character)
        if taken > room:
            return text[:place]
    return text


def pad(text: str, room: int, *, right: bool = False) -> str:
    """Return text in exactly ``room`` cells, cut or filled; a cut text ends in a dot."""
    text = harmless(text)
    if width(text) > room:
        text = cut(text, room - 1) + "."
    fill = " " * (room - width(text))
    return fill + text if right else text + fill


def fill(lines: Sequence[Content], height: int) -> list[Content]:
    """Return exactly ``height`` lines: filled with ruled ones, or cut."""
    return [*lines[:height], *[blank()] * (height - len(lines))]


class Ruled(Static):
    """A block of ruled lines."""

    def __init__(self, *, id: str | None = None, classes: str | None = None) -> None:
        super().__init__("", markup=False, id=id, classes=classes)

    def show(self, lines: Iterable[Content]) -> None:
        """Show these lines and no others."""
        self.update(Content("\n").join(lines))
