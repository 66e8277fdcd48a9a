"""The nameplate in the plate's own words, checked while it is typed."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calc.errors import InputError, PlatesideError
from calc.values import ValueTextError
from tui.keys import bindings
from tui.look import STRONG, WATCH
from tui.plate_lines import Raw, hear, keep, machine_of, plate_lines
from tui.screens.form import FormPage, Line
from tui.screens.page import refusal
from tui.widgets.ruled import rows, tagged
from tui.words import kind_name

if TYPE_CHECKING:
    from collections.abc import Callable

    from textual.content import Content

    from tui.plate_lines import PlateLine

REMARKS_SHOWN = 3


class NameplatePage(FormPage[Raw]):
    """Dismisses with the machine as a case sheet holds it. ``check`` finds contradictions in it."""

    KEYS = "nameplate"
    BINDINGS = bindings("nameplate")

    def __init__(
        self,
        kind: str,
        tag: str,
        check: Callable[[Raw], list[str]],
        typed: dict[str, str] | None = None,
        extra: Raw | None = None,
    ) -> None:
        super().__init__(typed)
        self.kind, self.tag, self.check = kind, tag, check
        self.extra = extra or {}
        """What the draft must also keep, such as the complaint."""
        self.begun_as = ""
        """The draft of the new case, where the plate is that of one."""

    def form_lines(self) -> list[Line]:
        """Return one line per word of the plate, then how the machine stands."""
        return [
            Line(line.field, line.word, line.hint, hear=self.hearer(line)) for line in plate_lines(self.kind)
        ]

    @staticmethod
    def hearer(line: PlateLine) -> Callable[[str], tuple[str, bool]]:
        """Return how one line is understood: what is kept, then what it is."""

        def heard(text: str) -> tuple[str, bool]:
            kept, fine = hear(line, text)
            return (
                f"{kept}: {line.hint.split(',')[0].split(';')[0]}" if fine and line.dimension else kept
            ), fine

        return heard

    def head(self) -> list[Content]:
        """Return the tag and the kind."""
        text = f"Nameplate of a {kind_name(self.kind)}; blank lines are allowed"
        return rows(*tagged(self.tag, text), self.room, style=STRONG)

    def remarks(self) -> list[Content]:
        """Return the contradictions in what stands there now."""
        machine = self.machine()
        if machine is None:
            return []
        found, refused = self.judged(machine)
        found = [text for _, text in refused] or found
        lines: list[Content] = []
        for text in found[:REMARKS_SHOWN]:
            lines += rows("plate" if not lines else "", text, self.room, style=WATCH, most=3)
        return lines

    def judged(self, machine: Raw) -> tuple[list[str], list[tuple[str, str]]]:
        """Return the contradictions; and what no plate can show: its line, and why in the plate's word."""
        try:
            return self.check(machine), []
        except InputError as error:
            words = {line.field: line.word for line in plate_lines(self.kind)}
            refused = []
            for problem in error.problems:
                name = problem.where.rpartition(".")[2]
                refused.append((name, f"{words.get(name, name)} {refusal(InputError([problem]))}"))
            return [], refused
        except PlatesideError as error:
            return [], [("", refusal(error))]

    def machine(self) -> Raw | None:
        """Return the machine from the lines that are understood; None where nothing is typed."""
        typed: dict[str, str] = {}
        for line in plate_lines(self.kind):
            text = self.values.get(line.field, "")
            if text and hear(line, text)[1]:
                typed[line.field] = text
        return machine_of(self.kind, self.tag, typed) if typed else None

    def done(self) -> None:
        """Keep the plate; point at the first line that is not understood."""
        for line in plate_lines(self.kind):
            text = self.values[line.field]
            if text:
                try:
                    keep(line, text)
                except ValueTextError as error:
                    self.go_to(line.field)
                    self.say(f"{line.word}: {error}")
                    return
        machine = machine_of(self.kind, self.tag, self.values)
        for name, text in self.judged(machine)[1][:1]:
            if name in self.values:
                self.go_to(name)
            self.say(text)
            return
        self.finish(machine)

    def action_kind(self) -> None:
        """Go back for another kind; what is typed is kept."""
        self.keep_line()
        self.dismiss({"kind": ""})

    def draft(self) -> tuple[str, dict[str, Any]] | None:
        """Keep what is typed with tag, kind and what else the case needs, unless all lines are blank."""
        lines = {name: text.strip() for name, text in self.texts_now.items() if text.strip()}
        kept = {"tag": self.tag, "kind": self.kind, "lines": lines, **self.extra}
        return (self.begun_as, kept) if lines and self.begun_as else None
