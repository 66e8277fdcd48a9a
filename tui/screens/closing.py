"""Closing a case: what it really was, how that is known, and what was done."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from tui.keys import bindings
from tui.look import STRONG
from tui.screens.form import FormPage, Heard, Line, hear_choice, one_of
from tui.screens.sheet import SheetPage
from tui.widgets.ruled import rows
from tui.words import plain

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from textual.content import Content

    from tui.compose import Visit

CONFIRMED: Final = {
    "believed": "believed only; r repair cured it, t seen in teardown",
    "repair": "confirmed: the repair cured it",
    "teardown": "confirmed: seen when taken apart",
}
RETEST_MOST: Final = 400


class ClosingPage(FormPage[dict[str, str]]):
    """Dismisses with what stands in the lines; ``found`` holds fault ids joined by +."""

    KEYS = "closing"
    BINDINGS = bindings("closing")

    def __init__(self, visit: Visit, found: str, names: Mapping[str, str], retest: Sequence[str]) -> None:
        super().__init__()
        self.visit = visit
        self.found = found
        self.names = names
        self.retest = retest

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
            Line("minutes", "minutes", "time spent", hear=hear_minutes),
            Line("note", "remark", "for next shift and shop", width=40),
        ]

    def head(self) -> list[Content]:
        """Return the title and what to re-test."""
        lines = rows(
            "close", "What was found and done. Closing keeps the odds as they stood.", self.room, style=STRONG
        )
        if self.retest:
            lines += rows("re-test", "; ".join(self.retest)[:RETEST_MOST], self.room, most=3)
        return lines

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
        """Close where fault, how it is known and minutes are understood."""
        values = self.values
        for name, (heard, fine) in {
            "found": self.hear_found(values["found"]),
            "confirmed": hear_choice(CONFIRMED)(values["confirmed"]),
            "minutes": hear_minutes(values["minutes"]),
        }.items():
            if not fine:
                self.go_to(name)
                self.say(heard)
                return
        values["found"] = "+".join(
            one_of(dict(self.names), part) or "" for part in values["found"].split("+")
        )
        values["confirmed"] = one_of(CONFIRMED, values["confirmed"]) or "believed"
        self.finish(values)


def hear_minutes(text: str) -> Heard:
    """Understand a number of minutes."""
    if not text:
        return "", True
    try:
        minutes = float(text.replace(",", "."))
    except ValueError:
        return "a number of minutes", False
    return (
        (f"{minutes:g} minutes", True)
        if 0 <= minutes < 100000
        else ("a number of minutes, zero or more", False)
    )
