"""The casebook as a person uses it: open a case, record, look up, list, search.

Every method that records returns only when the entries are on the disk.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from datetime import datetime, timedelta
from pathlib import Path

import msgspec

from calc.sheet import CaseSheet, Machine
from casebook.bodies import Body, Correction, bodies_of_sheet
from casebook.entry import Entry, clean_line, encode_body, make_entry, new_id
from casebook.errors import AmbiguousCase, BadEntry, UnknownCase
from casebook.fold import Case, fold_case, fold_machine
from casebook.history import MachineHistory, machine_history
from casebook.learned import LearnedCounts, Score, learned_counts, learned_groups, scoreboard
from casebook.numbers import SHOWN, full_number, read_number, shown_number
from casebook.place import default_path
from casebook.sqlite_store import SqliteStore
from casebook.store import CaseRow, Changes, MachineRow, Store, machine_key


class Casebook:
    """Cases and their entries, in a store."""

    def __init__(self, store: Store) -> None:
        self.store = store

    @property
    def notes(self) -> tuple[str, ...]:
        """What the person should know about this casebook: read-only, slower, readable by all."""
        return self.store.notes

    def open_case(self, bodies: Iterable[Body], *, person: str, at: datetime | None = None) -> str:
        """Start a case with some bodies (``Opened`` first) and return its id."""
        case = new_id()
        self.record(case, *bodies, person=person, at=at)
        return case

    def record(self, case: str, *bodies: Body, person: str, at: datetime | None = None) -> tuple[Entry, ...]:
        """Add entries to a case, all or none, and return them.

        ``at`` is an aware time for all of them (for records that are typed in later); else now.
        """
        if not clean_line(person):
            raise BadEntry("person", person, "a name")
        with self.store.atomic():
            after = self.store.last_id(case)
            made: list[Entry] = []
            for place, body in enumerate(bodies):
                moment = None if at is None else at + timedelta(microseconds=place)
                made.append(make_entry(body, case=case, person=person, after=after, at=moment))
                after = made[-1].id
            self.store.add(made)
        return tuple(made)

    def correct(self, case: str, names: str, instead: Body | None, *, person: str, why: str = "") -> Entry:
        """Correct an earlier entry of a case; ``instead`` None strikes it out."""
        data = None if instead is None else msgspec.json.decode(encode_body(instead))
        return self.record(case, Correction(names=names, instead=data, why=why), person=person)[0]

    def log_sheet(self, sheet: CaseSheet, person: str, *, at: datetime | None = None) -> str:
        """Put a case sheet into the casebook as a new case and return its id."""
        return self.open_case(bodies_of_sheet(sheet), person=person, at=at)

    def case(self, name: str) -> Case:
        """Return a case by its id, its number, or a unique beginning of its number."""
        entries = self.store.case_entries(self.case_id(name))
        if not entries:
            raise UnknownCase(f"there is no case {name[:40]!r}")
        return fold_case(entries)

    def case_id(self, name: str) -> str:
        """Return the id of the case that a number, a beginning of one, or an id names."""
        if len(name) == 36 and self.store.last_id(name) is not None:
            return name
        stem = read_number(name)
        found = self.store.find_cases(stem) if stem else ()
        if not found:
            raise UnknownCase(f"there is no case {name[:40]!r}")
        if len(found) > 1:
            raise AmbiguousCase(f"{len(found)} cases begin with {name[:40]!r}", candidates=found)
        return found[0]

    def number(self, case: str) -> str:
        """Return a case's number, as long as this casebook needs to tell it from the others."""
        full = full_number(case)
        return shown_number(full, tuple(map(full_number, self.store.find_cases(full[:SHOWN]))))

    def cases(self, *, limit: int = 50, before: int | None = None, status: str = "") -> list[CaseRow]:
        """Return cases, newest activity first; page with ``before``, the last row's ``place``."""
        return self.store.list_cases(limit=limit, before=before, status=status)

    def search(self, text: str, *, limit: int = 50, before: int | None = None) -> list[CaseRow]:
        """Return cases that hold every word typed, newest first; no words list all cases."""
        return self.store.search(text, limit=limit, before=before)

    def machines(self, start: str = "", *, limit: int = 20) -> list[MachineRow]:
        """Return the machines whose tag begins so."""
        return self.store.machines(start, limit=limit)

    def machine_cases(self, tag: str) -> tuple[Case, ...]:
        """Return a machine's cases, folded, oldest activity first."""
        return tuple(fold_case(self.store.case_entries(case)) for case in self.store.machine_cases(tag))

    def machine(self, tag: str) -> Machine | None:
        """Return what the casebook knows of a machine, its last plate above all; None if it knows nothing."""
        return fold_machine(self.machine_cases(tag)) if machine_key(tag) else None

    def history(self, tag: str) -> MachineHistory:
        """Return one machine's readings over time."""
        return machine_history(tag, self.machine_cases(tag))

    def learned(self, kind: str, power_w: float | None = None, *, leave_out: str = "") -> LearnedCounts:
        """Return the confirmed faults on machines of a kind and size, for the engine."""
        return learned_counts(self.store.outcomes(kind), kind=kind, power_w=power_w, leave_out=leave_out)

    def learned_groups(self, kind: str = "") -> list[LearnedCounts]:
        """Return the confirmed faults by kind and size class; of one kind, or of all."""
        return learned_groups(self.store.outcomes(kind))

    def scoreboard(self) -> list[Score]:
        """Return how well the odds did, all kinds first."""
        return scoreboard(self.store.outcomes())

    def changed_since(self, token: int) -> Changes:
        """Return which cases got entries since an earlier answer's token (0: all)."""
        return self.store.changed_since(token)

    def safe_copy(self, target: Path) -> None:
        """Write a whole and consistent copy to a new file."""
        self.store.safe_copy(target)

    def close(self) -> None:
        """Let the file go."""
        self.store.close()


@contextmanager
def open_casebook(
    path: Path | None = None, *, group: bool = False, read_only: bool = False, timeout_s: float = 30.0
) -> Iterator[Casebook]:
    """Open a casebook for as long as the block lasts; None takes the usual place."""
    store = SqliteStore(path or default_path(), group=group, read_only=read_only, timeout_s=timeout_s)
    book = Casebook(store)
    try:
        yield book
    finally:
        book.close()
