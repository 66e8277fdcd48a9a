"""What the trade knows, as types. The YAML files beside this one are decoded into these.

Probabilities and odds are judgement unless their ``source`` says otherwise.
"""

from __future__ import annotations

from typing import Literal

import msgspec

from calc.quantities import MEASURES


class Entry(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """Head of every entry: an id, a plain sentence or name, and where it comes from."""

    id: str
    name: str
    source: str


class EffectUse(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A physical change of the machine model that a fault makes.

    ``name`` is an effect of the kind's model in ``calc``; ``severity`` is the range of
    its severity (meaning and unit: the effect's own), spread evenly in the logarithm.
    """

    name: str
    severity: tuple[float, float] | None = None
    weight: float = 1.0


class Spread(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """How a reading that no circuit predicts is spread: log-normal or normal.

    ``median`` is text with a unit. Give either ``factor``, one sigma of the log-normal
    as a ratio, or ``sigma``, one of the normal as text with a unit. Of a reading with
    three values it is the spread of the worst.
    """

    median: str
    factor: float | None = None
    sigma: str | None = None


class Refinement(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A cause inside a fault, shown within it. ``share`` is its part of the parent's odds."""

    id: str
    name: str
    share: float
    shares: dict[str, float] = {}
    """Per machine kind, where it differs from ``share``; 0 means that it does not occur there."""
    observations: dict[str, float] = {}
    complaints: dict[str, float] = {}
    readings: dict[str, Spread] = {}
    effect: str | None = None
    confirm: str = ""
    remedy: str = ""


class Example(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """Evidence on a given machine that must lead to the fault, or must not."""

    leads: bool
    says: str
    sheet: dict[str, object]


Part = Literal[
    "none", "supply", "control gear", "protection", "connection", "winding", "rotor", "armature",
    "field", "commutator", "capacitor", "start switch", "bearings", "mounting", "coupling", "cooling",
    "load", "brake", "other",
]  # fmt: skip


class Fault(Entry, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """One fault of some machine kinds."""

    part: Part
    odds: dict[str, float]
    """Starting odds per machine kind, relative to the others of that kind."""
    effects: dict[str, tuple[EffectUse, ...]] = {}
    """Per machine kind (or ``any``); empty means no electrical effect."""
    complaints: dict[str, float] = {}
    """Chance of each complaint given this fault; what is not listed shares what is left."""
    observations: dict[str, float] = {}
    """Chance of "yes"; what is not listed has the observation's base rate."""
    complaints_by_kind: dict[str, dict[str, float]] = {}
    """Per machine kind, the complaints to use instead."""
    observations_by_kind: dict[str, dict[str, float]] = {}
    """Per machine kind, observations whose chance differs from ``observations``."""
    readings: dict[str, Spread] = {}
    """Readings that no circuit predicts: ``measure`` or ``measure@state``."""
    within: tuple[Refinement, ...] = ()
    confirm: str = ""
    remedy: str = ""
    before_energising: tuple[str, ...] = ()
    """What must be shown first: ids of gate lines."""
    retest: tuple[str, ...] = ()
    """Readings to repeat after the repair, as ``measure@state``."""
    forbids_energising: bool = False
    cautions: tuple[str, ...] = ()
    status: Literal["draft", "checked", "retired"] = "draft"
    examples: tuple[Example, ...] = ()

    def for_kind(self, kind: str) -> Fault:
        """Return the fault as it shows on a machine kind: its own chances, shares and readings in place."""
        shares = {part.id: part.shares.get(kind, part.share) for part in self.within}
        total = sum(shares.values()) or 1.0
        within = (
            msgspec.structs.replace(part, share=shares[part.id] / total, shares={})
            for part in self.within
            if shares[part.id] > 0.0
        )
        return msgspec.structs.replace(
            self,
            complaints=self.complaints_by_kind.get(kind, self.complaints),
            complaints_by_kind={},
            observations={**self.observations, **self.observations_by_kind.get(kind, {})},
            observations_by_kind={},
            within=tuple(within),
            retest=tuple(key for key in self.retest if _suits(key, kind)),
        )


class Observation(Entry, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """Something seen, heard or smelt, answered with yes or no. ``name`` is the question."""

    kinds: tuple[str, ...] = ("any",)
    base_rate: float
    """Chance of "yes" where no fault asks for it."""
    minutes: float
    states: tuple[str, ...] = ("any",)
    """States in which it can be seen; ``any``, ``isolated`` (by hand), or running ones."""
    proposed: bool = True
    reliability: float = 0.95
    """How often the answer is what was there."""
    hazards: tuple[str, ...] = ()
    how: str = ""


class Complaint(Entry, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """What is wrong, in the words of whoever calls."""

    kinds: tuple[str, ...] = ("any",)
    runs: Literal["yes", "no", "until_trip", "unknown"]
    """Whether a machine with this complaint is found running."""
    stop: bool = False
    """Comes before everything else; nothing energised is read."""
    first: str = ""
    """What to do first, in one sentence."""
    also: tuple[str, ...] = ()
    """Other words by which it is looked for."""


class Hazard(Entry, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A danger, and its precaution in one sentence."""

    precaution: str
    kinds: tuple[str, ...] = ("any",)
    states: tuple[str, ...] = ()
    measures: tuple[str, ...] = ()
    faults: tuple[str, ...] = ()
    when: dict[str, str] = {}
    """Facts of the machine that call for it, such as ``hazardous_area: yes`` or ``load: hoist``."""


class ReadingState(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """How a measure is taken in one state."""

    leads: str
    minutes: float
    hazards: tuple[str, ...] = ()
    proposed: bool = True


class ReadingRule(Entry, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """How one measure is read: leads per state, instrument, error, plausible range."""

    instruments: tuple[str, ...]
    """Any one of these will do; nothing is proposed that the kit cannot read. ``eyes`` is always there."""
    states: dict[str, ReadingState]
    accuracy_percent: float
    """One sigma of the usual instrument, of the reading."""
    floor: str = ""
    """One sigma near zero, as text with a unit."""
    contrast_percent: float | None = None
    """One sigma between the three values of one reading, taken with the same meter."""
    lead: str = ""
    """Lead resistance of the two-lead method, as text."""
    plausible: tuple[str, str] | None = None
    """Outside this range the value is asked about once."""
    needs: tuple[str, ...] = ()
    """Lines of the gate that stand before the reading even on the isolated machine."""
    context: tuple[str, ...] = ()
    """What to note with it: ``temperature``, ``test_voltage``, ``speed``."""
    kinds: tuple[str, ...] = ("any",)


class LimitBand(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """One band of a limit, read from the top: ``below`` or ``above`` is where it ends, text with a unit."""

    below: str | None = None
    above: str | None = None
    verdict: Literal["normal", "remark", "watch", "stop"]
    id: str = ""
    says: str = ""


class LimitExample(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A value and the verdict it must get."""

    value: str
    verdict: Literal["normal", "remark", "watch", "stop"]
    where: dict[str, str] = {}


class Limit(Entry, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A published limit on a quantity that is read, or derived from what is read (``quantity`` names it)."""

    kinds: tuple[str, ...] = ("any",)
    quantity: str
    states: tuple[str, ...] = ("any",)
    where: dict[str, str] = {}
    """Facts of machine or reading: ``mount: rigid``, ``power: "15..300 kW"``, ``insulation_class: F`` …"""
    bands: tuple[LimitBand, ...]
    shuts: tuple[str, ...] = ("any",)
    """States that stay shut while a band of verdict ``stop`` stands."""
    clause: str = ""
    looked_up: bool = False
    """False: from memory."""
    status: Literal["draft", "checked", "retired"] = "draft"
    examples: tuple[LimitExample, ...] = ()


class GateRule(Entry, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """One line that must be cleared before a machine is energised. ``name`` says what is needed."""

    kinds: tuple[str, ...] = ("any",)
    where: dict[str, str] = {}
    guards: tuple[str, ...]
    """States that stay shut until it is cleared; ``isolated``: before readings whose ``needs`` name it."""
    asks: tuple[str, ...]
    """Readings (``measure@state``) and observations that clear it."""
    clears: tuple[str, ...] = ()
    """Named checks in ``rules/gate_checks.py``; all must hold on the recorded entries."""
    found_running_clears: bool = False
    """A machine found running shows this by running, unless it tripped or was repaired."""
    overload_trip_clears: bool = False
    """Not asked after an overload trip with no breaker, fuse or earth trip on record."""
    suspects: dict[str, float] = {}
    """Faults, and the odds from which one of them shuts the guarded states."""


class Knowledge(msgspec.Struct, frozen=True, kw_only=True):
    """All of rules/, by id."""

    faults: dict[str, Fault]
    observations: dict[str, Observation]
    complaints: dict[str, Complaint]
    readings: dict[str, ReadingRule]
    limits: dict[str, Limit]
    hazards: dict[str, Hazard]
    gates: dict[str, GateRule]
    loosened: tuple[str, ...] = ()
    """Sentences on what a shop's own rules have loosened; shown on every screen and sheet."""
    folders: tuple[str, ...] = ()


def _suits(key: str, kind: str) -> bool:
    """Whether ``measure@state`` can be read on a machine kind; a measure of the shop's own suits any."""
    measure = MEASURES.get(key.partition("@")[0])
    return measure is None or measure.suits(kind)
