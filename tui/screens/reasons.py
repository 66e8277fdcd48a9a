"""Why a fault stands where it stands, what would turn it, and what to do about it."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any, Final

from textual import work
from textual.worker import get_current_worker

from tui.keys import bindings
from tui.look import FAINT, STRONG
from tui.screens.page import TextPage
from tui.widgets.ruled import INDENT, blank, pad, row, rows, wrapped
from tui.words import fault_name, key_words, percent

if TYPE_CHECKING:
    from textual.content import Content
    from textual.worker import Worker

    from rules.answer import Diagnosis, FaultOdds, Reason, Turn
    from rules.knowledge import Fault, Knowledge
    from tui.compose import Visit

FACTOR_WIDTH: Final = 8
SMALL: Final = 0.15
"""Weights below this, in nats, say next to nothing."""
TURNS: Final = 3
SHIFTS: Final = 3


class Reasons(TextPage):
    """One fault at a time; left and right go through the list."""

    KEYS = "reasons"
    BINDINGS = bindings("reasons")

    def __init__(self, visit: Visit, diagnosis: Diagnosis) -> None:
        super().__init__()
        self.visit = visit
        self.diagnosis = diagnosis
        self.knowledge = visit.knowledge
        self.at = 0
        self.turns: tuple[Turn, ...] | None = None
        """What would turn the decision; None while it is worked out."""

    def on_mount(self) -> None:
        """Find what would turn the decision, after the page is shown."""
        self.call_after_refresh(self.find_turns)

    @work(thread=True, exclusive=True, group="reasons", exit_on_error=False)
    def find_turns(self) -> None:
        """Weigh anew where that is due, then find what would turn the decision."""
        worker = get_current_worker()
        try:
            now = self.visit.weigh().diagnosis
            self.show_from(worker, now, None)
            self.show_from(worker, now, self.visit.turns())
        except Exception as error:
            if not worker.is_cancelled:
                self.app.call_from_thread(self.say, self.plateside.trouble(error))

    def show_from(self, worker: Worker[Any], now: Diagnosis, turns: tuple[Turn, ...] | None) -> None:
        """Show an answer that a thread has found, unless the page is gone or asks anew."""
        if not worker.is_cancelled:
            self.app.call_from_thread(self.found, now, turns)

    def found(self, now: Diagnosis, turns: tuple[Turn, ...] | None) -> None:
        """Show an answer, and what would turn it."""
        if self.stands and (now, turns) != (self.diagnosis, self.turns):
            self.diagnosis, self.turns = now, turns
            self.at = min(self.at, max(len(now.faults) - 1, 0))
            self.show()

    def action_own_cases(self) -> None:
        """Leave the shop's own confirmed cases out, or take them in."""
        self.visit.use_learned = not self.visit.use_learned
        self.at, self.turns = 0, None
        self.show()
        self.find_turns()

    def lines(self) -> list[Content]:
        """Return everything about the chosen fault."""
        if not self.diagnosis.faults:
            return rows("why", "There are no odds to explain yet.", self.room)
        fault = self.diagnosis.faults[self.at]
        return [
            *self.fault_lines(fault),
            *reason_lines(fault, self.room),
            *self.turn_lines(),
            *self.own_lines(),
            *deed_lines(fault, self.knowledge, self.visit.kind, self.room),
        ]

    def fault_lines(self, fault: FaultOdds) -> list[Content]:
        """Return the fault with its odds, its place in the list, and the causes inside it."""
        name = fault.name or fault_name(fault.id, self.knowledge)
        place = f"{self.at + 1} of {len(self.diagnosis.faults)}"
        room = self.room - INDENT - len(place) - 8
        lines = [row("fault", (pad(name, room), STRONG), f"{percent(fault.probability)}  ", (place, FAINT))]
        inner = [part for part in fault.within if part.probability >= 0.01]
        for part in inner[:4]:
            text = part.name or fault_name(part.id, self.knowledge)
            lines.append(
                row("of it" if part is inner[0] else "", pad(text, room), f"{percent(part.probability)}")
            )
        return lines

    def turn_lines(self) -> list[Content]:
        """Return what the odds ask for, and the readings that would turn it."""
        lines: list[Content] = []
        if self.diagnosis.decision:
            lines += rows("odds ask", self.diagnosis.decision, self.room, style=STRONG)
        if self.turns is None:
            return [*lines, row("turns if", ("looking for the reading that would turn it ...", FAINT))]
        for turn in self.turns[:TURNS]:
            key = f"{turn.measure}@{turn.state}" if turn.state else turn.measure
            said = f"{key_words(key, self.knowledge)} {turn.value}: {turn.to_decision}"
            lines += rows("" if turn is not self.turns[0] else "turns if", said, self.room, most=2)
        if not self.turns:
            lines += rows("turns if", "no single proposed reading would turn it", self.room)
        return lines

    def own_lines(self) -> list[Content]:
        """Return whether the shop's own confirmed cases are in the odds, and what they shift most."""
        shares = [shift for shift in self.visit.learned_shifts() if not shift.about]
        if not shares:
            return rows("shop", "none confirmed on machines of this kind and size", self.room, style=FAINT)
        moved = "; ".join(
            f"{fault_name(shift.fault, self.knowledge)} {percent(shift.before).strip()}"
            f" to {percent(shift.after).strip()}"
            for shift in shares[:SHIFTS]
        )
        used = "in the odds, F4 leaves them out" if self.visit.use_learned else "LEFT OUT, F4 takes them in"
        cases = f"{sum(shift.cases for shift in shares):g} confirmed, {used}"
        return rows("shop", f"{cases}. They shift starting odds: {moved}", self.room, most=4)

    def action_next_fault(self) -> None:
        """Show the next fault."""
        self.go(1)

    def action_last_fault(self) -> None:
        """Show the fault before."""
        self.go(-1)

    def go(self, step: int) -> None:
        """Move along the list of faults."""
        many = len(self.diagnosis.faults)
        if many:
            self.at = (self.at + step) % many
            self.offset_now = 0
            self.show()


def reason_lines(fault: FaultOdds, room: int) -> list[Content]:
    """Return what speaks for and against a fault, the loudest first, with what was read and expected."""
    loudest = sorted(fault.reasons, key=lambda reason: -abs(reason.weight))
    loud = [reason for reason in loudest if abs(reason.weight) >= SMALL]
    lines: list[Content] = []
    for word, wanted in (("for", True), ("against", False)):
        chosen = [reason for reason in loud if (reason.weight > 0) == wanted]
        for reason in chosen:
            lines += _reason(word if reason is chosen[0] else "", reason, room)
    quiet = len(loudest) - len(loud)
    if quiet:
        lines.append(row("", (f"{quiet} more that say next to nothing either way", FAINT)))
    return lines or [row("for", "nothing but the starting odds")]


def _reason(word: str, reason: Reason, room: int) -> list[Content]:
    """Return one reason: by how much it turns the odds, what was read, and what was to be expected."""
    text = reason.text
    if reason.read and reason.read not in text:
        text += f": read {reason.read}"
    if reason.expected and reason.expected not in text:
        text += f", expected {reason.expected}"
    first, *rest = wrapped(text, room - INDENT - FACTOR_WIDTH, 3)
    lines = [row(word, (pad(factor(reason.weight), FACTOR_WIDTH), STRONG), first)]
    return lines + [row("", " " * FACTOR_WIDTH, line) for line in rest]


def factor(weight: float) -> str:
    """Return a weight in nats as what it does to the odds: times or divided by."""
    times = math.exp(min(abs(weight), 9.3))
    shown = ">9999" if abs(weight) > 9.2 else f"{times:.0f}" if times >= 10 else f"{times:.1f}"
    return f"{'x' if weight > 0 else '/'} {shown}"


def deed_lines(fault: FaultOdds, knowledge: Knowledge, kind: str, room: int) -> list[Content]:
    """Return how to confirm each part of a fault, what to do, what to re-test, and the sources."""
    lines: list[Content] = []
    for part in fault.id.split("+"):
        known = knowledge.faults.get(part)
        if known is not None:
            lines += [blank(), *_deeds(known.for_kind(kind), knowledge, room)]
    return lines


def _deeds(fault: Fault, knowledge: Knowledge, room: int) -> list[Content]:
    """Return the deeds of one fault."""
    lines: list[Content] = []
    if fault.forbids_energising:
        lines += rows(
            "energise",
            "This fault, if confirmed, forbids energising until it is repaired.",
            room,
            style=STRONG,
        )
    lines += rows("confirm", fault.confirm, room) if fault.confirm else []
    lines += rows("remedy", fault.remedy, room) if fault.remedy else []
    lines += (
        rows("re-test", "; ".join(key_words(key, knowledge) for key in fault.retest), room)
        if fault.retest
        else []
    )
    for caution in fault.cautions:
        hazard = knowledge.hazards.get(caution)
        lines += rows("caution", hazard.precaution if hazard else caution.replace("_", " "), room)
    return [*lines, *rows("source", fault.source, room, style=FAINT)]
