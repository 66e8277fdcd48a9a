"""Pictures: curves of the machine where the model draws them, and readings over time."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from textual import work

from tui.keys import bindings
from tui.look import FAINT, STRONG
from tui.plot import Band, Curve, plot
from tui.screens.page import TextPage
from tui.widgets.ruled import INDENT, pad, row, rows
from tui.words import measure_name, plain

if TYPE_CHECKING:
    from textual.content import Content

    from calc.induction_3ph.model import InductionTwin
    from calc.sheet import CaseSheet, Reading
    from casebook.fold import Case
    from tui.compose import Visit

DAYS = 86400.0


@dataclass(frozen=True)
class Picture:
    """One picture: its title, what is drawn, and the words of its axes."""

    title: str
    curves: tuple[Curve, ...]
    bands: tuple[Band, ...] = ()
    x_label: str = ""
    y_label: str = ""


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
        pictures = [*machine_pictures(self.visit), *history_pictures(cases)]
        self.app.call_from_thread(self.drawn, pictures)

    def drawn(self, pictures: list[Picture]) -> None:
        """Show the first picture."""
        self.pictures, self.is_drawing = pictures, False
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


def history_pictures(cases: tuple[Case, ...]) -> list[Picture]:
    """Return one picture per measure that was read at least twice, over the days since the first."""
    found: dict[str, list[tuple[float, Reading]]] = {}
    for case in cases:
        for logged in case.readings:
            found.setdefault(logged.what.reading.key, []).append(
                (logged.time_utc.timestamp(), logged.what.reading)
            )
    return [_over_time(points) for points in found.values() if len(points) > 1]


def _over_time(points: list[tuple[float, Reading]]) -> Picture:
    """Return the picture of one measure over time; an open circuit or a missing value is left out."""
    points = sorted(points, key=lambda point: point[0])
    first = points[-1][1]
    days = [(moment - points[-1][0]) / DAYS for moment, _ in points]
    many = max(len(reading.numbers) for _, reading in points)
    unit = first.values[0].unit
    curves = []
    for place in range(many):
        numbers = [
            reading.numbers[place] if place < len(reading.numbers) else math.nan for _, reading in points
        ]
        mark = str(place + 1) if many > 1 else "o"
        curves.append(Curve(x=days, y=numbers, mark=mark, joined=False))
    return Picture(
        title=f"{measure_name(first.measure)}, {plain(first.state)}, over time",
        curves=tuple(curves),
        x_label="days before the last reading",
        y_label=unit,
    )


def machine_pictures(visit: Visit) -> list[Picture]:
    """Return the curves that the machine's model offers, each with its band; none where it offers none."""
    from calc.induction_3ph.model import InductionTwin
    from calc.kinds import twin_of

    twin = twin_of(visit.sheet.machine, visit.sheet.readings)
    return speed_pictures(twin, visit.sheet) if isinstance(twin, InductionTwin) else []


def speed_pictures(twin: InductionTwin, sheet: CaseSheet) -> list[Picture]:
    """Return torque and current over speed, with the rated point and the currents that were read."""
    from calc.induction_3ph.curves import speed_curves

    drawn = speed_curves(twin)
    speed = drawn.speed_rpm.tolist()
    low, middle, high = ([max(value, 0.0) for value in values] for values in drawn.torque_nm)
    rated = Curve(x=[drawn.rated_speed_rpm], y=[drawn.rated_torque_nm], mark="R", joined=False, name="rated")
    torque = Picture(
        title="torque over speed at rated volts",
        curves=(Curve(x=speed, y=middle, name="middle"), rated),
        bands=(Band(x=speed, low=low, high=high, name="nine in ten"),),
        x_label="rpm",
        y_label="N m",
    )
    low, middle, high = (values.tolist() for values in drawn.current_a)
    current = Picture(
        title="line current over speed at rated volts",
        curves=(Curve(x=speed, y=middle, name="middle"), currents_read(sheet)),
        bands=(Band(x=speed, low=low, high=high, name="nine in ten"),),
        x_label="rpm",
        y_label="A",
    )
    return [torque, current]


def currents_read(sheet: CaseSheet) -> Curve:
    """Return the currents that were read where the speed is known: standing, or read in that state."""
    points = []
    for reading in sheet.readings:
        if reading.measure == "line_current":
            speed = sheet.last_reading("speed", reading.state)
            standing = reading.state in {"stalled", "starting"}
            rpm = 0.0 if standing else speed.numbers[0] if speed else math.nan
            points += [(rpm, number) for number in reading.numbers]
    return Curve(x=[x for x, _ in points], y=[y for _, y in points], mark="o", joined=False, name="read")
