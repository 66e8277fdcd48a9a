"""What the screen tests share: the screen as text, and an app on a casebook of its own."""

from __future__ import annotations

from pathlib import Path

from textual.app import App

from tui.application import PlatesideApp

SMALL, LARGE = (80, 24), (120, 40)


def screen_text(app: App[object]) -> str:
    """The screen as text, one line each. The one place that uses Textual's compositor."""
    strips = app.screen._compositor.render_strips()
    return "\n".join("".join(segment.text for segment in strip).rstrip() for strip in strips)


def new_app(folder: Path, *, person: str = "R. Varga") -> PlatesideApp:
    """An app on an empty casebook, its technician known."""
    app = PlatesideApp(folder / "casebook.db")
    if person:
        app.desk.remember(person, ["clamp_meter", "multimeter", "insulation_tester", "tachometer"])
    return app
