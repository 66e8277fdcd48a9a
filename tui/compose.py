"""Compose one case: read, weigh, log. No terminal, no printing.

Every method that changes something writes one entry to the casebook and returns
only when that is on disk. The screens and the plain dialogue both stand on this.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calc.quantities import ENERGISED_STATES
from tui.typed import Understood, understand

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calc.sheet import CaseSheet
    from rules.answer import Diagnosis
    from rules.knowledge import Knowledge
    from tui.book import Book, CaseView

Raw = dict[str, Any]
"""Part of a case sheet as its YAML would hold it: ids, and values as they were typed."""


@dataclass(frozen=True)
class Weighed:
    """The answer to a sheet, and by how much each fault's odds moved since the answer before."""

    diagnosis: Diagnosis
    moved: Mapping[str, float]


@dataclass(frozen=True)
class Closing:
    """What a closed case teaches: what it really was, how that is known, and what was done."""

    found: tuple[str, ...]
    confirmed: str = "believed"
    """``teardown``, ``repair``, ``measured`` or ``believed``: only the first two teach the odds."""
    done: str = ""
    parts: str = ""
    minutes: float | None = None
    retest: tuple[str, ...] = ()
    note: str = ""


class Visit:
    """One case on one machine, from the complaint to the closed entry."""

    def __init__(self, book: Book, case: str, *, person: str, knowledge: Knowledge) -> None:
        self.book = book
        self.case = case
        self.person = person
        self.knowledge = knowledge
        self.view: CaseView = book.view(case)
        self._weighed: Weighed | None = None
        self._weighed_at = -1

    @classmethod
    def new(
        cls, book: Book, *, person: str, knowledge: Knowledge, machine: Raw, complaint: str, kit: Sequence[str] | None
    ) -> Visit:
        """Open a case: the machine as a sheet would hold it, one complaint, and the kit that is carried."""
        sheet = {"format": 1, "machine": machine, "complaint": complaint}
        if kit is not None:
            sheet["kit"] = list(kit)
        book.check(sheet)
        return cls(book, book.open_case(sheet, person=person), person=person, knowledge=knowledge)

    # what stands

    @property
    def sheet(self) -> CaseSheet:
        """The case so far as typed sheet."""
        return self.book.check(self.view.sheet)

    @property
    def kind(self) -> str:
        """The machine kind."""
        return str(self.view.sheet["machine"]["kind"])

    def refresh(self) -> CaseView:
        """Read the case again, with what others have added to it."""
        self.view = self.book.view(self.case)
        return self.view

    # what is typed

    def understand(self, measure: str, state: str, text: str, **context: str) -> Understood:
        """Read typed text for one measure; nothing is stored. The echo says in words what was understood.

        Raises InputError where the text is no such reading.
        """
        return understand(self.sheet.machine, self.knowledge, measure=measure, state=state, text=text, context=context)

    def record(self, reading: Understood) -> str:
        """Store a reading that was echoed, with the band and the limits that are shown beside it."""
        return self._put("reading", {**reading.raw, "shown": self._shown(reading)})

    def observe(self, observation: str, seen: bool) -> str:
        """Store one answer to an observation."""
        return self._put("observation", {"observation": observation, "seen": seen})

    def set_machine(self, machine: Raw) -> str:
        """Store the machine again, as it now reads: nameplate, supply, starter, load."""
        self.book.check({**self.view.sheet, "machine": machine})
        return self._put("nameplate", {"machine": machine})

    def set_complaint(self, complaint: str) -> str:
        """Store another complaint."""
        self.book.check({**self.view.sheet, "complaint": complaint})
        return self._put("complaint", {"complaint": complaint})

    def set_kit(self, kit: Sequence[str]) -> str:
        """Store what this technician carries."""
        return self._put("kit", {"kit": list(kit)})

    def skip(self, key: str, why: str = "") -> str:
        """Remember that a reading or an observation cannot be taken now; it is not proposed again."""
        return self._put("skipped", {"key": key, "why": why})

    def note(self, text: str) -> str:
        """Store a remark."""
        return self._put("note", {"text": text})

    def correct(self, entry: str, reading: Understood | None = None, *, why: str = "") -> str:
        """Take back an earlier entry, or put another reading in its place. The earlier one stays in the log."""
        body: Raw = {"corrects": entry, "why": why}
        if reading is not None:
            body["body"] = {**reading.raw, "shown": self._shown(reading)}
        return self._put("correction", body)

    # what protects

    def isolate(self, person: str, *, proved_dead: bool, tester_proved: bool, note: str = "") -> str:
        """Store the isolation record: who isolated and locked out, and whether it was proved dead."""
        body = {"person": person, "proved_dead": proved_dead, "tester_proved": tester_proved, "note": note}
        return self._put("isolation", body)

    def acknowledge(self, state: str, hazards: Sequence[str]) -> str:
        """Store that the hazards of a state were read and accepted."""
        return self._put("acknowledged", {"state": state, "hazards": list(hazards)})

    def wants_first(self, state: str, hazards: Sequence[str]) -> str:
        """Return what must come before a reading in a state: ``isolation``, ``acknowledge``, or nothing."""
        if state == "isolated" and not self.view.isolated:
            return "isolation"
        new = set(hazards) - set(self.view.acknowledged.get(state, ()))
        return "acknowledge" if state in ENERGISED_STATES and new else ""

    # what it means

    def weigh(self) -> Weighed:
        """Return the answer to the case as it stands; worked out again only after something was added."""
        stamp = len(self.view.entries)
        if self._weighed is None or self._weighed_at != stamp:
            before = self._weighed.diagnosis if self._weighed else None
            now = weigh(self.sheet, self.knowledge, name=self.view.number)
            self._weighed, self._weighed_at = Weighed(now, moved(before, now)), stamp
        return self._weighed

    def close(self, closing: Closing) -> str:
        """Close the case with what was found, and with the odds as they stood."""
        odds = {fault.id: round(fault.probability, 4) for fault in self.weigh().diagnosis.faults[:8]}
        return self._put("closed", {**closing.__dict__, "odds_shown": odds})

    def reopen(self, why: str) -> str:
        """Open a closed case again."""
        return self._put("reopened", {"why": why})

    def _put(self, kind: str, body: Raw) -> str:
        """Write one entry; it is on disk when this returns."""
        entry = self.book.put(self.case, kind, body, person=self.person)
        self.refresh()
        return entry

    def _shown(self, reading: Understood) -> Raw:
        """Return what the screen says beside a reading now, so that it can be read when limits have changed."""
        if self._weighed is None:
            return {"echo": reading.echo}
        bands = [band for band in self._weighed.diagnosis.expected if f"{band.measure}@{band.state}" == reading.key]
        shown = {"echo": reading.echo}
        return {**shown, "band": [bands[0].low, bands[0].high, bands[0].unit]} if bands else shown


def weigh(sheet: CaseSheet, knowledge: Knowledge, *, name: str = "") -> Diagnosis:
    """Weigh one sheet. The engine is loaded at the first call."""
    from rules.diagnosing import diagnose

    return diagnose(sheet, knowledge=knowledge, name=name)


def moved(before: Diagnosis | None, now: Diagnosis) -> dict[str, float]:
    """Return by how much each fault's probability moved from one answer to the next."""
    earlier = {fault.id: fault.probability for fault in before.faults} if before else {}
    later = {fault.id: fault.probability for fault in now.faults}
    if not earlier:
        return dict.fromkeys(later, 0.0)
    return {fault: later.get(fault, 0.0) - earlier.get(fault, 0.0) for fault in earlier | later}
