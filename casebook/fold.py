"""A case is the fold of its entries; nothing about it is stored anywhere else.

``fold_case`` depends on the set of entries alone, not on the order in which they came.
"""

from __future__ import annotations

from collections.abc import Iterable
from datetime import datetime
from typing import Any, Generic, Literal, TypeVar

import msgspec

from calc.sheet import CaseSheet, Machine, Nameplate, Reading, Supply
from casebook import bodies as b
from casebook.entry import Entry, canonical_json, decode_body
from casebook.numbers import full_number, shown_number
from casebook.order import in_order

Status = Literal["open", "closed"]
T = TypeVar("T")


class Logged(msgspec.Struct, Generic[T], frozen=True, kw_only=True):
    """Something that an entry says, with who said it and when."""

    what: T
    entry: Entry

    @property
    def person(self) -> str:
        """Who wrote it."""
        return self.entry.person

    @property
    def time_utc(self) -> datetime:
        """When it was written."""
        return self.entry.time_utc


class Line(msgspec.Struct, frozen=True, kw_only=True):
    """One entry as it is read today: its body after corrections, and what corrected it."""

    entry: Entry
    body: b.Body
    struck: bool = False
    corrected_by: str | None = None
    clock_set_back: bool = False


class Case(msgspec.Struct, frozen=True, kw_only=True):
    """A case as its entries tell it, corrections applied."""

    id: str
    lines: tuple[Line, ...] = ()
    status: Status = "open"
    complaint: str = ""
    machine: Machine = Machine(kind="")
    kit: tuple[str, ...] | None = None
    readings: tuple[Logged[b.ReadingTaken], ...] = ()
    observed: dict[str, Logged[b.Observed]] = {}
    isolation: tuple[Logged[b.Isolation], ...] = ()
    hazards: tuple[Logged[b.HazardAcknowledged], ...] = ()
    skipped: tuple[Logged[b.Skipped], ...] = ()
    shown: Logged[b.Shown] | None = None
    conclusion: Logged[b.Concluded] | None = None
    repairs: tuple[Logged[b.Repaired], ...] = ()
    closed: Logged[b.Closed] | None = None
    notes: tuple[Logged[b.Note], ...] = ()

    @property
    def number(self) -> str:
        """The case number with six characters; the store's rows know when more are needed."""
        return shown_number(full_number(self.id))

    @property
    def tag(self) -> str:
        """The machine's plant tag, or nothing."""
        return self.machine.tag or ""

    @property
    def opened_utc(self) -> datetime:
        """When the case began: the time of its first line."""
        return self.lines[0].entry.time_utc

    @property
    def last_utc(self) -> datetime:
        """The time of the last line."""
        return self.lines[-1].entry.time_utc

    @property
    def last_id(self) -> str:
        """The id of the last line: what a new entry comes after."""
        return self.lines[-1].entry.id

    @property
    def persons(self) -> tuple[str, ...]:
        """Who wrote to the case, each once, in the order of their first line."""
        return tuple(dict.fromkeys(line.entry.person for line in self.lines))

    @property
    def observations(self) -> dict[str, bool]:
        """What was seen: the last answer to each; answers that were taken back are left out."""
        answers = {name: logged.what.answer for name, logged in self.observed.items()}
        return {name: answer for name, answer in answers.items() if answer is not None}

    @property
    def sheet(self) -> CaseSheet:
        """The case as a case sheet, for the engine and for export."""
        return CaseSheet(
            machine=self.machine,
            complaint=self.complaint,
            readings=tuple(logged.what.reading for logged in self.readings),
            observations=self.observations,
            kit=self.kit,
        )

    @property
    def taken(self) -> tuple[Logged[Reading], ...]:
        """The readings alone, with who took them and when."""
        return tuple(Logged(what=logged.what.reading, entry=logged.entry) for logged in self.readings)


def fold_case(entries: Iterable[Entry]) -> Case:
    """Return the case that entries of one case tell. ``ValueError`` when there are none."""
    lines = effective_lines(entries)
    if not lines:
        raise ValueError("a case has at least one entry")
    fields: dict[str, Any] = {}
    for line in lines:
        if not line.struck:
            _take(fields, line)
    for name in ("readings", "isolation", "hazards", "skipped", "repairs", "notes"):
        fields[name] = tuple(fields.get(name, ()))
    return Case(id=lines[0].entry.case, lines=tuple(lines), **fields)


def fold_machine(cases: Iterable[Case]) -> Machine | None:
    """Return what is known of one machine: its cases folded, what was said last holds; None without cases.

    Another kind under the same tag is another machine: what was known of the one before is left out.
    """
    fields: dict[str, Any] = {}
    for case in sorted(cases, key=lambda case: (case.last_utc, case.id)):
        said = case.machine
        if "machine" in fields and fields["machine"].kind != said.kind:
            fields.clear()
        changes = {name: getattr(said, name) for name in said.__struct_fields__}
        unsaid = {"nameplate": Nameplate(), "supply": Supply()}
        _change(fields, {name: value for name, value in changes.items() if value != unsaid.get(name)})
    return fields.get("machine")


def effective_lines(entries: Iterable[Entry]) -> list[Line]:
    """Return the lines of a case in reading order, each with its body after corrections."""
    held = list(entries)
    bodies = {entry.id: entry.body for entry in held}
    names = {key: body.names for key, body in bodies.items() if isinstance(body, b.Correction)}
    ordered = in_order(held, names)
    overrides = _overrides(ordered, bodies)
    lines: list[Line] = []
    latest: datetime | None = None
    for entry in ordered:
        by, body = overrides.get(entry.id, (None, bodies[entry.id]))
        lines.append(
            Line(
                entry=entry,
                body=body if body is not None else bodies[entry.id],
                struck=body is None,
                corrected_by=by,
                clock_set_back=latest is not None and entry.time_utc < latest,
            )
        )
        latest = entry.time_utc if latest is None else max(latest, entry.time_utc)
    return lines


def _overrides(ordered: list[Entry], bodies: dict[str, b.Body]) -> dict[str, tuple[str, b.Body | None]]:
    """Map a corrected entry's id to its correction and new body (None: struck out).

    The newest correction of an entry holds. Going backwards, a correction that was
    itself corrected or struck out is known to be so before it is applied.
    """
    kinds = {entry.id: entry.kind for entry in ordered}
    overrides: dict[str, tuple[str, b.Body | None]] = {}
    for entry in reversed(ordered):
        _, body = overrides.get(entry.id, (None, bodies[entry.id]))
        if not isinstance(body, b.Correction) or body.names not in kinds or body.names in overrides:
            continue
        if body.names == entry.id:
            continue
        overrides[body.names] = (entry.id, _instead(kinds[body.names], body))
    return overrides


def _instead(kind: str, correction: b.Correction) -> b.Body | None:
    if correction.instead is None:
        return None
    return decode_body(kind, canonical_json(correction.instead))


def _take(fields: dict[str, Any], line: Line) -> None:  # noqa: PLR0912  (one branch per kind)
    """Let one line change the case so far."""
    logged: Logged[Any] = Logged(what=line.body, entry=line.entry)
    match line.body:
        case b.Opened() as opened:
            fields["complaint"] = opened.complaint
            _change(fields, {"kind": opened.kind, "tag": opened.tag})
        case b.NameplateRead(nameplate=nameplate):
            _change(fields, {"nameplate": nameplate})
        case b.MachineFacts() as facts:
            _change(fields, {name: getattr(facts, name) for name in facts.__struct_fields__})
        case b.KitCarried(kit=kit):
            fields["kit"] = kit
        case b.ReadingTaken():
            fields.setdefault("readings", []).append(logged)
        case b.Observed(observation=name):
            fields.setdefault("observed", {})[name] = logged
        case b.Isolation():
            fields.setdefault("isolation", []).append(logged)
        case b.HazardAcknowledged():
            fields.setdefault("hazards", []).append(logged)
        case b.Skipped():
            fields.setdefault("skipped", []).append(logged)
        case b.Shown():
            fields["shown"] = logged
        case b.Concluded():
            fields["conclusion"] = logged
        case b.Repaired():
            fields.setdefault("repairs", []).append(logged)
        case b.Closed():
            fields["closed"] = logged
            fields["status"] = "closed"
        case b.Reopened():
            fields["closed"] = None
            fields["status"] = "open"
        case b.Note():
            fields.setdefault("notes", []).append(logged)


def _change(fields: dict[str, Any], said: dict[str, Any]) -> None:
    """Set what is said of the machine; what is None stays as it was."""
    machine = fields.get("machine", Machine(kind=""))
    changes = {name: value for name, value in said.items() if value is not None}
    fields["machine"] = msgspec.structs.replace(machine, **changes)
