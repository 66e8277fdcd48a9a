"""Who works here and what they carry; asked once and remembered."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tui.keys import bindings
from tui.look import STRONG
from tui.people import USUAL_KIT
from tui.plate_lines import YES_NO
from tui.screens.form import FormPage, Heard, Line, hear_choice, one_of
from tui.widgets.ruled import rows

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from textual.content import Content


class Person(FormPage[dict[str, str]]):
    """Dismisses with the name, and the kit as instrument ids joined by spaces."""

    KEYS = "person"
    BINDINGS = bindings("person")

    def __init__(self, name: str, kit: Sequence[str] | None, instruments: Sequence[str]) -> None:
        super().__init__()
        self.name_now = name
        self.kit = USUAL_KIT if kit is None else tuple(kit)
        self.instruments = instruments

    def form_lines(self) -> list[Line]:
        """Return the name and one line per instrument."""
        lines = [Line("person", "name", "your name; it stands under every entry", self.name_now)]
        for place, instrument in enumerate(self.instruments):
            start = "yes" if instrument in self.kit else "no"
            word = "carry" if place == 0 else ""
            hear = self.hear_instrument(instrument)
            lines.append(Line(instrument, word, instrument.replace("_", " "), start, hear, width=5))
        return lines

    def hear_instrument(self, instrument: str) -> Callable[[str], Heard]:
        """Return how the line of an instrument is understood: its name stands beside the answer."""
        understood = hear_choice(YES_NO)

        def hear(text: str) -> Heard:
            _, fine = understood(text)
            return f"{instrument.replace('_', ' ')}{'' if fine else ': y or n'}", fine

        return hear

    def head(self) -> list[Content]:
        """Return the title."""
        text = "Your name, and what you carry: nothing else is proposed. Asked once."
        return rows("who", text, self.room, style=STRONG)

    def done(self) -> None:
        """Keep name and kit."""
        values = self.values
        if not values["person"]:
            self.say("A name must stand there.")
            self.go_to("person")
            return
        kit = [name for name in self.instruments if one_of(YES_NO, values[name]) == "yes"]
        self.dismiss({"person": values["person"], "kit": " ".join(kit)})
