"""The one line that is typed into. Enter is handled at once, so that what is typed ahead stays in order."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Final, Protocol, cast

from textual.widgets import Input
from textual.widgets.input import Selection

from tui.harmless import UNSEEN
from tui.steady import Steady

if TYPE_CHECKING:
    from textual.events import Key, Paste

LONGEST: Final = 4000
"""Characters that one line takes: a long remark. A longer paste is cut there."""


class TakesLines(Protocol):
    """A page that is told of each line that is entered, and moves its bar or its line."""

    def entered(self, text: str) -> None:
        """Take the text of the line."""

    def action_cursor_up(self) -> None:
        """Go up."""

    def action_cursor_down(self) -> None:
        """Go down."""


class TypedLine(Steady, Input):
    """An input of one line without blinking; tells its page synchronously of Enter."""

    def __init__(self, value: str = "", *, placeholder: str = "") -> None:
        super().__init__(
            value,
            placeholder=placeholder,
            compact=True,
            id="typed",
            select_on_focus=False,
            max_length=LONGEST,
        )
        self.cursor_blink = False

    def on_key(self, event: Key) -> None:
        """Take Enter, up and down at once: as bindings they would wait while letters overtake them."""
        page = cast("TakesLines", self.screen)
        deed = {
            "enter": lambda: page.entered(self.value),
            "up": page.action_cursor_up,
            "down": page.action_cursor_down,
        }.get(event.key)
        if deed is not None:
            event.stop()
            event.prevent_default()
            deed()

    def on_paste(self, event: Paste) -> None:
        """Take a paste as one line without what could steer the terminal, cut to what a line takes."""
        event.stop()
        event.prevent_default()
        start, end = sorted(self.selection)
        room = max(LONGEST - len(self.value) + end - start, 0)
        pasted = UNSEEN.sub(" ", event.text[: 2 * LONGEST].strip("\r\n"))
        self.replace(re.sub(r"\s+", " ", pasted)[:room], start, end)

    def put(self, text: str, *, chosen: bool = False) -> None:
        """Put another text in the line without telling; ``chosen`` text goes with the next letter."""
        text = UNSEEN.sub(" ", text)  # a draft is a file, and any hand may have been at it
        with self.prevent(Input.Changed):
            self.value = text
        self.selection = Selection(0, len(text)) if chosen else Selection.cursor(len(text))
