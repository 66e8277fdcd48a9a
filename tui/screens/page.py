"""What every screen shares: the ruled page, the key line at its foot, and the keys that work everywhere."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, ClassVar, TypeVar

from textual.await_complete import AwaitComplete
from textual.content import Content
from textual.screen import Screen
from textual.widgets import Static

from calc.errors import InputError, PlatesideError
from tui.keys import key_line
from tui.look import FAINT, WATCH
from tui.steady import Steady
from tui.widgets.ruled import INDENT, Ruled, fill, row

if TYPE_CHECKING:
    from collections.abc import Callable

    from textual.app import ComposeResult
    from textual.events import Resize
    from textual.widget import Widget

    from tui.application import PlatesideApp

Answer = TypeVar("Answer")

NARROWEST, LOWEST = 40, 12
"""What a terminal must at least have; below that the page says so."""


class Page(Steady, Screen[Answer]):
    """One ruled page: ``KEYS`` names its keys in ``tui.keys``, ``body`` is what stands above the key line."""

    KEYS: ClassVar[str] = "help"
    is_ready = False
    """Whether keys can come: everything stands and has the focus."""
    is_gone = False
    """Whether the page was dismissed."""
    store: Callable[[Answer], object] | None = None
    """What puts the answer on disk; the page stays, with all that is typed, where that cannot be done."""

    def compose(self) -> ComposeResult:
        """Yield the body and the key line."""
        yield from self.body()
        yield Static("", id="keys", markup=False)

    def body(self) -> list[Widget]:
        """Return the widgets above the key line."""
        return []

    @property
    def plateside(self) -> PlatesideApp:
        """The app, as what it is."""
        from tui.application import PlatesideApp

        assert isinstance(self.app, PlatesideApp)
        return self.app

    @property
    def stands(self) -> bool:
        """Whether the page is there with all its parts: what a thread found too late goes nowhere."""
        return self.is_attached and not self.is_gone and bool(self.query("#keys"))

    @property
    def room(self) -> int:
        """Cells in a line."""
        return int(self.app.size.width)

    def on_mount(self) -> None:
        """Let keys come; Textual calls this after the ``on_mount`` of the page's own class."""
        self.is_ready = True

    def on_resize(self, _event: Resize) -> None:
        """Lay the page out for the new size."""
        self.show()

    def show(self) -> None:
        """Show what stands now, at the present size."""
        self.show_keys()

    def show_keys(self) -> None:
        """Show the key line, or what the terminal lacks."""
        size = self.app.size
        if size.width < NARROWEST or size.height < LOWEST:
            text = f"needs {NARROWEST}x{LOWEST}"
        else:
            text = key_line(self.KEYS, self.room - INDENT)
        self.query_one("#keys", Static).update(row("keys", (text, FAINT)))

    def say(self, text: str) -> None:
        """Say something on the key line; pages with a place for it say it there."""
        if self.stands:
            self.query_one("#keys", Static).update(row("note", (text, WATCH)))

    def finish(self, answer: Answer) -> bool:
        """Store the answer, where the page is to do that, and go; else say why not, and stay."""
        if self.store is not None:
            try:
                self.store(answer)
            except PlatesideError as error:
                self.say(refusal(error))
                return False
        self.dismiss(answer)
        return True

    def dismiss(self, result: Answer | None = None) -> AwaitComplete:
        """Go, once: a key that comes when the page is gone already, or under another one, goes nowhere."""
        if not self.is_current or self.is_gone:
            return AwaitComplete()
        self.is_gone = True
        asked = self._result_callbacks[-1] if self._result_callbacks else None
        if asked is not None and asked.future is not None and asked.future.done():
            asked.future = None  # who asked is no longer there
        return super().dismiss(result)

    def unsaved(self) -> str:
        """Return what is typed here and not stored, in words; nothing where there is none."""
        return ""

    def draft(self) -> tuple[str, dict[str, Any]] | None:
        """Return the name and the fields of the draft to keep when the line drops."""
        return None

    # keys that work everywhere

    def action_help(self) -> None:
        """Show the keys of this screen."""
        from tui.screens.help import Help

        self.app.push_screen(Help(self.KEYS))

    def action_back(self) -> None:
        """Go back without an answer."""
        self.dismiss(None)

    def action_redraw(self) -> None:
        """Draw everything again."""
        self.plateside.redraw()

    def action_leave(self) -> None:
        """Leave Plateside, after asking where something is unsaved."""
        self.plateside.leave()


def refusal(error: PlatesideError) -> str:
    """Return what is wrong with something typed and what is allowed, without the name of a file."""
    if not isinstance(error, InputError):
        return str(error)
    said = [
        f"{problem.given}: {problem.allowed}" if problem.given not in {"", "nothing"} else problem.allowed
        for problem in error.problems
    ]
    return "; ".join(dict.fromkeys(said))


class TextPage(Page[None]):
    """A page of lines that may be longer than the screen."""

    offset_now = 0

    def body(self) -> list[Widget]:
        """Return the block of text."""
        return [Ruled(id="text", classes="page")]

    def lines(self) -> list[Content]:
        """Return all lines of the page."""
        raise NotImplementedError

    @property
    def height_now(self) -> int:
        """Lines of text that fit."""
        return max(int(self.app.size.height) - 1, 1)

    def show(self) -> None:
        """Show the lines from the present offset on."""
        super().show()
        lines, height = self.lines(), self.height_now
        self.offset_now = max(0, min(self.offset_now, len(lines) - height))
        shown = fill(lines[self.offset_now :], height)
        left = len(lines) - self.offset_now - height
        if left > 0:
            shown[-1] = row("", (f"{left + 1} more lines: PgDn", FAINT))
        self.query_one("#text", Ruled).show(shown)

    def action_page_down(self) -> None:
        """Go down by a page, less two lines."""
        self.offset_now += max(self.height_now - 2, 1)
        self.show()

    def action_page_up(self) -> None:
        """Go up by a page, less two lines."""
        self.offset_now -= max(self.height_now - 2, 1)
        self.show()
