"""The keys of a screen, from the one table of keys."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tui.keys import bindings, keys_of
from tui.screens.page import TextPage
from tui.widgets.ruled import INDENT, blank, pad, row, rows, wrapped

if TYPE_CHECKING:
    from textual.content import Content

KEY_WIDTH = 17

TYPING = (
    "15.2 15.9 14.8 or 15.2/15.9/14.8: the three values in the order that is asked for",
    "420m, 1.2k, 3M: thousandths, thousands, millions of the unit that is shown; or write the unit",
    ">5G: beyond the meter's range    OL or open: open circuit    -: this one was not read",
    "y or n: the answer to a question; on an empty line Enter does what stands beside 'next'",
)
SCALE = (
    "---(=====)---  the brackets hold nine in ten healthy machines of this plate",
    "o one value; 1 2 3 the three; * where they coincide; left of the brackets is low, right is high",
)


class Help(TextPage):
    """Shows the keys of one screen; any page can call it."""

    KEYS = "help"
    BINDINGS = bindings("help")

    def __init__(self, screen: str) -> None:
        super().__init__()
        self.about = screen

    def lines(self) -> list[Content]:
        """Return one line per key, then how values are typed and how the scale is read."""
        out = rows("help", "Keys of this screen. A letter works while nothing is being typed.", self.room)
        for key in keys_of(self.about):
            first, *rest = wrapped(key.help, self.room - INDENT - KEY_WIDTH)
            out.append(row("", (pad(key.shown, KEY_WIDTH), "bold"), first))
            out += [row("", " " * KEY_WIDTH, line) for line in rest]
        if self.about == "worksheet":
            out.append(blank())
            out += [
                line
                for text in TYPING
                for line in rows("typing" if text is TYPING[0] else "", text, self.room)
            ]
            out += [
                line for text in SCALE for line in rows("scale" if text is SCALE[0] else "", text, self.room)
            ]
        return out
