"""What an entry of each kind holds, as types.

A body never refers to today's rules: bands, odds, limits and their sources are
written down as they were shown, so that the log can be read when they are gone.
Fields may be added with a default; none is renamed or removed.
"""

from __future__ import annotations

from typing import Any, Final, Literal, TypeAlias

import msgspec

from calc.sheet import CaseSheet, Machine, Nameplate, Reading, Supply

Confirmed = Literal["teardown", "repair", "believed"]


class Body(msgspec.Struct, frozen=True, kw_only=True):
    """Base of every body."""


class Opened(Body, frozen=True, kw_only=True):
    """A case begins: which machine, and what is wrong with it."""

    kind: str
    complaint: str
    tag: str | None = None


class NameplateRead(Body, frozen=True, kw_only=True):
    """What the plate says. A later one replaces the whole plate."""

    nameplate: Nameplate


class MachineFacts(Body, frozen=True, kw_only=True):
    """What is known of the machine beside its plate. None means "not said here"."""

    kind: str | None = None
    tag: str | None = None
    supply: Supply | None = None
    starter: str | None = None
    load_type: str | None = None
    mount: str | None = None
    hazardous_area: bool | None = None
    brake: bool | None = None
    thermal_protector: str | None = None


class KitCarried(Body, frozen=True, kw_only=True):
    """The instruments that this technician carries."""

    kit: tuple[str, ...]


class ReadingTaken(Body, frozen=True, kw_only=True):
    """One reading, with the band and the limit as they stood on the screen."""

    reading: Reading
    expected: str = ""
    limit: str = ""
    source: str = ""


class Observed(Body, frozen=True, kw_only=True):
    """One thing seen, heard or smelt: yes or no; None takes an earlier answer back."""

    observation: str
    answer: bool | None = None


class Isolation(Body, frozen=True, kw_only=True):
    """The isolation record: who isolated what, locked it out, and proved it dead on a proved tester.

    ``isolated`` false records that the isolation was lifted.
    """

    by: str
    isolated: bool = True
    points: str = ""
    locked_out: bool = False
    proved_dead: bool = False
    tester: str = ""
    tester_proved_before: bool = False
    tester_proved_after: bool = False
    note: str = ""


class HazardAcknowledged(Body, frozen=True, kw_only=True):
    """A caution that was read and acknowledged, in the words that were shown."""

    hazards: tuple[str, ...]
    about: str = ""
    shown: str = ""


class Skipped(Body, frozen=True, kw_only=True):
    """A reading or observation that cannot be taken here, and why."""

    measure: str | None = None
    state: str | None = None
    observation: str | None = None
    why: str = ""

    @property
    def key(self) -> str:
        """The id of what was skipped, such as ``line_current@loaded`` or ``hums``."""
        return self.observation or f"{self.measure}@{self.state}"


class ShownBand(msgspec.Struct, frozen=True, kw_only=True):
    """A band as it was shown, in ``unit``."""

    measure: str
    state: str
    unit: str = ""
    low: float | None = None
    mid: float | None = None
    high: float | None = None
    coverage: float = 0.9
    temperature_c: float | None = None
    speed_rpm: float | None = None


class ShownFault(msgspec.Struct, frozen=True, kw_only=True):
    """A fault with its odds as they were shown."""

    id: str
    probability: float
    name: str = ""
    within: tuple[ShownFault, ...] = ()


class ShownFinding(msgspec.Struct, frozen=True, kw_only=True):
    """A crossed limit as it was shown, with its source."""

    id: str
    verdict: str
    says: str
    source: str
    about: str = ""


class ShownGate(msgspec.Struct, frozen=True, kw_only=True):
    """The gate as it was shown."""

    gate: str = "shut"
    needs: tuple[str, ...] = ()
    because: tuple[str, ...] = ()
    says: str = ""


class Shown(Body, frozen=True, kw_only=True):
    """What the screen said at this moment."""

    expected: tuple[ShownBand, ...] = ()
    faults: tuple[ShownFault, ...] = ()
    findings: tuple[ShownFinding, ...] = ()
    energise: ShownGate = ShownGate()
    program: str = ""

    @classmethod
    def of(cls, diagnosis: object, *, program: str = "") -> Shown:
        """Take over the fields of the same names from an answer of the engine."""
        shown = msgspec.convert(diagnosis, cls, from_attributes=True)
        return msgspec.structs.replace(shown, program=program)


class Concluded(Body, frozen=True, kw_only=True):
    """What the technician concludes, before it is confirmed."""

    fault: str
    probability: float | None = None
    decision: str = ""
    note: str = ""


class Repaired(Body, frozen=True, kw_only=True):
    """What was done to the machine. ``winding_is_new``: rewound, or another machine in its place."""

    done: str
    parts: tuple[str, ...] = ()
    minutes: float | None = None
    winding_is_new: bool = False


class Closed(Body, frozen=True, kw_only=True):
    """The case ends: what was found, and how sure that is.

    Only ``teardown`` and ``repair`` count as confirmed; ``believed`` teaches nothing.
    """

    found: str
    confirmed: Confirmed = "believed"
    done: str = ""
    parts: tuple[str, ...] = ()
    minutes: float | None = None
    retest: tuple[str, ...] = ()
    """What is to be read again, as ``measure@state``."""
    retested: tuple[ReadingTaken, ...] = ()
    """What was read again after the repair; no evidence on the fault."""
    winding_is_new: bool = False
    note: str = ""


class Reopened(Body, frozen=True, kw_only=True):
    """A closed case goes on."""

    why: str = ""


class Correction(Body, frozen=True, kw_only=True):
    """An earlier entry was wrong: ``instead`` is its body as it should be; None strikes it out."""

    names: str
    instead: dict[str, Any] | None = None
    why: str = ""


class Note(Body, frozen=True, kw_only=True):
    """Free text."""

    text: str


class Words(Body, frozen=True, kw_only=True):
    """A body that this program has no type for: kept as it is, and shown as words."""

    data: dict[str, Any]


BODY_OF_KIND: Final[dict[str, type[Body]]] = {
    "opened": Opened,
    "nameplate": NameplateRead,
    "machine": MachineFacts,
    "kit": KitCarried,
    "reading": ReadingTaken,
    "observation": Observed,
    "isolation": Isolation,
    "hazard_acknowledged": HazardAcknowledged,
    "skipped": Skipped,
    "shown": Shown,
    "conclusion": Concluded,
    "repair": Repaired,
    "closed": Closed,
    "reopened": Reopened,
    "correction": Correction,
    "note": Note,
}
KIND_OF_BODY: Final = {body: kind for kind, body in BODY_OF_KIND.items()}
BODY_VERSION: Final = 1

Bodies: TypeAlias = tuple[Body, ...]


def bodies_of_sheet(sheet: CaseSheet) -> Bodies:
    """Return the bodies that, folded in this order, give the sheet back."""
    machine = sheet.machine
    bodies: list[Body] = [Opened(kind=machine.kind, complaint=sheet.complaint, tag=machine.tag)]
    if machine.nameplate != Nameplate():
        bodies.append(NameplateRead(nameplate=machine.nameplate))
    facts = facts_of_machine(machine)
    if facts != MachineFacts():
        bodies.append(facts)
    if sheet.kit is not None:
        bodies.append(KitCarried(kit=sheet.kit))
    bodies += [ReadingTaken(reading=reading) for reading in sheet.readings]
    bodies += [Observed(observation=name, answer=answer) for name, answer in sheet.observations.items()]
    return tuple(bodies)


def facts_of_machine(machine: Machine) -> MachineFacts:
    """Return what a machine says beside its plate, kind and tag."""
    return MachineFacts(
        supply=machine.supply if machine.supply != Supply() else None,
        starter=machine.starter,
        load_type=machine.load_type,
        mount=machine.mount,
        hazardous_area=machine.hazardous_area,
        brake=machine.brake,
        thermal_protector=machine.thermal_protector,
    )
