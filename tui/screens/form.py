"""A page of lines to type, each with its word in the margin and what was understood beside it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from textual.containers import Horizontal, VerticalScroll
from textual.widgets import Input, Static

from tui.look import FAINT, WATCH
from tui.screens.page import Answer, Page
from tui.widgets.ruled import INDENT, Ruled, cut, row, rows

if TYPE_CHECKING:
    from textual.content import Content
    from textual.events import DescendantFocus
    from textual.widget import Widget

Heard = tuple[str, bool]
"""What was understood, in words, and whether it can be kept."""


@dataclass(frozen=True)
class Line:
    """One line of a form: its name, the word in the margin, what belongs there, and how it is understood."""

    name: str
    word: str
    hint: str = ""
    start: str = ""
    hear: Callable[[str], Heard] = lambda _text: ("", True)
    width: int = 24
    """Cells to type in."""


class LineInput(Input):
    """The typed part of a line."""

    def __init__(self, line: Line, value: str) -> None:
        super().__init__(value, compact=True, id=f"line-{line.name}", select_on_focus=False)
        self.line = line
        self.cursor_blink = False


class FormPage(Page[Answer]):
    """Lines to type; subclasses name them and say what becomes of them."""

    def __init__(self, typed: dict[str, str] | None = None) -> None:
        super().__init__()
        self.typed = typed or {}
        """What stood in the lines before: from a draft, or from the last time."""
        self.said: Heard = ("", True)
        self.last_values: dict[str, str] = dict(self.typed)
        """What stood in the lines last; still there when the page is gone."""

    def form_lines(self) -> list[Line]:
        """Return the lines of the form."""
        raise NotImplementedError

    def head(self) -> list[Content]:
        """Return the lines above the form."""
        return []

    def remarks(self) -> list[Content]:
        """Return the lines below the form, made anew after each change."""
        return []

    def body(self) -> list[Widget]:
        """Return head, lines and remarks."""
        lines = [self.line_row(line) for line in self.form_lines()]
        form = VerticalScroll(*lines, id="form")
        form.can_focus = False
        return [Ruled(id="head"), form, Ruled(id="remarks")]

    def line_row(self, line: Line) -> Widget:
        """Return one line: word, input, what was understood."""
        field = LineInput(line, self.typed.get(line.name, line.start))
        field.styles.width = line.width
        heard = Static("", id=f"heard-{line.name}", markup=False, classes="heard")
        word = Static(row(line.word), markup=False, classes="word")
        return Horizontal(word, field, heard, classes="line")

    def on_mount(self) -> None:
        """Put the focus on the first empty line."""
        fields = self.fields
        empty = [field for field in fields if not field.value]
        (empty or fields)[0].focus()

    @property
    def fields(self) -> list[LineInput]:
        """The typed parts, in order."""
        return list(self.query(LineInput))

    @property
    def values(self) -> dict[str, str]:
        """What stands in the lines now."""
        return {field.line.name: field.value.strip() for field in self.fields}

    def show(self) -> None:
        """Show head, what was understood of each line, and the remarks."""
        super().show()
        if not self.is_mounted:
            return
        self.query_one("#head", Ruled).show(self.head())
        for field in self.fields:
            self.show_heard(field)
        self.show_remarks()

    def show_heard(self, field: LineInput) -> None:
        """Show beside a line what was understood of it, or what belongs there."""
        text, style = field.line.hint, FAINT
        if field.value.strip():
            heard, fine = field.line.hear(field.value.strip())
            text, style = heard, ("" if fine else WATCH)
        room = max(self.room - INDENT - field.line.width - 1, 4)
        self.query_one(f"#heard-{field.line.name}", Static).update(row_text(cut(text, room), style))

    def show_remarks(self) -> None:
        """Show the remarks, the last thing said on top."""
        lines = self.remarks()
        if self.said[0]:
            lines = [*rows("note", self.said[0], self.room, style="" if self.said[1] else WATCH), *lines]
        self.query_one("#remarks", Ruled).show(lines)

    def say(self, text: str, *, fine: bool = False) -> None:
        """Say something below the form."""
        self.said = (text, fine)
        self.show_remarks()

    def on_input_changed(self, event: Input.Changed) -> None:
        """Understand a line while it is typed."""
        if isinstance(event.input, LineInput) and self.is_mounted:
            self.said = ("", True)
            self.last_values = self.values
            self.show_heard(event.input)
            self.show_remarks()

    def on_descendant_focus(self, event: DescendantFocus) -> None:
        """Keep the line that is typed in view."""
        event.widget.scroll_visible(animate=False)

    def on_input_submitted(self, _event: Input.Submitted) -> None:
        """Go to the next line."""
        self.action_next_field()

    def action_next_field(self) -> None:
        """Go to the next line; on the last one, be done."""
        fields = self.fields
        at = self.at()
        if at + 1 < len(fields):
            fields[at + 1].focus()
        else:
            self.action_done()

    def action_cursor_down(self) -> None:
        """Go one line down."""
        fields = self.fields
        fields[min(self.at() + 1, len(fields) - 1)].focus()

    def action_cursor_up(self) -> None:
        """Go one line up."""
        self.fields[max(self.at() - 1, 0)].focus()

    def at(self) -> int:
        """Return the place of the line that has the focus."""
        fields = self.fields
        return fields.index(self.focused) if isinstance(self.focused, LineInput) else 0

    def action_done(self) -> None:
        """Keep what stands here."""
        raise NotImplementedError

    def unsaved(self) -> str:
        """Say that there is something typed."""
        before = {line.name: self.typed.get(line.name, line.start) for line in self.form_lines()}
        return f"what is typed on the page '{self.KEYS.replace('_', ' ')}'" if self.values != before else ""


def row_text(text: str, style: str) -> Content:
    """Return text in one style, as data."""
    from textual.content import Content

    return Content.styled(text, style)


def one_of(choices: dict[str, str], text: str) -> str | None:
    """Return the choice that the text is the beginning of; None where none or several are meant."""
    typed = text.strip().lower().replace("-", "_").replace(" ", "_")
    if typed in choices:
        return typed
    found = [choice for choice in choices if choice.startswith(typed)]
    return found[0] if len(found) == 1 else None


def hear_choice(choices: dict[str, str]) -> Callable[[str], Heard]:
    """Return how a line with fixed choices is understood."""

    def hear(text: str) -> Heard:
        found = one_of(choices, text)
        if found is None:
            return f"one of: {', '.join(choice.replace('_', ' ') for choice in choices)}", False
        return choices[found], True

    return hear


YES_NO = {"yes": "yes", "no": "no"}
