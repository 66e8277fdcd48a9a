"""A page of lines to type, each with its word in the margin and what was understood beside it.

There is one typed line on the page; it moves from row to row. The other rows are drawn.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Final

from textual.containers import Container
from textual.widgets import Input

from tui.look import FAINT, WATCH
from tui.screens.page import Answer, Page
from tui.widgets.ruled import INDENT, Ruled, cut, pad, row, rows
from tui.widgets.typed import TypedLine

if TYPE_CHECKING:
    from textual.content import Content
    from textual.timer import Timer
    from textual.widget import Widget

REST_S: Final = 0.25
LEAST_HEARD: Final = 14
"""Cells that a narrow page keeps for what was understood of a line."""
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


class FormPage(Page[Answer]):
    """Lines to type; subclasses name them and say what becomes of them."""

    draft_name = ""
    """The draft that keeps what is typed here, where there is to be one."""

    def __init__(self, typed: dict[str, str] | None = None) -> None:
        super().__init__()
        self.typed = typed or {}
        """What stood in the lines before: from a draft, or from the last time."""
        self.table: list[Line] = []
        self.texts: dict[str, str] = {}
        self.at = 0
        self.top = 0
        self.said = ""
        self.below: list[Content] = []
        """What was said last and the remarks, as they were when the typing rested."""
        self.resting: Timer | None = None

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
        self.table = self.form_lines()
        kept = self.plateside.desk.drafts.load(self.draft_name) if self.draft_name else {}
        before = {line.name: self.typed.get(line.name, line.start) for line in self.table}
        self.texts = {name: str(kept.get(name, text)) for name, text in before.items()}
        empty = [place for place, line in enumerate(self.table) if not self.texts[line.name]]
        self.at = empty[0] if empty else 0
        form = Container(Ruled(id="lines"), TypedLine(), id="form")
        return [Ruled(id="head"), form, Ruled(id="remarks")]

    def on_mount(self) -> None:
        """Put the typed line on the first empty row."""
        self.set_focus(self.query_one(TypedLine))
        self.go(self.at)

    # where the typed line stands

    @property
    def line(self) -> Line:
        """The line that is typed now."""
        return self.table[self.at]

    @property
    def texts_now(self) -> dict[str, str]:
        """What stands in the lines, the one that is typed included."""
        typed = next(iter(self.query(TypedLine)), None)
        return self.texts | ({self.line.name: typed.value} if typed is not None and self.table else {})

    @property
    def values(self) -> dict[str, str]:
        """What stands in the lines now."""
        return {name: text.strip() for name, text in self.texts.items()}

    def go(self, place: int) -> None:
        """Put the typed line on another row."""
        self.at = max(0, min(place, len(self.table) - 1))
        typed, text = self.query_one(TypedLine), self.texts[self.line.name]
        typed.put(text, chosen=bool(text))
        self.show_lines()

    def go_to(self, name: str) -> None:
        """Put the typed line on the row of a name."""
        self.go(next(place for place, line in enumerate(self.table) if line.name == name))

    # what is shown

    def show(self) -> None:
        """Show head, rows and remarks."""
        super().show()
        self.query_one("#head", Ruled).show(self.head())
        self.show_all()

    def show_all(self) -> None:
        """Work the remarks out anew, then draw rows and remarks."""
        self.below = self.remark_lines()
        self.show_lines()

    def show_lines(self) -> None:
        """Draw the rows that fit, and move the typed line to its own."""
        height = self.height_of_form()
        self.top = max(min(self.top, self.at), self.at - height + 1, 0)
        shown = self.table[self.top : self.top + height]
        self.query_one("#lines", Ruled).show([self.drawn(line) for line in shown])
        self.show_remarks()
        typed = self.query_one(TypedLine)
        typed.styles.offset = (INDENT, self.at - self.top)
        typed.styles.width = self.width_of(self.line)

    def height_of_form(self) -> int:
        """Return how many rows fit between head and remarks; the remarks have at least one."""
        return max(int(self.app.size.height) - len(self.head()) - max(len(self.below), 1) - 1, 1)

    def drawn(self, line: Line) -> Content:
        """Return one row: word, what stands there, and what was understood of it or belongs there."""
        text = self.texts[line.name]
        heard, style = line.hint, FAINT
        if text.strip():
            heard, fine = line.hear(text.strip())
            style = "" if fine else WATCH
        width = self.width_of(line)
        room = max(self.room - INDENT - width - 1, 0)
        return row(line.word, pad(text, width), " " if room else "", (cut(heard, room), style))

    def width_of(self, line: Line) -> int:
        """Return the cells to type in; some are left for what was understood where that can be."""
        return min(line.width, max(self.room - INDENT - LEAST_HEARD, LEAST_HEARD))

    def remark_lines(self) -> list[Content]:
        """Return what was said last, then the remarks."""
        said = rows("note", self.said, self.room, style=WATCH) if self.said else []
        return [*said, *self.remarks()]

    def show_remarks(self) -> None:
        """Show the remarks; where there are none, how many lines stand below."""
        left = len(self.table) - self.top - self.height_of_form()
        more = [row("", (f"{left} more line{'s' * (left > 1)}: Down", FAINT))] if left > 0 else []
        self.query_one("#remarks", Ruled).show(self.below or more)

    def say(self, text: str) -> None:
        """Say something below the form; it stays until something else is typed."""
        if self.resting is not None:
            self.resting.stop()
        self.said = text
        self.show_all()

    # typing

    def on_input_changed(self, _event: Input.Changed) -> None:
        """Understand a line while it is typed; the remarks follow when the typing rests."""
        if self.query_one(TypedLine).value == self.texts[self.line.name]:
            return
        self.keep_line()
        self.show_lines()
        self.rest_soon()

    def rest_soon(self) -> None:
        """Show the remarks a moment after the last key."""
        if self.resting is not None:
            self.resting.stop()
        self.resting = self.set_timer(REST_S, self.rest)

    def rest(self) -> None:
        """Show the remarks on what is typed."""
        self.said = ""
        self.show_all()

    def entered(self, text: str) -> None:
        """Keep the line and go to the next; stay where it is not understood, and say why."""
        self.texts[self.line.name] = text
        heard, fine = self.line.hear(text.strip()) if text.strip() else ("", True)
        if fine:
            self.rest_soon()
            self.action_next_field()
        else:
            self.say(f"{text.strip()}: {heard}. Down leaves it so.")

    def action_next_field(self) -> None:
        """Go to the next line; on the last one, be done."""
        if self.at + 1 < len(self.table):
            self.go(self.at + 1)
        else:
            self.action_done()

    def keep_line(self) -> None:
        """Take over what stands in the typed line."""
        self.texts[self.line.name] = self.query_one(TypedLine).value

    def action_cursor_down(self) -> None:
        """Go one line down."""
        self.keep_line()
        self.go(self.at + 1)

    def action_cursor_up(self) -> None:
        """Go one line up."""
        self.keep_line()
        self.go(self.at - 1)

    def action_done(self) -> None:
        """Keep what stands here."""
        self.keep_line()
        self.done()

    def done(self) -> None:
        """Answer with what stands here, or say what is missing."""
        raise NotImplementedError

    def finish(self, answer: Answer) -> bool:
        """Store the answer and go; the draft has done its work then."""
        done = super().finish(answer)
        if done and self.draft_name:
            self.plateside.desk.drafts.drop(self.draft_name)
        return done

    def action_back(self) -> None:
        """Go back without an answer; what is typed can still be asked for, a draft only where one is kept."""
        self.keep_line()
        if self.draft_name:
            self.plateside.desk.drafts.drop(self.draft_name)
        super().action_back()

    def draft(self) -> tuple[str, dict[str, Any]] | None:
        """Keep what is typed, where the page has a draft and something stands there that did not at first."""
        now = self.texts_now
        before = {line.name: self.typed.get(line.name, line.start) for line in self.table}
        return (self.draft_name, now if now != before else {}) if self.draft_name and self.table else None

    def unsaved(self) -> str:
        """Say that there is something typed."""
        before = {line.name: self.typed.get(line.name, line.start) for line in self.table}
        return f"what is typed on the page '{self.KEYS.replace('_', ' ')}'" if self.texts != before else ""


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
