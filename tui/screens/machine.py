"""The machine's page: plate, how it stands, what to expect, what was read over time, its cases."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual import work

from tui.keys import bindings
from tui.look import STRONG
from tui.plate_lines import plate_lines, raw_of, typed_of
from tui.screens.page import TextPage
from tui.screens.worksheet_lines import band_number
from tui.widgets.ruled import INDENT, blank, pad, row, rows, tagged
from tui.words import fault_name, kind_name, measure_name, plain, reading_text

if TYPE_CHECKING:
    from datetime import datetime

    from textual.content import Content

    from calc.sheet import Reading
    from casebook.fold import Case
    from rules.answer import Band
    from tui.compose import Visit

COLUMN = 26
HISTORY = (
    "insulation_resistance",
    "winding_resistance",
    "line_current",
    "vibration_velocity",
    "bearing_temperature",
)
"""Readings that are worth following over the years."""


BAND_ROOM, NAME_ROOM = 30, 56
"""Cells for a band with its temperature, and at most for the name of its reading."""


class MachinePage(TextPage):
    """Reads everything from the casebook; expected values come from the engine, off the event loop."""

    KEYS = "machine"
    BINDINGS = bindings("machine")

    def __init__(self, tag: str, visit: Visit | None = None) -> None:
        super().__init__()
        self.tag = tag
        self.visit = visit
        self.cases: tuple[Case, ...] = ()
        self.expected: tuple[Band, ...] = ()

    def on_mount(self) -> None:
        """Look the machine up, and ask the engine what to expect."""
        book = self.plateside.desk.book
        self.cases = book.machine_cases(self.tag) if self.tag else ()
        if self.visit is None and self.cases:
            self.visit = self.plateside.desk.visit(self.cases[-1].id)
        self.expect()

    @work(thread=True, exit_on_error=False)
    def expect(self) -> None:
        """Work out what the healthy machine should read."""
        if self.visit is not None:
            expected = self.visit.weigh().diagnosis.expected
            self.app.call_from_thread(self.expected_now, expected)

    def expected_now(self, expected: tuple[Band, ...]) -> None:
        """Show what to expect."""
        self.expected = expected
        if self.stands:
            self.show()

    def lines(self) -> list[Content]:
        """Return the whole page."""
        if self.visit is None:
            return rows("machine", f"{self.tag or 'No tag'}: no case is stored.", self.room)
        return [*self.plate(), *self.case_lines(), *self.history(), *self.expectation()]

    def plate(self) -> list[Content]:
        """Return the plate and how the machine stands, in the plate's words, as many abreast as fit."""
        assert self.visit is not None
        machine = self.visit.sheet.machine
        typed = typed_of(raw_of(machine))
        shown = [(line.word, typed[line.field]) for line in plate_lines(machine.kind) if line.field in typed]
        out = rows(*tagged(self.tag, kind_name(machine.kind)), self.room, style=STRONG)
        abreast = max((self.room - INDENT) // COLUMN, 1)
        for start in range(0, len(shown), abreast):
            cells = [f"{word} {plain(text)}" for word, text in shown[start : start + abreast]]
            out.append(
                row("plate" if start == 0 else "", "".join(pad(cell, COLUMN - 1) + " " for cell in cells))
            )
        return out if shown else [*out, row("plate", "no plate is known")]

    def expectation(self) -> list[Content]:
        """Return what the healthy machine should read."""
        out: list[Content] = [blank()]
        name_room = max(self.room - INDENT - BAND_ROOM - 1, BAND_ROOM)
        for place, band in enumerate(self.expected):
            what = f"{measure_name(band.measure)}, {plain(band.state)}"
            text = f"{band_number(band.low)} to {band_number(band.high)} {band.unit}"
            at = f" at {band.temperature_c:g} degC" if band.temperature_c is not None else ""
            said = pad(text + at, BAND_ROOM)
            out.append(row("" if place else "expected", pad(what, min(name_room, NAME_ROOM)), " ", said))
        return (
            out if len(out) > 1 else [*out, row("expected", "worked out now, or the kind has no model yet")]
        )

    def history(self) -> list[Content]:
        """Return the readings that are followed over time, newest last."""
        out: list[Content] = [blank()]
        for measure in HISTORY:
            for case in self.cases:
                for logged in case.readings:
                    if logged.what.reading.measure == measure:
                        text = f"{day(logged.time_utc)}  {followed(logged.what.reading)}"
                        out += rows("history" if len(out) == 1 else "", text, self.room, most=2)
        return out if len(out) > 1 else []

    def case_lines(self) -> list[Content]:
        """Return the machine's cases, newest first."""
        assert self.visit is not None
        out: list[Content] = [blank()]
        for case in reversed(self.cases):
            text = f"{day(case.opened_utc)}  {case.number}  {plain(case.complaint)}"
            if case.closed is not None:
                found = fault_name(case.closed.what.found, self.visit.knowledge)
                text += f": {found} ({case.closed.what.confirmed})"
            out += rows("cases" if case is self.cases[-1] else "", text, self.room, most=2)
        return out

    @work(group="open")
    async def action_edit(self) -> None:
        """Correct the plate; only inside a case, where the log has a place for it."""
        from tui.flow import edit_plate

        if self.is_current and self.visit is not None and await edit_plate(self.plateside, self.visit):
            self.show()
            self.expect()

    def action_curves(self) -> None:
        """Show the curves of this machine."""
        from tui.screens.curves import Curves

        if self.visit is not None:
            self.app.push_screen(Curves(self.visit))


def day(moment: datetime) -> str:
    """Return the day of a moment."""
    return moment.astimezone().strftime("%Y-%m-%d")


def followed(reading: Reading) -> str:
    """Return one reading of a history: measure, state, values, temperature."""
    at = f" at {reading.temperature.text}" if reading.temperature else ""
    return f"{plain(reading.measure)}, {plain(reading.state)}: {reading_text(reading)}{at}"
