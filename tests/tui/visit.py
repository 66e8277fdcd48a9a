"""Ways through a visit that its tests share: to the complaint, the worksheet, the closing page."""

from __future__ import annotations

import time
from collections.abc import AsyncIterator
from contextlib import asynccontextmanager
from pathlib import Path

from textual.pilot import Pilot

from calc.sheet_io import sheet_from_plain
from casebook.fold import Case
from tests.tui.helpers import PATIENCE_S, SMALL, keys, known_machine, new_app, screen_text, settled, until
from tui.application import PlatesideApp


async def to_complaint(pilot: Pilot[int], tag: str = "P-104") -> None:
    """Go from the casebook to the question what is wrong."""
    await keys(pilot, "n")
    await until(pilot, "Which machine")
    await keys(pilot, *tag, "enter")
    await until(pilot, "What is wrong")


async def to_worksheet(pilot: Pilot[int], complaint: str = "runs hot") -> None:
    """Go from the casebook to the worksheet of a known machine."""
    await to_complaint(pilot)
    await keys(pilot, *complaint, "enter")
    await until(pilot, "faults")
    await settled(pilot)


async def to_closing(pilot: Pilot[int], found: str = "") -> None:
    """Go from the worksheet to the closing page, with the likeliest fault or the one that is typed."""
    await keys(pilot, "f8")
    await until(pilot, "What was it really")
    await keys(pilot, *found, "enter")
    await until(pilot, "known by")


@asynccontextmanager
async def at_worksheet(
    folder: Path, *, complaint: str = "runs hot"
) -> AsyncIterator[tuple[PlatesideApp, Pilot[int]]]:
    """Run the app on a casebook that knows one machine, up to the worksheet of a new case on it."""
    app = known_machine(new_app(folder))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot, complaint)
        yield app, pilot


def single_phase_case(app: PlatesideApp, tag: str = "K-12") -> PlatesideApp:
    """Open a case on a capacitor-start motor that hums and does not turn."""
    plate = {"power": "1.5 hp", "voltage": "230 V", "current": "8.4 A", "speed": "1725 rpm"}
    plate |= {"frequency": "60 Hz", "start_capacitor": "161-193 uF"}
    machine = {"tag": tag, "kind": "induction_1ph", "nameplate": plate}
    sheet = {"format": 1, "machine": machine, "complaint": "hums_will_not_turn"}
    app.desk.book.log_sheet(sheet_from_plain(sheet), "R. Varga")
    return app


def newest(app: PlatesideApp) -> Case:
    """The newest case as the casebook has it on disk."""
    return app.desk.book.case(app.desk.book.cases()[0].id)


def flat(app: PlatesideApp) -> str:
    """The screen as one line of words."""
    return " ".join(screen_text(app).replace("│", " ").split())


async def absent(pilot: Pilot[int], words: str) -> None:
    """Wait until words no longer stand on the screen."""
    end = time.monotonic() + PATIENCE_S
    while words in flat(pilot.app) and time.monotonic() < end:  # type: ignore[arg-type]
        await pilot.pause(0.02)
    assert words not in flat(pilot.app)  # type: ignore[arg-type]
