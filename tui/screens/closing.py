"""Closing a case: what it really was, how that is known, and what was done."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from textual import work

from calc.errors import PlatesideError
from tui.keys import bindings
from tui.look import STRONG
from tui.screens.form import FormPage, Heard, Line, hear_choice, one_of
from tui.screens.page import refusal
from tui.screens.sheet import SheetPage
from tui.typed import minutes_of
from tui.widgets.ruled import rows
from tui.words import key_words, plain

if TYPE_CHECKING:
    from collections.abc import Awaitable, Callable, Mapping, Sequence

    from textual.content import Content
    from textual.widget import Widget

    from tui.compose import Visit

CONFIRMED: Final = {
    "believed": "believed only; r repair cured it, t seen in teardown",
    "repair": "confirmed: the repair cured it",
    "teardown": "confirmed: seen when taken apart",
}
RETEST_MOST: Final = 6


class ClosingPage(FormPage[dict[str, str]]):
    """Dismisses with what stands in the lines; ``found`` holds fault ids joined by +."""

    KEYS = "closing"
    BINDINGS = bindings("closing")

    def __init__(self, visit: Visit, found: str, names: Mapping[str, str], retest: Sequence[str]) -> None:
        super().__init__()
        self.visit = visit
        self.found = found
        self.names = names
        self.retest = tuple(key for key in retest if "@" in key)[:RETEST_MOST]
        self.first: Callable[[str], Awaitable[bool]] | None = None
        """Asks for what must come before the reading with a key, such as the isolation record."""
        self.sure_of: dict[str, str] = {}
        """Re-test values that were asked about once, as they were typed."""

    def form_lines(self) -> list[Line]:
        """Return the lines: all but the first may stay blank."""
        return [
            Line(
                "found",
                "found",
                "what it really was; two faults joined by +",
                plain(self.found),
                self.hear_found,
            ),
            Line(
                "confirmed",
                "known by",
                "t teardown, r repair, b believed",
                "believed",
                hear_choice(CONFIRMED),
                12,
            ),
            Line("done", "done", "what was done", width=50),
            Line("parts", "parts", "parts that were fitted", width=40),
            *(self.retest_line(key) for key in self.retest),
            Line("minutes", "minutes", "time spent", hear=hear_minutes),
            Line("note", "remark", "for next shift and shop", width=40),
        ]

    def retest_line(self, key: str) -> Line:
        """Return the line for what a reading shows after the repair."""
        word = "re-test" if key == self.retest[0] else ""
        return Line(key, word, key_words(key, self.visit.knowledge), hear=self.hearer(key))

    def hearer(self, key: str) -> Callable[[str], Heard]:
        """Return how a re-test reading is understood."""
        measure, _, state = key.partition("@")

        def hear(text: str) -> Heard:
            try:
                understood = self.visit.understand(measure, state, text)
            except PlatesideError as error:
                return refusal(error), False
            return understood.echo, True

        return hear

    def head(self) -> list[Content]:
        """Return the title."""
        said = "What was found and done. Closing keeps the odds as they stood."
        return rows("close", said, self.room, style=STRONG)

    def body(self) -> list[Widget]:
        """Return the form; the fault is the one that was just picked, whatever a draft says."""
        widgets = super().body()
        self.texts["found"] = plain(self.found)
        return widgets

    def on_mount(self) -> None:
        """Start where it is said how the fault is known: the fault itself was just picked."""
        self.go_to("confirmed")

    def hear_found(self, text: str) -> Heard:
        """Return the names of the faults, or what is not understood."""
        names = []
        for part in text.split("+"):
            fault = one_of(dict(self.names), part)
            if fault is None:
                return f"which fault is '{part.strip()}'? F9, then F8 picks from the list", False
            names.append(self.names[fault])
        return " and ".join(names), True

    def action_sheet(self) -> None:
        """Show the printed sheet as the case is stored now."""
        self.app.push_screen(SheetPage(self.visit))

    def action_shop_tag(self) -> None:
        """Show the tag for the repair shop."""
        self.app.push_screen(SheetPage(self.visit, shop_tag=True))

    def done(self) -> None:
        """Close where every line is understood, and what must come before the re-test readings is there."""
        values = self.values
        for line in self.table:
            heard, fine = line.hear(values[line.name]) if values[line.name] else self.blank(line)
            if not fine:
                self.go_to(line.name)
                self.say(heard)
                return
        values["found"] = "+".join(
            one_of(dict(self.names), part) or "" for part in values["found"].split("+")
        )
        values["confirmed"] = one_of(CONFIRMED, values["confirmed"]) or "believed"
        self.finish_with(values)

    def blank(self, line: Line) -> Heard:
        """Return whether a line may stay blank."""
        return line.hear("") if line.name in {"found", "confirmed"} else ("", True)

    @work(group="close", exclusive=True)
    async def finish_with(self, values: dict[str, str]) -> None:
        """Ask for what comes before the re-test readings, and about hardly possible ones; then close."""
        for key in (key for key in self.retest if values[key]):
            measure, _, state = key.partition("@")
            asks = self.visit.understand(measure, state, values[key]).asks
            if self.first is not None and not await self.first(key):
                return
            if asks and self.sure_of.get(key) != values[key]:
                self.sure_of[key] = values[key]
                self.go_to(key)
                self.say(f"{asks.rstrip('.?')}. Is it so? F8 again keeps it.")
                return
        self.finish(values)


def hear_minutes(text: str) -> Heard:
    """Understand a number of minutes."""
    try:
        minutes = minutes_of(text)
    except PlatesideError as error:
        return refusal(error), False
    return ("" if minutes is None else f"{minutes:g} minutes"), True
