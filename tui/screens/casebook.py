"""The first screen: the newest cases, and all others while a search is typed."""

from __future__ import annotations

from datetime import UTC, datetime
from typing import TYPE_CHECKING, Any

from textual import work
from textual.containers import Horizontal
from textual.widgets import Input, OptionList, Static
from textual.widgets.option_list import Option

from tui.begun import waiting
from tui.harmless import harmless
from tui.keys import bindings
from tui.look import FAINT, STRONG, WATCH
from tui.screens.page import Page
from tui.widgets.lines import Lines
from tui.widgets.ruled import INDENT, Ruled, pad, row, rows
from tui.widgets.typed import TypedLine

if TYPE_CHECKING:
    from collections.abc import Coroutine

    from textual.content import Content
    from textual.events import ScreenResume
    from textual.widget import Widget

    from casebook.store import CaseRow

MOST = 200
"""Cases that a list holds; a search finds the others."""
TAG_WIDTH, NUMBER_WIDTH = 17, 8


class CasebookPage(Page[None]):
    """Lists cases, newest first. Letters are keys until a search is typed."""

    KEYS = "casebook"
    BINDINGS = bindings("casebook")

    def __init__(self) -> None:
        super().__init__()
        self.shown: list[CaseRow] = []
        self.is_busy = False
        """Whether a case, or who works here, is being asked for."""
        self.waiting: list[str] = []
        """Drafts that wait, by name."""

    def body(self) -> list[Widget]:
        """Return title, line to search, and list."""
        typed = TypedLine(placeholder="F3 or / to search tag, fault, note, person")
        return [
            Ruled(id="title"),
            Horizontal(Static(row("search"), id="mark", markup=False), typed, id="entry"),
            Lines(),
            Ruled(id="said"),
        ]

    def on_mount(self) -> None:
        """Put the focus on the list."""
        self.set_focus(self.query_one(Lines))

    def on_screen_resume(self, _event: ScreenResume) -> None:
        """List anew: a case may have been added."""
        if self.is_mounted:
            self.show()

    def show(self) -> None:
        """Show title and list."""
        super().show()
        desk = self.plateside.desk
        count = desk.book.store.count()
        title = "Cases, newest first" if count else "No case yet: n opens the first one."
        self.query_one("#title", Ruled).show(rows("casebook", title, self.room, style=STRONG))
        self.list_cases()
        for note in desk.book.notes[:1]:
            self.say(note)

    def list_cases(self) -> None:
        """List drafts and cases."""
        desk, typed = self.plateside.desk, self.query_one(Input).value
        self.shown = desk.rows(typed, limit=MOST)
        self.waiting = [] if typed else waiting(desk.drafts)
        picker = self.query_one(Lines)
        at = picker.highlighted or 0
        now = datetime.now(UTC)
        lines = [self.draft_line(name) for name in self.waiting]
        picker.show([*lines, *(case_line(case, now, self.room) for case in self.shown)], at=at)
        if typed and not self.shown:
            picker.add_option(Option(row("", ("no case holds all of these words", FAINT)), disabled=True))

    def draft_line(self, name: str) -> Content:
        """Return the line of a draft that waits."""
        draft = self.plateside.desk.drafts.load(name)
        tag = harmless(str(draft.get("tag") or "no tag"))
        text = f"{tag}: a new case was begun and not stored. Enter takes it up."
        return row("draft", (pad(text, self.room - INDENT), WATCH))

    def say(self, text: str) -> None:
        """Say something below the list."""
        self.query_one("#said", Ruled).show(rows("note", text, self.room, style=WATCH, most=2))

    # keys

    def action_search(self) -> None:
        """Type a search."""
        self.set_focus(self.query_one(Input))

    def on_input_changed(self, event: Input.Changed) -> None:
        """Search as it is typed; once for all that was typed meanwhile."""
        if event.value != self.query_one(Input).value:
            return
        self.list_cases()
        if self.shown:
            self.query_one(Lines).highlighted = 0

    def entered(self, text: str) -> None:
        """Open what the search found first, or go back to the list."""
        if text.strip() and self.shown:
            self.action_open()
        else:
            self.set_focus(self.query_one(Lines))

    def action_cursor_down(self) -> None:
        """Move the bar down."""
        self.query_one(Lines).action_cursor_down()

    def action_cursor_up(self) -> None:
        """Move the bar up."""
        self.query_one(Lines).action_cursor_up()

    def on_option_list_option_selected(self, _event: OptionList.OptionSelected) -> None:
        """Open on Enter."""
        self.action_open()

    def under_bar(self) -> CaseRow | None:
        """Return the case under the bar."""
        at = self.query_one(Lines).highlighted
        place = -1 if at is None else at - len(self.waiting)
        return self.shown[place] if 0 <= place < len(self.shown) else None

    async def alone(self, deed: Coroutine[Any, Any, object]) -> None:
        """Do one thing after the other: a second press, before the first one's page stands, goes nowhere."""
        if self.is_busy:
            deed.close()
            return
        self.is_busy = True
        try:
            await deed
        finally:
            self.is_busy = False

    @work(group="open")
    async def action_open(self) -> None:
        """Open the case under the bar, or take up the draft."""
        await self.alone(self.open_under_bar())

    async def open_under_bar(self) -> None:
        """Open the case under the bar, or take up the draft."""
        from tui.flow import new_case, open_case

        at, case = self.query_one(Lines).highlighted, self.under_bar()
        if case is not None:
            await open_case(self.plateside, case.id)
        elif at is not None and at < len(self.waiting):
            name = self.waiting[at]
            await new_case(self.plateside, self.plateside.desk.drafts.load(name), name)
            self.list_cases()

    @work(group="open")
    async def action_new_case(self) -> None:
        """Begin a new case."""
        from tui.flow import new_case

        await self.alone(new_case(self.plateside))
        self.list_cases()

    @work(group="open")
    async def action_kit(self) -> None:
        """Ask for name and kit."""
        from tui.flow import ask_person

        await self.alone(ask_person(self.plateside))

    def action_machine(self) -> None:
        """Show the machine of the case under the bar."""
        case = self.under_bar()
        if case is None or not case.tag:
            self.say("The case under the bar names no machine.")
            return
        from tui.screens.machine import MachinePage

        self.app.push_screen(MachinePage(case.tag))


def case_line(case: CaseRow, now: datetime, room: int) -> Content:
    """Return a case as one line: when, machine, what is wrong, what it was, number."""
    from tui.words import plain

    what = plain(case.complaint)
    if case.status == "closed":
        found = " and ".join(plain(part) for part in case.found.split("+"))
        what += f": {found}" + (f" ({case.confirmed})" if case.confirmed not in {"", "believed"} else "")
    text_room = room - INDENT - TAG_WIDTH - NUMBER_WIDTH - 8
    if text_room < 1:  # a narrow page: which machine and what is wrong
        left = max(room - INDENT - TAG_WIDTH, 1)
        style = FAINT if case.status == "closed" else STRONG
        return row(when(case.last_utc, now), pad(case.tag, TAG_WIDTH - 1), " ", (pad(what, left), style))
    status = "open" if case.status != "closed" else "closed"
    return row(
        when(case.last_utc, now),
        pad(case.tag, TAG_WIDTH - 1),
        " ",
        (pad(status, 7), STRONG if status == "open" else FAINT),
        pad(what, text_room),
        " ",
        pad(case.number, NUMBER_WIDTH, right=True),
    )


def when(moment: datetime, now: datetime) -> str:
    """Return a moment in at most eight cells: the time today, else the day, else the month."""
    local, today = moment.astimezone(), now.astimezone()
    if local.date() == today.date():
        return local.strftime("%H:%M")
    return local.strftime("%d %b") if local.year == today.year else local.strftime("%b %Y")
