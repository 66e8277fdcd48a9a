"""What the screen tests share: the screen as text, waiting for words, and an app on a casebook of its own."""

from __future__ import annotations

import time
from functools import cache
from pathlib import Path
from typing import Any

from textual.app import App
from textual.events import Key
from textual.keys import _character_to_key
from textual.pilot import Pilot

from calc.sheet_io import sheet_from_plain
from casebook.book import open_casebook
from rules.knowledge import Knowledge
from rules.loading import load_knowledge
from tui.application import PlatesideApp
from tui.drafts import Drafts
from tui.screens.worksheet import Worksheet

SMALL, LARGE = (80, 24), (120, 40)
PATIENCE_S = 8.0
KIT = ["clamp_meter", "multimeter", "insulation_tester", "tachometer"]
MACHINE = {
    "kind": "induction_3ph",
    "nameplate": {
        "power": "7.5 kW",
        "voltage": "400 V",
        "current": "14.9 A",
        "frequency": "50 Hz",
        "speed": "1455 rpm",
        "power_factor": 0.84,
        "efficiency": "88.7 %",
        "connection": "delta",
    },
    "supply": {"source": "mains", "nominal_voltage": "400 V", "nominal_frequency": "50 Hz"},
    "starter": "direct",
    "load": {"type": "pump_centrifugal"},
}


def screen_text(app: App[Any]) -> str:
    """The screen as text, one line each. The one place that uses Textual's compositor."""
    strips = app.screen._compositor.render_strips()
    return "\n".join("".join(segment.text for segment in strip).rstrip() for strip in strips)


def new_app(folder: Path, *, person: str = "R. Varga") -> PlatesideApp:
    """An app on an empty casebook, its technician known."""
    app = PlatesideApp(folder / "casebook.db")
    app.desk._knowledge = shipped()
    if person:
        app.desk.remember(person, KIT)
    return app


@cache
def shipped() -> Knowledge:
    """The shipped rules, loaded once for all tests."""
    return load_knowledge()


async def keys(pilot: Pilot[Any], *names: str) -> None:
    """Press keys as a fast typist would: without waiting for the screen between them."""
    for name in names:
        character = name if len(name) == 1 else {"space": " ", "slash": "/"}.get(name)
        pilot.app.post_message(Key(name if len(name) > 1 else _character_to_key(name), character))
    await pilot.pause()


def known_machine(app: PlatesideApp, tag: str = "P-104") -> PlatesideApp:
    """Put one earlier case of a machine into the casebook."""
    sheet = sheet_from_plain({"format": 1, "machine": {"tag": tag, **MACHINE}, "complaint": "routine_check"})
    app.desk.book.log_sheet(sheet, "R. Varga")
    return app


def open_case_in(path: Path) -> Path:
    """Make a casebook with one open case and a known technician; return its path."""
    sheet = sheet_from_plain({"format": 1, "machine": {"tag": "P-104", **MACHINE}, "complaint": "runs_hot"})
    with open_casebook(path) as book:
        book.log_sheet(sheet, "R. Varga")
    remember(path)
    return path


def remember(path: Path) -> None:
    """Have the technician and the kit known beside a casebook."""
    Drafts(path).remember("person", "R. Varga")
    Drafts(path).remember("kit", KIT)


async def until(pilot: Pilot[Any], words: str | tuple[str, ...]) -> str:
    """Wait until one of some words stands on the screen; return the screen."""
    wanted = (words,) if isinstance(words, str) else words
    end = time.monotonic() + PATIENCE_S
    while time.monotonic() < end:
        await pilot.pause(0.02)
        text = " ".join(screen_text(pilot.app).replace("│", " ").split())
        if any(word in text for word in wanted):
            return text
    raise AssertionError(f"none of {wanted} on the screen:\n{screen_text(pilot.app)}")


async def settled(pilot: Pilot[Any]) -> None:
    """Wait until the worksheet has its answer."""
    end = time.monotonic() + PATIENCE_S
    while time.monotonic() < end:
        await pilot.pause(0.02)
        page = pilot.app.screen
        if not isinstance(page, Worksheet) or (page.weighed is not None and not page.is_weighing):
            return
    raise AssertionError(f"never weighed:\n{screen_text(pilot.app)}")
