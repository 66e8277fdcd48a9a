"""One question with yes or no."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tui.keys import bindings
from tui.screens.page import Page
from tui.widgets.ruled import Ruled, blank, fill, rows

if TYPE_CHECKING:
    from textual.widget import Widget


class Ask(Page[bool]):
    """Dismisses with True for yes, False for no, None for back."""

    KEYS = "ask"
    BINDINGS = bindings("ask")

    def __init__(self, question: str, *more: str) -> None:
        super().__init__()
        self.question = question
        self.more = more

    def body(self) -> list[Widget]:
        """Return the question's block."""
        return [Ruled(id="text", classes="page")]

    def show(self) -> None:
        """Show the question."""
        super().show()
        lines = [blank(), *rows("ask", self.question, self.room, style="bold")]
        for text in self.more:
            lines += rows("", text, self.room)
        self.query_one("#text", Ruled).show(fill(lines, self.app.size.height - 1))

    def action_yes(self) -> None:
        """Answer yes."""
        self.dismiss(True)

    def action_no(self) -> None:
        """Answer no."""
        self.dismiss(False)
