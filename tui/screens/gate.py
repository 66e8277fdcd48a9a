"""The list that stands before energising, and the two records that protect: isolation and hazards."""

from __future__ import annotations

from datetime import datetime
from typing import TYPE_CHECKING

from casebook.bodies import Isolation
from tui.answer_text import NOTHING_FORBIDS
from tui.keys import bindings
from tui.look import STOP, STRONG
from tui.plate_lines import YES_NO
from tui.screens.form import FormPage, Line, hear_choice, one_of
from tui.screens.page import Page, TextPage
from tui.widgets.ruled import Ruled, blank, fill, row, rows
from tui.words import key_words, plain

if TYPE_CHECKING:
    from collections.abc import Sequence

    from textual.content import Content
    from textual.widget import Widget

    from casebook.fold import Case
    from rules.answer import Energise, GateLine
    from rules.knowledge import GateRule, Knowledge

ORDER = ("forbids", "needed", "cleared")
STATUS = {"needed": "needed", "cleared": "cleared", "forbids": "FORBIDS"}
NOT_MET = "not met: "


class Gate(TextPage):
    """Every line of the gate, with what cleared it or what it asks for."""

    KEYS = "gate"
    BINDINGS = bindings("gate")

    def __init__(self, energise: Energise, knowledge: Knowledge, records: Sequence[str]) -> None:
        super().__init__()
        self.energise = energise
        self.knowledge = knowledge
        self.records = records
        self.wants_isolation = False
        self.wants_lifting = False

    def lines(self) -> list[Content]:
        """Return the gate's state, the isolation records, and the lines, what shuts it first."""
        shut = self.energise.gate == "shut"
        head = (
            "SHUT: nothing energised is proposed until the lines below are cleared."
            if shut
            else NOTHING_FORBIDS
        )
        out = rows("gate", head, self.room, style=STRONG)
        for text in self.energise.because:
            out += rows("", text, self.room)
        for text in self.records or ("No isolation is recorded in this case.",):
            out += rows("isolated" if text == (self.records or (text,))[0] else "", text, self.room)
        for line in sorted(self.energise.lines, key=lambda line: ORDER.index(line.status)):
            out += [blank(), *self.gate_line(line)]
        return out

    def gate_line(self, line: GateLine) -> list[Content]:
        """Return one line of the gate."""
        style = STOP if line.status == "forbids" else ""
        because = "" if line.because == line.needs else line.because
        needs = (NOT_MET if line.status == "forbids" and because else "") + line.needs
        out = rows(STATUS[line.status], needs, self.room, style=style)
        if because:
            out += rows("", because, self.room)
        if line.status != "cleared" and line.asks:
            asked = "; ".join(key_words(key, self.knowledge) for key in line.asks)
            out += rows("", f"shown by: {asked}", self.room)
        return out

    def action_lift(self) -> None:
        """Go on to record that the isolation was lifted."""
        self.wants_lifting = True
        self.dismiss(None)

    def action_isolate(self) -> None:
        """Go on to the isolation record."""
        self.wants_isolation = True
        self.dismiss(None)


class IsolationPage(FormPage[Isolation]):
    """Dismisses with the isolation record; None where it is not whole."""

    KEYS = "isolation"
    BINDINGS = bindings("isolation")

    def __init__(self, person: str, tag: str, also: Sequence[GateRule] = ()) -> None:
        super().__init__()
        self.person = person
        self.tag = tag
        self.also = also
        """What the gate asks for before readings on this machine when it is isolated."""

    def form_lines(self) -> list[Line]:
        """Return the lines of the record."""
        yes = hear_choice(YES_NO)
        return [
            Line("person", "by", "who isolated it, with own lock and tag", self.person),
            Line(
                "proved_dead",
                "proved",
                "y: proved dead where the work is, all lines and earth",
                hear=yes,
                width=5,
            ),
            Line("tester_proved", "tester", "y: proved on a live source before and after", hear=yes, width=5),
            *(Line(line.id, "also", f"y: {line.name}", hear=yes, width=5) for line in self.also),
            Line("note", "points", "where it is isolated and locked", width=34),
        ]

    def head(self) -> list[Content]:
        """Return what the record says."""
        moment = datetime.now().astimezone().strftime("%Y-%m-%d %H:%M")
        return [
            *rows("isolate", f"Isolation of {self.tag or 'this machine'}, {moment}", self.room, style=STRONG),
            *rows("", "Capacitors discharged, brakes and hanging loads held, stored energy let off. "
                  "Locked out, with your own lock.", self.room),
        ]  # fmt: skip

    @property
    def proved(self) -> tuple[str, ...]:
        """The lines in which a yes must stand."""
        return ("proved_dead", "tester_proved", *(line.id for line in self.also))

    def done(self) -> None:
        """Store the record where it is whole."""
        values = self.values
        if not values["person"]:
            self.go_to("person")
            self.say("A name must stand there: who isolated and locked out.")
        elif missing := [name for name in self.proved if one_of(YES_NO, values[name]) != "yes"]:
            self.go_to(missing[0])
            self.say("Not proved: a y must stand there. F9 goes back without a record.")
        else:
            self.finish(
                Isolation(
                    by=values["person"], points=values["note"], locked_out=True, proved_dead=True,
                    tester_proved_before=True, tester_proved_after=True,
                )
            )  # fmt: skip


class Hazards(Page[bool]):
    """Shown once before the readings of a state: its hazards and their precautions."""

    KEYS = "hazards"
    BINDINGS = bindings("hazards")

    def __init__(self, state: str, hazards: Sequence[str], knowledge: Knowledge) -> None:
        super().__init__()
        self.state = state
        self.hazards = hazards
        self.knowledge = knowledge

    def body(self) -> list[Widget]:
        """Return the block of text."""
        return [Ruled(id="text", classes="page")]

    def show(self) -> None:
        """Show each hazard with its precaution."""
        super().show()
        title = f"Before readings in the state '{plain(self.state)}':"
        lines = [*rows("hazards", title, self.room, style=STRONG), blank()]
        for hazard in self.hazards:
            known = self.knowledge.hazards.get(hazard)
            lines += [row("", (known.name if known else plain(hazard), STRONG))]
            lines += rows("", known.precaution if known else "", self.room)
        lines += [
            blank(),
            *rows("", "Local codes and licensed practice decide; this list adds to them.", self.room),
        ]
        self.query_one("#text", Ruled).show(fill(lines, self.app.size.height - 1))

    def action_done(self) -> None:
        """Acknowledge."""
        self.dismiss(True)


def hazards_text(hazards: Sequence[str], knowledge: Knowledge) -> str:
    """Return hazards with their precautions as they are shown, for the log."""
    known = [knowledge.hazards[hazard] for hazard in hazards if hazard in knowledge.hazards]
    return "\n".join(f"{hazard.name}: {hazard.precaution}" for hazard in known)


def isolation_text(case: Case, lapse: str = "") -> list[str]:
    """Return the isolation records of a case in words, the newest first, with why that no longer holds."""
    out = []
    for logged in reversed(case.isolation):
        record, moment = logged.what, logged.time_utc.astimezone().strftime("%Y-%m-%d %H:%M")
        if not record.isolated:
            out.append(f"{moment} lifted by {record.by}")
            continue
        said = [
            word
            for word, so in (("locked out", record.locked_out), ("proved dead", record.proved_dead))
            if so
        ]
        points = f"; {record.points}" if record.points else ""
        void = f"; {lapse}" if lapse and not out else ""
        out.append(f"{moment} {record.by}: isolated, {', '.join(said)}{points}{void}")
    return out
