"""Keeps what is typed ahead for the page that it is meant for.

On a slow line keys arrive in bursts: "n", a tag and Enter at once, before the page that
asks for the tag is there. A key that may open or leave a page holds the keys behind it
back until the page on top is ready; then they go on in their order.
"""

from __future__ import annotations

from collections import deque
from functools import cache
from typing import TYPE_CHECKING, Final

from textual.events import Key
from textual.widgets import Input

from tui.keys import keys_of

if TYPE_CHECKING:
    from textual.events import Paste

    from tui.application import PlatesideApp

QUIET_S: Final = 0.03
"""How long a page must be left alone before it counts as the one that stays."""
PATIENCE: Final = 100
"""How many quiet times are waited for a page that does not get ready."""
EDITING: Final = frozenset(
    {
        "backspace",
        "delete",
        "left",
        "right",
        "home",
        "end",
        "up",
        "down",
        "pageup",
        "pagedown",
        "space",
        "tab",
    }
)


@cache
def deciding(screen: str) -> frozenset[str]:
    """Return the keys of a screen that do something: what comes behind one may be meant for another page."""
    named = {name for key in keys_of(screen) if key.action != "redraw" for name in key.keys.split(",")}
    return frozenset({"enter", "ctrl+c", *named} - EDITING)


class TypeAhead:
    """Stands between the keyboard and the pages."""

    def __init__(self, app: PlatesideApp) -> None:
        self.app = app
        self.held: deque[Key | Paste] = deque()
        self.is_holding = False
        self.waited = 0

    def holds(self, event: Key | Paste) -> bool:
        """Hold a key or a paste back where an earlier key is at work; else note whether this one will be."""
        if self.is_holding:
            self.held.append(event)
            return True
        if isinstance(event, Key) and self.is_decisive(event):
            self.is_holding, self.waited = True, 0
            self.app.set_timer(QUIET_S, self.go_on)
        return False

    def is_decisive(self, event: Key) -> bool:
        """Whether a key may open or leave a page."""
        types = isinstance(self.app.focused, Input)
        if event.key in EDITING or (types and event.is_printable):
            return False
        pages = self.app.pages()
        return not pages or event.key in deciding(pages[-1].KEYS)

    async def go_on(self) -> None:
        """Hand on what is held, up to the next decisive key, once the page on top is ready."""
        if not self.app.pages():  # the last page is gone: the program is ending
            self.held.clear()
            return
        self.waited += 1
        if self.waited < PATIENCE and any(not page.is_ready for page in self.app.pages()[-1:]):
            self.app.set_timer(QUIET_S, self.go_on)
            return
        self.is_holding = False
        while self.held and not self.is_holding:
            await self.app.on_event(self.held.popleft())
