"""Compose one case: read, weigh, log. No terminal, no printing.

Every method that changes something writes to the casebook and returns only when
that is on disk. The screens and the plain dialogue both stand on this.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime
from typing import TYPE_CHECKING

import msgspec

from calc.quantities import ENERGISED_STATES
from casebook import bodies
from rules.answer import NextItem
from rules.cautions import states_of
from rules.findings import findings
from tui.context import split_context
from tui.experience import Experience
from tui.shift import before_isolated, for_this_shift, isolation_lapse, standing_sheet
from tui.typed import Understood, doubted, understand
from tui.version import VERSION
from tui.words import band_text, reading_text

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calc.sheet import CaseSheet, Machine
    from casebook.book import Casebook
    from casebook.fold import Case
    from rules.answer import Band, Diagnosis, Turn
    from rules.knowledge import Knowledge
    from rules.learned import Shift


@dataclass(frozen=True)
class Weighed:
    """The answer to a sheet, and by how much each fault's odds moved since the answer before."""

    diagnosis: Diagnosis
    moved: Mapping[str, float]


class Visit:
    """One case on one machine, from the complaint to the closed entry."""

    def __init__(self, book: Casebook, case: str, *, person: str, knowledge: Knowledge) -> None:
        self.book = book
        self.person = person
        self.knowledge = knowledge
        self.use_learned = True
        self.case: Case = book.case(case)
        self.experience = Experience(book, self.case.id, knowledge)
        self._weighed: Weighed | None = None
        self._weighed_from: tuple[CaseSheet, CaseSheet, bool] | None = None
        self._turns: tuple[CaseSheet, bool, tuple[Turn, ...]] | None = None

    @classmethod
    def new(cls, book: Casebook, sheet: CaseSheet, *, person: str, knowledge: Knowledge) -> Visit:
        """Open a case with what a sheet says: machine, complaint, kit, and readings if there are any."""
        return cls(book, book.log_sheet(sheet, person), person=person, knowledge=knowledge)

    # what stands

    @property
    def sheet(self) -> CaseSheet:
        """The case so far, corrections applied."""
        return self.case.sheet

    @property
    def isolation(self) -> bodies.Isolation | None:
        """The isolation record that holds now, or None: none, lifted, or lapsed."""
        last = self.case.isolation[-1].what if self.case.isolation else None
        return last if last is not None and last.isolated and not self.isolation_lapse else None

    @property
    def isolation_lapse(self) -> str:
        """Why the last isolation record no longer holds; nothing where it does."""
        return isolation_lapse(self.case, datetime.now(UTC))

    @property
    def kind(self) -> str:
        """The machine kind."""
        return self.case.machine.kind

    @property
    def number(self) -> str:
        """The case number as people say it."""
        return self.book.number(self.case.id)

    @property
    def skipped(self) -> frozenset[str]:
        """What was put aside as impossible here: ``measure@state``, or observations."""
        return frozenset(logged.what.key for logged in self.case.skipped)

    def acknowledged(self, state: str) -> frozenset[str]:
        """Return the hazards that were read and acknowledged for a state."""
        here = [logged.what for logged in self.case.hazards if logged.what.about == state]
        return frozenset(hazard for record in here for hazard in record.hazards)

    def correctable(self) -> list[tuple[str, str, str]]:
        """Return what can be corrected, newest first: entry id, ``measure@state`` or observation, text."""
        found = [
            (one.entry, one.what.reading.key, reading_text(one.what.reading)) for one in self.case.readings
        ]
        found += [
            (one.entry, name, "yes" if one.what.answer else "no") for name, one in self.case.observed.items()
        ]
        found.sort(key=lambda one: one[0].time_utc, reverse=True)
        return [(entry.id, key, text) for entry, key, text in found]

    def refresh(self) -> Case:
        """Read the case again, with what others have added to it."""
        self.case = self.book.case(self.case.id)
        return self.case

    # what is typed

    def understand(self, measure: str, state: str, text: str, **context: str) -> Understood:
        """Read typed text for one measure; nothing is stored. The echo says in words what was understood.

        What goes with it is typed behind the values, ``350 at 24 C 500 V``, or given as ``context``:
        ``temperature="24"``, ``method="four_wire"``. Raises InputError where the text is no such reading.
        """
        values, beside = split_context(text, self.context_of(measure))
        understood = understand(self.case.machine, measure, state, values, {**beside, **context})
        return doubted(understood, self.knowledge.readings.get(measure), self._band(understood.key))

    def context_of(self, measure: str) -> tuple[str, ...]:
        """Return what may be noted with a reading, such as ``temperature``; what decides is first."""
        rule = self.knowledge.readings.get(measure)
        return rule.context if rule is not None else ()

    def is_by_hand(self, observation: str) -> bool:
        """Whether an observation is made on the isolated machine alone."""
        return states_of(NextItem(observation=observation), self.knowledge) == {"isolated"}

    def record(self, understood: Understood) -> str:
        """Store a reading that was echoed, with the band and the limit that stood beside it."""
        return self._put(self.taken(understood))

    def observe(self, observation: str, answer: bool | None) -> str:
        """Store one answer to an observation; None takes an earlier one back."""
        return self._put(bodies.Observed(observation=observation, answer=answer))

    def observe_all(self, answers: Mapping[str, bool]) -> None:
        """Store several answers, all or none."""
        if answers:
            self._put(*(bodies.Observed(observation=name, answer=seen) for name, seen in answers.items()))

    def set_machine(self, machine: Machine) -> None:
        """Store what is now known of the machine; blanks outside the plate change nothing."""
        facts = msgspec.structs.replace(bodies.facts_of_machine(machine), kind=machine.kind, tag=machine.tag)
        self._put(bodies.NameplateRead(nameplate=machine.nameplate), facts)

    def skip(self, key: str, why: str = "") -> str:
        """Remember that ``measure@state``, or an observation, cannot be taken here."""
        measure, at, state = key.partition("@")
        if at:
            return self._put(bodies.Skipped(measure=measure, state=state, why=why))
        return self._put(bodies.Skipped(observation=key, why=why))

    def note(self, text: str) -> str:
        """Store a remark."""
        return self._put(bodies.Note(text=text))

    def correct(self, entry: str, instead: bodies.Body | Understood | None = None, *, why: str = "") -> str:
        """Put something else in the place of an entry, or strike it out (None); the log keeps both."""
        body = self.taken(instead) if isinstance(instead, Understood) else instead
        made = self.book.correct(self.case.id, entry, body, person=self.person, why=why)
        self.refresh()
        return made.id

    # what protects

    def isolate(self, record: bodies.Isolation, *, shown: Sequence[str] = ()) -> str:
        """Store who isolated what and how it was proved dead; ``shown`` are observations answered yes."""
        return self._put(*(bodies.Observed(observation=name, answer=True) for name in shown), record)

    def lift(self) -> str:
        """Store that the isolation was lifted."""
        return self._put(bodies.Isolation(by=self.person, isolated=False))

    def acknowledge(self, state: str, hazards: Sequence[str], shown: str) -> str:
        """Store that the hazards of a state were read, in the words that were shown."""
        return self._put(bodies.HazardAcknowledged(hazards=tuple(hazards), about=state, shown=shown))

    def wants_first(self, state: str, hazards: Sequence[str], measure: str | None = None) -> str:
        """Return what must come before a reading in a state: ``isolation``, ``acknowledge``, or nothing."""
        if state == "isolated":
            record = self.isolation
            proved = record is not None and record.proved_dead and not self._unshown(measure)
            return "" if proved else "isolation"
        if state not in ENERGISED_STATES:
            return ""
        return "acknowledge" if set(hazards) - self.acknowledged(state) else ""

    def _unshown(self, measure: str | None) -> bool:
        """Whether a line of the gate that a reading needs on the isolated machine is not cleared."""
        rule = self.knowledge.readings.get(measure or "")
        lines = before_isolated(self.case, self.knowledge) if rule is not None else ()
        asked = [name for line in lines if rule is not None and line.id in rule.needs for name in line.asks]
        return any(self.sheet.observations.get(name) is not True for name in asked)

    # what it means

    def weigh(self) -> Weighed:
        """Return the answer to the case as it stands; worked out again only when the sheet has changed."""
        sheet = self.sheet
        standing = standing_sheet(self.case, self.knowledge, datetime.now(UTC))
        weighed_from = (sheet, standing, self.use_learned)
        if self._weighed is None or weighed_from != self._weighed_from:
            before = self._weighed.diagnosis if self._weighed else None
            now = weigh(sheet, self.learned_knowledge(), name=self.number, own=self.own_windings())
            now = for_this_shift(now, self.case, self.knowledge)
            self._weighed, self._weighed_from = Weighed(now, moved(before, now)), weighed_from
        return self._weighed

    def learned_knowledge(self) -> Knowledge:
        """Return the knowledge, shifted by the shop's own confirmed cases where that is switched on."""
        return self.experience.knowledge(self.sheet.machine) if self.use_learned else self.knowledge

    def learned_words(self) -> str:
        """Return the sentence that says by what the odds were shifted, if they were."""
        return self.experience.words(self.sheet.machine) if self.use_learned else ""

    def own_windings(self) -> dict[str, tuple[float, ...]]:
        """Return what this machine's sound windings read in earlier cases, at 25 degC. [ohm]"""
        return self.experience.own_windings(self.sheet.machine.tag)

    def learned_shifts(self) -> tuple[Shift, ...]:
        """Return what the shop's own confirmed cases move, whether that is switched on or not."""
        return self.experience.shifts(self.sheet.machine)

    def turns(self) -> tuple[Turn, ...]:
        """Return the readings that would turn the decision; takes some tenths of a second, once a sheet."""
        from rules.diagnosing import what_would_turn

        sheet = self.sheet
        if self._turns is None or self._turns[:2] != (sheet, self.use_learned):
            now = what_would_turn(sheet, knowledge=self.learned_knowledge(), own=self.own_windings())
            self._turns = (sheet, self.use_learned, now)
        return self._turns[2]

    def close(self, closing: bodies.Closed) -> str:
        """Close the case with what was found; what the screen said at that moment is kept with it."""
        return self._put(bodies.Shown.of(self.weigh().diagnosis, program=VERSION), closing)

    def reopen(self, why: str) -> str:
        """Go on with a closed case."""
        return self._put(bodies.Reopened(why=why))

    def _put(self, *entries: bodies.Body) -> str:
        """Write entries, all or none; they are on disk when this returns the id of the last."""
        made = self.book.record(self.case.id, *entries, person=self.person)
        self.refresh()
        return made[-1].id

    def _band(self, key: str) -> Band | None:
        """Return the band that was last worked out for ``measure@state``."""
        bands = self._weighed.diagnosis.expected if self._weighed else ()
        return next((band for band in bands if f"{band.measure}@{band.state}" == key), None)

    def taken(self, understood: Understood) -> bodies.ReadingTaken:
        """Return a reading as it is logged: with the band that was shown and the limit that it crosses."""
        reading = understood.reading
        band = self._band(reading.key)
        alone = msgspec.structs.replace(self.sheet, readings=(reading,))
        crossed = next(iter(findings(alone, self.knowledge)), None)
        return bodies.ReadingTaken(
            reading=reading,
            expected=band_text(band) if band else "",
            limit=crossed.says if crossed else "",
            source=crossed.source if crossed else "",
        )


def weigh(
    sheet: CaseSheet,
    knowledge: Knowledge,
    *,
    name: str = "",
    own: Mapping[str, Sequence[float]] | None = None,
) -> Diagnosis:
    """Weigh one sheet. The engine is loaded at the first call."""
    from rules.diagnosing import diagnose

    return diagnose(sheet, knowledge=knowledge, name=name, own=own)


def moved(before: Diagnosis | None, now: Diagnosis) -> dict[str, float]:
    """Return by how much each fault's probability moved from one answer to the next."""
    later = {fault.id: fault.probability for fault in now.faults}
    if before is None:
        return dict.fromkeys(later, 0.0)
    earlier = {fault.id: fault.probability for fault in before.faults}
    return {fault: later.get(fault, 0.0) - earlier.get(fault, 0.0) for fault in earlier | later}
