"""Pick one line of a list; typing narrows it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from textual.containers import Horizontal
from textual.widgets import Input, Static
from textual.widgets.option_list import Option

from tui.keys import bindings
from tui.look import FAINT, PLAIN
from tui.screens.page import Page
from tui.searching import nearly_begins, words_of
from tui.widgets.lines import Lines
from tui.widgets.ruled import INDENT, Ruled, pad, row, rows
from tui.widgets.typed import TypedLine

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from textual.content import Content
    from textual.widget import Widget


Draft = tuple[str, dict[str, Any]]


@dataclass(frozen=True)
class Choice:
    """One line to pick: what comes back, what is shown, and words that find it.

    ``also`` are other words for it, not shown. Only a line that has such forgives a slip of the keys:
    a tag that is nearly another one is another machine.
    """

    key: str
    text: str
    word: str = ""
    more: str = ""
    style: str = PLAIN
    also: str = ""

    def matches(self, words: Sequence[str]) -> bool:
        """Whether every typed word begins a word of the line."""
        parts = f"{self.text} {self.more} {self.key}".lower().replace("_", " ").replace("-", " ").split()
        parts += words_of(self.also)
        whole = f"{self.text} {self.key}".lower()
        return all(
            word in whole or word == self.word.lower() or any(part.startswith(word) for part in parts)
            for word in words
        )

    def nearly_matches(self, words: Sequence[str]) -> bool:
        """Whether every typed word, a slip of the keys forgiven, begins a word of a line with other words."""
        return bool(self.also) and nearly_begins(words, f"{self.text} {self.key} {self.also}")

    def rank(self, words: Sequence[str]) -> int:
        """Return how well typed words fit: 0 the line begins so, 1 its words do, 2 it holds them, 3 else."""
        parts = f"{self.text} {self.key}".lower().replace("_", " ").replace("-", " ").split()
        if " ".join(parts).startswith(" ".join(words)):
            return 0
        if all(any(part.startswith(word) for part in parts) for word in words):
            return 1
        return 2 if all(word in " ".join(parts) for word in words) else 3


class Pick(Page[str]):
    """Dismisses with the key of the picked line, with None on back.

    ``fresh`` makes a line out of what was typed, such as a machine that is not known yet. ``at`` puts
    the bar on a line. Where ``asks`` says something, the bar stands nowhere until something is typed
    or it is moved, and Enter says that. ``draft`` gives what to keep when the line drops here.
    """

    KEYS = "pick"
    BINDINGS = bindings("pick")

    def __init__(
        self,
        word: str,
        title: str,
        choices: Sequence[Choice],
        *,
        typed: str = "",
        fresh: Callable[[str], Choice | None] = lambda _text: None,
        at: str = "",
        asks: str = "",
        draft: Callable[[], Draft | None] = lambda: None,
    ) -> None:
        super().__init__()
        self.word, self.title_text, self.choices = word, title, list(choices)
        self.typed, self.fresh = typed, fresh
        self.start_at, self.asks, self.begun = at, asks, draft
        self.shown: list[Choice] = []
        self.narrowed_by = ""

    def body(self) -> list[Widget]:
        """Return title, line to type, and list."""
        return [
            Ruled(id="title"),
            Horizontal(Static("", id="mark", markup=False), TypedLine(self.typed), id="entry"),
            Lines(),
        ]

    def on_mount(self) -> None:
        """Put the focus on the line to type."""
        self.query_one(Lines).can_focus = False
        self.set_focus(self.query_one(Input))

    def show(self) -> None:
        """Show the title, and the lines that match what is typed."""
        super().show()
        self.query_one("#title", Ruled).show(rows(self.word, self.title_text, self.room, style="bold"))
        self.query_one("#mark", Static).update(row("type"))
        self.narrow(self.query_one(Input).value)

    def on_input_changed(self, event: Input.Changed) -> None:
        """Narrow the list as it is typed; once for all that was typed meanwhile."""
        if event.value == self.query_one(Input).value:
            self.narrow(event.value)

    def narrow(self, text: str) -> None:
        """Keep the lines that match; the best first, a fresh one last."""
        self.narrowed_by = text
        words = text.lower().replace("-", " ").split()
        self.shown = [choice for choice in self.choices if choice.matches(words)]
        self.shown = self.shown or [choice for choice in self.choices if choice.nearly_matches(words)]
        self.shown.sort(key=lambda choice: choice.rank(words))
        made = self.fresh(text.strip())
        if made is not None and all(choice.key != made.key for choice in self.shown):
            self.shown.append(made)
        picker = self.query_one(Lines)
        picker.show([self.line(choice) for choice in self.shown], at=self.bar(text))
        if not self.shown and text:
            picker.add_option(Option(row("", ("nothing matches", FAINT)), disabled=True))

    def bar(self, text: str) -> int | None:
        """Return where the bar stands first: on the line asked for, on the first, or nowhere."""
        places = [place for place, choice in enumerate(self.shown) if choice.key == self.start_at]
        if places and not text:
            return places[0]
        return None if self.asks and not text.strip() else 0

    def line(self, choice: Choice) -> Content:
        """Return a choice as one ruled line."""
        room = self.room - INDENT
        text = f"{choice.text}   {choice.more}" if choice.more else choice.text
        return row(choice.word, (pad(text, room), choice.style))

    def action_cursor_down(self) -> None:
        """Move the bar down."""
        self.query_one(Lines).action_cursor_down()

    def action_cursor_up(self) -> None:
        """Move the bar up."""
        self.query_one(Lines).action_cursor_up()

    def entered(self, text: str) -> None:
        """Take the line under the bar, as the text last typed has it."""
        if text != self.narrowed_by:
            self.narrow(text)
        self.action_choose()

    def action_choose(self) -> None:
        """Answer with the line under the bar."""
        at = self.query_one(Lines).highlighted
        if at is not None and at < len(self.shown):
            self.dismiss(self.shown[at].key)
        elif self.asks:
            self.say(self.asks)

    def draft(self) -> Draft | None:
        """Keep what was told before this question."""
        return self.begun()

    def unsaved(self) -> str:
        """Say that a case was begun and not stored."""
        begun = self.begun()
        return f"the new case of {begun[1].get('tag') or 'a machine without a tag'}" if begun else ""
