"""The full-screen interface: one app, a stack of ruled pages, and how it is left."""

from __future__ import annotations

import asyncio
import contextlib
import gc
import os
import signal
from typing import TYPE_CHECKING, Any, Final

from rich.text import Text
from textual.app import App
from textual.events import Event, Key, Paste

from tui import look, mishaps
from tui.desk import Desk
from tui.driver import cell_driver
from tui.screens.casebook import CasebookPage
from tui.screens.page import Page, refusal
from tui.steady import Steady
from tui.typeahead import TypeAhead

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from rich.console import RenderableType
    from textual.filter import LineFilter
    from textual.screen import Screen
    from textual.timer import Timer

TERMINATED: Final = 128 + signal.SIGTERM
KEEP_S: Final = 1.0
"""How long after a key what is typed goes into its draft."""


class PlatesideApp(Steady, App[int]):
    """Casebook, worksheet and the pages around them."""

    CSS_PATH = "app.tcss"
    ENABLE_COMMAND_PALETTE = False
    TITLE = "Plateside"

    def __init__(
        self, casebook: Path, *, rules: Sequence[Path] = (), ascii_only: bool = False, person: str = ""
    ) -> None:
        # ansi_color must be told to the constructor: later is too late for NO_COLOR
        super().__init__(driver_class=cell_driver(), ansi_color=True)
        self.register_theme(look.THEME)
        # told before anything runs: a change of theme later would parse every style twice
        self.set_reactive(App.theme, look.THEME.name)
        self.stylesheet.set_variables(self.get_css_variables())
        self.ascii_only = ascii_only
        self.desk = Desk(casebook, rules=rules, person=person)
        self.braille = bool(os.environ.get("PLATESIDE_BRAILLE")) and not ascii_only
        self._plain = look.AsciiFilter()
        self.ahead = TypeAhead(self)
        self._keeping: Timer | None = None

    def get_line_filters(self) -> Sequence[LineFilter]:
        """Add the ASCII filter where the terminal needs it."""
        filters = super().get_line_filters()
        return [*filters, self._plain] if self.ascii_only else filters

    def get_default_screen(self) -> Screen[Any]:
        """Return the first page: the casebook."""
        return CasebookPage()

    def on_mount(self) -> None:
        """Watch for a dropped line, and load what is heavy after the first page stands."""
        if not self.is_headless:
            self.watch_signals()
        self.call_after_refresh(self.load)

    def watch_signals(self) -> None:
        """Hear what ends the program from outside, as far as this system can tell it."""
        loop = asyncio.get_running_loop()
        with contextlib.suppress(NotImplementedError):  # the loops of Windows hear no signal
            loop.add_signal_handler(signal.SIGTERM, self.on_terminate)
        if hasattr(signal, "SIGHUP"):  # not by the loop, which a line that takes no more output holds up
            signal.signal(signal.SIGHUP, lambda _number, _frame: self.on_hang_up())

    async def on_event(self, event: Event) -> None:
        """Hand events on; a key waits while the page that it is meant for opens."""
        if isinstance(event, Key | Paste):
            if self._keeping is None:
                self._keeping = self.set_timer(KEEP_S, self.keep_soon)
            if not event.is_forwarded and self.ahead.holds(event):
                return
        await super().on_event(event)

    def load(self) -> None:
        """Load rules and engine off the event loop; from now on garbage is collected."""
        if not gc.isenabled():
            gc.freeze()
            gc.enable()
        self.run_worker(self.desk.load, thread=True, exit_on_error=False, group="load")

    def on_unmount(self) -> None:
        """Let the casebook go."""
        self.desk.close()

    def redraw(self) -> None:
        """Send the whole screen again, whatever the terminal shows now."""
        cells = getattr(self._driver, "cells", None)
        if cells is not None:
            cells.forget()
        self.screen.refresh(layout=True)

    # leaving

    def pages(self) -> list[Page[Any]]:
        """Return the open pages, the lowest first."""
        return [screen for screen in self.screen_stack if isinstance(screen, Page)]

    def leave(self) -> None:
        """Leave; ask first where something is typed and not stored."""
        unsaved = [text for page in self.pages() if (text := page.unsaved())]
        if not unsaved:
            self.exit(0)
            return
        from tui.screens.ask import Ask

        def answered(yes: bool | None) -> None:
            why = self.keep_drafts() if yes else ""
            if why:
                self.push_screen(Ask(f"No draft can be kept ({why}). Leave without what is typed?"), given_up)
            elif yes:
                self.exit(0)

        def given_up(yes: bool | None) -> None:
            if yes:
                self.exit(0)

        if not isinstance(self.screen, Ask):
            self.push_screen(Ask(f"Leave? Typed and not stored: {'; '.join(unsaved)}"), answered)

    def keep_drafts(self, *, sync: bool = True) -> str:
        """Put what is typed and not stored on disk; return why that could not be, if so."""
        drafts = [draft for page in self.pages() if (draft := page.draft()) is not None]
        return "; ".join({why for draft in drafts if (why := self.desk.drafts.save(*draft, sync=sync))})

    def keep_soon(self) -> None:
        """Keep the drafts a moment after a key: a program that is killed has no last words."""
        self._keeping = None
        self.keep_drafts(sync=False)

    def on_terminate(self) -> None:
        """End as asked by the system: drafts first, then the terminal as it was."""
        self.keep_drafts()
        self.exit(TERMINATED, return_code=TERMINATED)

    def on_hang_up(self) -> None:
        """Keep the drafts and end at once: the line is gone."""
        with contextlib.suppress(Exception):
            self.keep_drafts()
        os._exit(0)

    async def action_quit(self) -> None:
        """Leave as every other way of leaving does."""
        self.leave()

    def action_help_quit(self) -> None:
        """Leave, for hands that are used to Ctrl+C."""
        self.leave()

    def exit(self, *arguments: Any, **named: Any) -> None:  # noqa: ANN401  (Textual's own)
        """End; from now on Ctrl+C is a signal again, and there is nothing left to interrupt."""
        if not self.is_headless:
            signal.signal(signal.SIGINT, signal.SIG_IGN)
        super().exit(*arguments, **named)

    # mishaps

    def trouble(self, error: BaseException) -> str:
        """Return in one line what went wrong; the details of a mistake of the program go to the log file."""
        from calc.errors import PlatesideError

        return refusal(error) if isinstance(error, PlatesideError) else mishaps.keep(error)

    def _handle_exception(self, error: Exception) -> None:
        """Say what could not be done, such as a full disk; end only on a mistake of the program."""
        from calc.errors import PlatesideError

        inner = getattr(error, "error", error)
        if isinstance(inner, PlatesideError) and self.is_running:
            page = self.pages()[-1]
            page.say(refusal(inner))
        else:
            super()._handle_exception(error)

    def panic(self, *renderables: RenderableType) -> None:
        """End with one line, never with the details on the screen."""
        self._fatal_error()

    def _fatal_error(self) -> None:
        """End with one line; the details go to the log file, what is typed into a draft."""
        with contextlib.suppress(Exception):
            self.keep_drafts()
        error: BaseException = self._exception or RuntimeError("unknown")
        error = getattr(error, "error", error)  # what a worker raised, not that it did
        self._exit_renderables.append(Text(f"plateside: {mishaps.keep(error)}"))
        self._close_messages_no_wait()
