"""Pictures: curves of the machine where the model draws them, and readings over time."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual import work

from tui.curve_pictures import history_pictures, machine_pictures
from tui.keys import bindings
from tui.look import FAINT, STRONG
from tui.plot import plot
from tui.screens.page import TextPage
from tui.widgets.ruled import INDENT, pad, row, rows

if TYPE_CHECKING:
    from textual.content import Content

    from casebook.fold import Case
    from tui.compose import Visit
    from tui.curve_pictures import Picture


class Curves(TextPage):
    """One picture at a time; left and right go through them."""

    KEYS = "curves"
    BINDINGS = bindings("curves")

    def __init__(self, visit: Visit) -> None:
        super().__init__()
        self.visit = visit
        self.pictures: list[Picture] = []
        self.at = 0
        self.is_drawing = True

    def on_mount(self) -> None:
        """Draw off the event loop."""
        tag = self.visit.sheet.machine.tag
        cases = self.plateside.desk.book.machine_cases(tag) if tag else (self.visit.case,)
        self.draw(cases)

    @work(thread=True, exit_on_error=False)
    def draw(self, cases: tuple[Case, ...]) -> None:
        """Work the pictures out."""
        pictures = [*machine_pictures(self.visit.sheet), *history_pictures(self.visit, cases)]
        self.app.call_from_thread(self.drawn, pictures)

    def drawn(self, pictures: list[Picture]) -> None:
        """Show the first picture."""
        self.pictures, self.is_drawing = pictures, False
        if self.stands:
            self.show()

    def lines(self) -> list[Content]:
        """Return the picture that is chosen."""
        if not self.pictures:
            text = (
                "drawing ..."
                if self.is_drawing
                else "No model of this kind draws a curve, and nothing was read twice."
            )
            return rows("curves", text, self.room)
        picture = self.pictures[self.at]
        place = f"{self.at + 1} of {len(self.pictures)}"
        room = self.room - INDENT
        out = [row("curve", (pad(picture.title, room - len(place)), STRONG), (place, FAINT))]
        drawn = plot(
            picture.curves, bands=picture.bands, width=room, height=self.height_now - 1,
            x_label=picture.x_label, y_label=picture.y_label, braille=self.plateside.braille,
        )  # fmt: skip
        return out + [row("", line) for line in drawn]

    def action_next_curve(self) -> None:
        """Show the next picture."""
        self.go(1)

    def action_last_curve(self) -> None:
        """Show the picture before."""
        self.go(-1)

    def go(self, step: int) -> None:
        """Move along the pictures."""
        if self.pictures:
            self.at = (self.at + step) % len(self.pictures)
            self.show()
