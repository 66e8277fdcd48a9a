"""How Plateside looks: a ruled page with a margin of words, in the terminal's own colours.

A colour never stands alone: a word says the same. The page reads in monochrome
and, where the terminal is not UTF-8, in plain ASCII.
"""

from __future__ import annotations

import os
import sys
from typing import TYPE_CHECKING, Final

from rich.cells import cell_len
from rich.segment import Segment
from textual.filter import LineFilter
from textual.theme import Theme

from tui.output import screen_stream

if TYPE_CHECKING:
    from collections.abc import Mapping

    from textual.color import Color

MARGIN: Final = 9
"""Width of the margin, where the words that name a line stand."""
RULE: Final = "│"

# Styles by meaning. ANSI names follow the palette of the terminal, on light and dark grounds alike.
STOP: Final = "bold ansi_red"
WATCH: Final = "bold ansi_magenta"
PLAIN: Final = ""
FAINT: Final = "dim"
STRONG: Final = "bold"

VERDICT_STYLE: Final = {"stop": STOP, "watch": WATCH, "remark": STRONG}
VERDICT_WORD: Final = {"stop": "STOP", "watch": "WATCH", "remark": "REMARK"}

_GROUND: Final = "ansi_default"
THEME: Final = Theme(
    name="plateside",
    ansi=True,
    primary=_GROUND,
    secondary=_GROUND,
    warning="ansi_magenta",
    error="ansi_red",
    success=_GROUND,
    accent=_GROUND,
    foreground=_GROUND,
    background=_GROUND,
    surface=_GROUND,
    panel=_GROUND,
    boost=_GROUND,
    variables={
        "ansi-background": _GROUND,
        "ansi-foreground": _GROUND,
        "block-cursor-foreground": _GROUND,
        "block-cursor-background": _GROUND,
        "block-cursor-text-style": "reverse",
        "block-cursor-blurred-foreground": _GROUND,
        "block-cursor-blurred-background": _GROUND,
        "block-cursor-blurred-text-style": "bold",
        "block-hover-background": _GROUND,
        "border": _GROUND,
        "border-blurred": _GROUND,
        "input-cursor-background": _GROUND,
        "input-cursor-foreground": _GROUND,
        "input-cursor-text-style": "reverse",
        "input-selection-background": _GROUND,
        "input-selection-foreground": _GROUND,
        "scrollbar": _GROUND,
        "scrollbar-hover": _GROUND,
        "scrollbar-active": _GROUND,
        "scrollbar-background": _GROUND,
        "scrollbar-background-hover": _GROUND,
        "scrollbar-background-active": _GROUND,
        "scrollbar-corner-color": _GROUND,
    },
)

_ASCII_GROUPS: Final = (
    ("━─═╌┄╸╺╴╶▔▁▂▃▄▅▆▀", "-"),
    ("│┃║▏▎▍▌▋▊▉▐", "|"),
    ("┌┐└┘├┤┬┴┼╭╮╰╯", "+"),
    ("█▓▒░▇", "#"),
    ("•·×", "*"),
    ("…", "."),
    ("’‘", "'"),
    ("“”", '"'),
    ("–—−", "-"),
    ("µμ", "u"),
    ("²", "2"),
    ("³", "3"),
    ("ΩΩω", "O"),
    ("°", " "),
    ("±", "~"),
    ("≤", "<"),
    ("≥", ">"),
    ("√", "v"),
    ("φ", "f"),
    ("η", "n"),
)
ASCII: Final = {ord(character): plain for group, plain in _ASCII_GROUPS for character in group}


def to_ascii(text: str) -> str:
    """Return text with every character that is not ASCII replaced by as many ASCII cells."""
    text = text.translate(ASCII)
    if text.isascii():
        return text
    return "".join(character if character.isascii() else "?" * cell_len(character) for character in text)


class AsciiFilter(LineFilter):
    """Replace what a terminal without UTF-8 cannot show, cell by cell."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:
        """Return the same line in ASCII; the widths stay."""
        return [
            segment
            if segment.control or segment.text.isascii()
            else Segment(to_ascii(segment.text), segment.style, segment.control)
            for segment in segments
        ]


_OLD_TERMINALS: Final = {"dumb", "vt52", "vt100", "vt102", "vt220", "ansi"}


def needs_ascii(environ: Mapping[str, str] = os.environ) -> bool:
    """Whether the terminal must be taken to show ASCII only: its stream, or a locale that says so."""
    encoding = (getattr(screen_stream(), "encoding", "") or "").lower().replace("-", "")
    if sys.platform == "win32":  # neither TERM nor a locale says anything of a console there
        return encoding != "utf8"
    if encoding != "utf8" or environ.get("TERM", "dumb") in _OLD_TERMINALS:
        return True
    chosen = environ.get("LC_ALL") or environ.get("LC_CTYPE") or ""
    if chosen == "C.UTF-8":  # Python sets this by itself where the locale is C: ask the one before
        chosen = environ.get("LC_ALL") or ""
    locale = chosen or environ.get("LANG") or "C"
    return locale in {"C", "POSIX"}
