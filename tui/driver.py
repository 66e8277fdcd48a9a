"""A terminal driver that sends only the cells that changed.

Textual repaints whole widgets; over a slow line that is ten times what changed.
``CellDriver`` reads what Textual is about to write, keeps a copy of the screen
and passes on the difference. What it cannot read it passes on untouched and
forgets its copy, so that the picture is right in any case.
"""

from __future__ import annotations

import re
import sys
from typing import TYPE_CHECKING, Final

from rich.cells import get_character_cell_size

if TYPE_CHECKING:
    from textual.driver import Driver

TOKEN: Final = re.compile(r"\x1b\[(\d+);(\d+)H|\x1b\[([\d;]*)m|(\r?\n)|([^\x00-\x1f\x7f]+)")
MOVE, STYLE, NEWLINE, TEXT = 2, 3, 4, 5  # the group of TOKEN that matched
SYNC_ON, SYNC_OFF = "\x1b[?2026h", "\x1b[?2026l"
SHORT_GAP: Final = 4  # cells that are cheaper to send again than to jump over

Cell = tuple[str, str]  # a character (empty: right half of a wide one) and its style
Place = tuple[int, int]  # row and column, both from 1


def width(character: str) -> int:
    """Return how many cells a character takes."""
    return 1 if character < "\x7f" else get_character_cell_size(character)


class Cells:
    """What the terminal shows, as far as it is known."""

    def __init__(self) -> None:
        self.shown: dict[Place, Cell] = {}
        self.cursor: Place | None = None
        self.size: tuple[int, int] | None = None

    def forget(self) -> None:
        """Know nothing: the next frame is sent whole."""
        self.shown.clear()
        self.cursor = None

    def difference(self, frame: str, size: tuple[int, int]) -> str | None:
        """Return what must be sent for a frame, or None where the frame cannot be read."""
        if size != self.size:
            self.forget()
            self.size = size
        read = self._read(frame)
        if read is None:
            self.forget()
            return None
        changed, cursor = read
        if not changed and cursor == self.cursor:
            return ""
        self.cursor = cursor
        return self._write(changed, cursor)

    def _read(self, frame: str) -> tuple[list[Place], Place] | None:
        """Take a frame into the copy; return the changed places and where the cursor ends."""
        if not frame.startswith("\x1b[") or TOKEN.match(frame) is None:
            return None
        row = column = at = 0
        style = ""
        changed: set[Place] = set()
        for token in TOKEN.finditer(frame):
            if token.start() != at:
                return None
            at = token.end()
            if token.lastindex == MOVE:
                row, column = int(token[1]), int(token[2])
            elif token.lastindex == STYLE:
                style = "" if token[3] in {"", "0"} else token[3]
            elif token.lastindex == NEWLINE:
                row, column = row + 1, 1
            elif row < 1 or (column := self._put(row, column, token[TEXT], style, changed)) < 1:
                return None
        return (sorted(changed), (row, column)) if at == len(frame) else None

    def _put(self, row: int, column: int, text: str, style: str, changed: set[Place]) -> int:
        """Write text into the copy; return the column after it, 0 where a character has no width."""
        for character in text:
            cells = width(character)
            if cells == 0:
                return 0
            self._set((row, column), (character, style), (row, column), changed)
            if cells == 2:
                self._set((row, column + 1), ("", style), (row, column), changed)
            column += cells
        return column

    def _set(self, place: Place, cell: Cell, owner: Place, changed: set[Place]) -> None:
        """Set one cell; where it differs, the cell that draws it is due."""
        before = self.shown.get(place)
        if before == cell:
            return
        self.shown[place] = cell
        changed.add(owner)
        if before is not None and cell[0]:  # half of a wide character is gone: the other half is unknown
            if before[0] == "":
                self.shown.pop((place[0], place[1] - 1), None)
            elif width(before[0]) == 2:
                self.shown.pop((place[0], place[1] + 1), None)

    def _write(self, changed: list[Place], cursor: Place) -> str:
        """Return the escape codes that bring the changed cells on the screen."""
        out: list[str] = []
        row, column, style = 0, 0, ""
        for place in changed:
            if place != (row, column):
                out.append(self._go(row, column, place, style))
            character, wanted = self.shown[place]
            if wanted != style:
                out.append(f"\x1b[0;{wanted}m" if style and wanted else f"\x1b[{wanted or 0}m")
                style = wanted
            out.append(character)
            row, column = place[0], place[1] + width(character)
        if style:
            out.append("\x1b[0m")
        out.append(f"\x1b[{cursor[0]};{cursor[1]}H")
        return "".join(out)

    def _go(self, row: int, column: int, place: Place, style: str) -> str:
        """Return the shortest way from one place to the next."""
        gap = place[1] - column
        if place[0] != row or gap < 0:
            return f"\x1b[{place[0]};{place[1]}H"
        if gap <= SHORT_GAP:
            between = [self.shown.get((row, at), ("", "?")) for at in range(column, place[1])]
            if all(character and width(character) == 1 and own == style for character, own in between):
                return "".join(character for character, _ in between)
        return f"\x1b[{gap}C"


def cell_driver() -> type[Driver] | None:
    """Return the driver for this platform; None where Textual's own must do."""
    if sys.platform == "win32":
        return None
    from tui.celldriver import CellDriver

    return CellDriver
