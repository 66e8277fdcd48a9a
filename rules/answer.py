"""The answer for one case sheet, as types; ``tui.jsonout`` writes it as the contract has it."""

from __future__ import annotations

from typing import Literal

import msgspec


class Band(msgspec.Struct, frozen=True, kw_only=True):
    """What the healthy machine should read: 90 % of such machines lie between low and high.

    Numbers are in ``unit``, the usual unit of the measure. ``temperature_c`` or
    ``speed_rpm`` is the condition that the band is for, where there is one.
    """

    measure: str
    state: str
    low: float
    mid: float
    high: float
    unit: str
    coverage: float = 0.9
    temperature_c: float | None = None
    speed_rpm: float | None = None


class Reason(msgspec.Struct, frozen=True, kw_only=True):
    """What one piece of evidence says about a fault against a healthy machine.

    ``weight`` is in nats: positive speaks for the fault. The weights of all
    reasons of a fault add up to the logarithm of its odds against healthy.
    """

    about: str
    text: str
    weight: float
    read: str = ""
    expected: str = ""


class FaultOdds(msgspec.Struct, frozen=True, kw_only=True):
    """One fault with its odds, and why."""

    id: str
    probability: float
    name: str = ""
    part: str = ""
    within: tuple[FaultOdds, ...] = ()
    reasons: tuple[Reason, ...] = ()


class NextItem(msgspec.Struct, frozen=True, kw_only=True):
    """One reading or observation worth taking next."""

    measure: str | None = None
    state: str | None = None
    observation: str | None = None
    gain_bits: float = 0.0
    minutes: float = 0.0
    leads: str = ""
    hazards: tuple[str, ...] = ()
    why: str = ""
    expect: str = ""
    sees: str = ""

    @property
    def key(self) -> str:
        """The id of the item, such as ``line_current@loaded`` or ``hums``."""
        return self.observation if self.observation else f"{self.measure}@{self.state}"


Verdict = Literal["remark", "watch", "stop"]


class Finding(msgspec.Struct, frozen=True, kw_only=True):
    """A published limit that a reading crosses. It speaks by itself, whatever the odds say."""

    id: str
    verdict: Verdict
    says: str
    source: str
    about: str = ""


class GateLine(msgspec.Struct, frozen=True, kw_only=True):
    """One line of the list that stands before energising: what is needed, and what cleared or shut it."""

    id: str
    needs: str
    status: Literal["needed", "cleared", "forbids"]
    because: str = ""
    asks: tuple[str, ...] = ()


class Energise(msgspec.Struct, frozen=True, kw_only=True):
    """The gate. It starts shut, and says at most that nothing recorded forbids energising."""

    gate: Literal["shut", "no_finding_forbids"]
    needs: tuple[str, ...] = ()
    because: tuple[str, ...] = ()
    """What forbids, each entry once, although several lines may rest on it."""
    lines: tuple[GateLine, ...] = ()
    says: str = ""


class Turn(msgspec.Struct, frozen=True, kw_only=True):
    """The one reading and value that would turn the decision."""

    measure: str
    state: str
    value: str
    from_decision: str
    to_decision: str
    text: str


class Slip(msgspec.Struct, frozen=True, kw_only=True):
    """A reading that is bad under every fault: a likely slip, and what may have happened."""

    about: str
    text: str


class Diagnosis(msgspec.Struct, frozen=True, kw_only=True):
    """The whole answer for one sheet."""

    sheet: str = ""
    model: str = "none"
    expected: tuple[Band, ...] = ()
    faults: tuple[FaultOdds, ...] = ()
    next: tuple[NextItem, ...] = ()
    findings: tuple[Finding, ...] = ()
    energise: Energise = Energise(gate="shut")
    cautions: tuple[str, ...] = ()
    slips: tuple[Slip, ...] = ()
    decision: str = ""
    """What the odds ask to be done, in words; no permission."""
    turns: tuple[Turn, ...] = ()
    plate_remarks: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
