"""The one line that is typed into. Enter is handled at once, so that what is typed ahead stays in order."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, Protocol, cast

from textual.widgets import Input
from textual.widgets.input import Selection

if TYPE_CHECKING:
    from textual.screen import Screen


class TakesLines(Protocol):
    """A page that is told of each line that is entered."""

    def entered(self, text: str) -> None:
        """Take the text of the line."""


class TypedLine(Input):
    """An input of one line without blinking; tells its page synchronously of Enter."""

    def __init__(self, value: str = "", *, placeholder: str = "", id: str = "typed") -> None:
        super().__init__(value, placeholder=placeholder, compact=True, id=id, select_on_focus=False)
        self.cursor_blink = False

    async def action_submit(self) -> None:
        """Hand the text to the page before the next key is read."""
        page: Screen[Any] = self.screen
        cast("TakesLines", page).entered(self.value)

    def put(self, text: str, *, chosen: bool = False) -> None:
        """Put another text in the line without telling; ``chosen`` text goes with the next letter."""
        with self.prevent(Input.Changed):
            self.value = text
        self.selection = Selection(0, len(text)) if chosen else Selection.cursor(len(text))
