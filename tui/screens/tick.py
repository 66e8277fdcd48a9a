"""The tick list: what was seen, heard or smelt."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual import work
from textual.widgets import OptionList

from tui.keys import bindings
from tui.look import STRONG
from tui.screens.page import Page
from tui.widgets.lines import Lines
from tui.widgets.ruled import INDENT, Ruled, pad, row, rows

if TYPE_CHECKING:
    from collections.abc import Awaitable, Callable, Collection, Sequence

    from textual.content import Content
    from textual.widget import Widget

WORDS = {True: "yes", False: "no", None: ""}
AFTER = {None: True, True: False, False: None}


class Tick(Page[dict[str, bool]]):
    """Dismisses with the answers that are new or changed."""

    KEYS = "tick"
    BINDINGS = bindings("tick")

    def __init__(self, questions: Sequence[tuple[str, str]], answered: dict[str, bool]) -> None:
        super().__init__()
        self.questions = questions
        self.before = dict(answered)
        self.answers: dict[str, bool | None] = {name: answered.get(name) for name, _ in questions}
        self.first: Callable[[Collection[str]], Awaitable[bool]] | None = None
        """Asks for what must come before answers are stored, such as the isolation record."""

    def body(self) -> list[Widget]:
        """Return title and list."""
        return [Ruled(id="title"), Lines()]

    def on_mount(self) -> None:
        """Put the focus on the list."""
        self.set_focus(self.query_one(Lines))

    def show(self) -> None:
        """Show every question with its answer."""
        super().show()
        title = "What was seen, heard or smelt? y, n, Space; a blank line was not looked at."
        self.query_one("#title", Ruled).show(rows("seen", title, self.room, style=STRONG))
        picker = self.query_one(Lines)
        at = picker.highlighted or 0
        picker.show([self.line(name, text) for name, text in self.questions], at=at)

    def line(self, name: str, text: str) -> Content:
        """Return one question as a ruled line."""
        return row(WORDS[self.answers[name]], pad(text, self.room - INDENT))

    def action_answer(self, seen: bool) -> None:
        """Answer the question under the bar and go on."""
        self.put(seen)
        self.action_cursor_down()

    def action_next_answer(self) -> None:
        """Change the answer under the bar."""
        at = self.query_one(Lines).highlighted
        if at is not None:
            answer = AFTER[self.answers[self.questions[at][0]]]
            self.put(answer if answer is not None or self.questions[at][0] not in self.before else True)

    def put(self, answer: bool | None) -> None:
        """Set the answer under the bar."""
        picker = self.query_one(Lines)
        if picker.highlighted is not None:
            name, text = self.questions[picker.highlighted]
            self.answers[name] = answer
            picker.replace_option_prompt_at_index(picker.highlighted, self.line(name, text))

    def action_cursor_down(self) -> None:
        """Move the bar down, not past the end."""
        picker = self.query_one(Lines)
        if picker.highlighted is not None:
            picker.highlighted = min(picker.highlighted + 1, len(self.questions) - 1)

    def action_cursor_up(self) -> None:
        """Move the bar up."""
        picker = self.query_one(Lines)
        if picker.highlighted is not None:
            picker.highlighted = max(picker.highlighted - 1, 0)

    def on_option_list_option_selected(self, _event: OptionList.OptionSelected) -> None:
        """Store on Enter."""
        self.action_done()

    def changed(self) -> dict[str, bool]:
        """Return the answers that are new or changed."""
        return {
            name: seen
            for name, seen in self.answers.items()
            if seen is not None and self.before.get(name) is not seen
        }

    @work(group="tick", exclusive=True)
    async def action_done(self) -> None:
        """Answer with what changed, once what must come before it is there."""
        new = self.changed()
        if self.first is None or await self.first(new):
            self.finish(new)

    def unsaved(self) -> str:
        """Say that answers are ticked and not stored."""
        return "ticked answers" if self.changed() else ""
