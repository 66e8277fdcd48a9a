"""Say where a shop's own rule is looser than the shipped one that it replaces.

What cannot be shown to be at least as tight counts as looser: a wrong alarm costs a
sentence on the screen, a missed one a limit.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from itertools import pairwise
from typing import Final

from rules.amounts import amount, is_amount
from rules.knowledge import Complaint, Entry, Fault, GateRule, Hazard, Limit, Observation, ReadingRule
from rules.limit_bands import band_of, in_unit

SEVERITY: Final = {"normal": 0, "remark": 1, "watch": 2, "stop": 3}


def loosened_by(shipped: Entry, own: Entry) -> tuple[str, ...]:
    """Return a sentence for everything that a shop's entry loosens in the one it replaces."""
    return tuple(f"{shipped.name}: own rules {what}" for what in _looser(shipped, own))


def _looser(old: Entry, new: Entry) -> Iterator[str]:
    if isinstance(old, Limit) and isinstance(new, Limit):
        yield from _limit(old, new)
    elif isinstance(old, Hazard) and isinstance(new, Hazard):
        yield from _hazard(old, new)
    elif isinstance(old, GateRule) and isinstance(new, GateRule):
        yield from _gate(old, new)
    elif isinstance(old, Complaint) and isinstance(new, Complaint):
        yield from _complaint(old, new)
    elif isinstance(old, Fault) and isinstance(new, Fault):
        yield from _fault(old, new)
    elif isinstance(old, Observation) and isinstance(new, Observation):
        yield from _observation(old, new)
    elif isinstance(old, ReadingRule) and isinstance(new, ReadingRule):
        yield from _reading(old, new)


def _limit(old: Limit, new: Limit) -> Iterator[str]:
    if new.status == "retired" and old.status != "retired":
        yield "retire the limit"
    if new.quantity != old.quantity:
        yield f"judge {new.quantity} instead of {old.quantity}"
    yield from _narrower(old.kinds, new.kinds, "machine kinds")
    yield from _narrower(old.states, new.states, "states")
    yield from _narrower(old.shuts, new.shuts, "states that it shuts")
    yield from _more_conditions(old.where, new.where)
    for value in _probes(old, new):
        before, after = band_of(old, value), band_of(new, value)
        if SEVERITY[after.verdict] < SEVERITY[before.verdict]:
            shown = in_unit(old, value)
            yield f"call {shown} {after.verdict} where the shipped limit says {before.verdict}"
            return


def _probes(*limits: Limit) -> list[float]:
    """Return values between all boundaries, beyond them, on them and just beside."""
    ends = sorted(
        {amount(end) for limit in limits for band in limit.bands for end in (band.below, band.above)
         if end is not None and is_amount(end)}
    )  # fmt: skip
    beside = [end + sign * max(abs(end), 1e-9) * 1e-6 for end in ends for sign in (-1.0, 0.0, 1.0)]
    between = [(low + high) / 2.0 for low, high in pairwise(ends)]
    far = [ends[0] - 1.0 - abs(ends[0]), ends[-1] + 1.0 + abs(ends[-1])] if ends else [0.0]
    return [*between, *far, *beside]


def _hazard(old: Hazard, new: Hazard) -> Iterator[str]:
    if new.precaution != old.precaution:
        yield "reword the precaution"
    yield from _narrower(old.kinds, new.kinds, "machine kinds")
    for name in ("states", "measures", "faults"):
        yield from _fewer(getattr(old, name), getattr(new, name), name)
    yield from _more_conditions(old.when, new.when)


def _gate(old: GateRule, new: GateRule) -> Iterator[str]:
    yield from _narrower(old.kinds, new.kinds, "machine kinds")
    yield from _more_conditions(old.where, new.where)
    yield from _fewer(old.guards, new.guards, "guarded states")
    yield from _fewer(old.clears, new.clears, "checks")
    if set(new.asks) - set(old.asks):
        yield "let other entries clear the line"
    for name, words in (
        ("found_running_clears", "clear the line for a machine found running"),
        ("overload_trip_clears", "clear the line after an overload trip"),
    ):
        if getattr(new, name) and not getattr(old, name):
            yield words
    for fault, odds in old.suspects.items():
        if new.suspects.get(fault, 2.0) > odds:
            yield f"let odds of {fault} rise further before the gate shuts"


def _complaint(old: Complaint, new: Complaint) -> Iterator[str]:
    if old.stop and not new.stop:
        yield "no longer stop at this complaint"
    if new.runs == "yes" and old.runs != "yes":
        yield "take a machine with this complaint as found running"


def _fault(old: Fault, new: Fault) -> Iterator[str]:
    if old.forbids_energising and not new.forbids_energising:
        yield "no longer forbid energising with this fault"
    yield from _fewer(old.before_energising, new.before_energising, "gate lines")
    yield from _fewer(old.cautions, new.cautions, "cautions")


def _observation(old: Observation, new: Observation) -> Iterator[str]:
    yield from _fewer(old.hazards, new.hazards, "hazards")


def _reading(old: ReadingRule, new: ReadingRule) -> Iterator[str]:
    yield from _fewer(old.needs, new.needs, "conditions")
    for state, before in old.states.items():
        after = new.states.get(state)
        if after is not None:
            yield from _fewer(before.hazards, after.hazards, f"hazards in state {state}")


def _narrower(old: tuple[str, ...], new: tuple[str, ...], what: str) -> Iterator[str]:
    if "any" not in new and ("any" in old or set(old) - set(new)):
        yield f"hold for fewer {what}"


def _fewer(old: tuple[str, ...], new: tuple[str, ...], what: str) -> Iterator[str]:
    if missing := sorted(set(old) - set(new)):
        yield f"leave out {what}: {', '.join(missing)}"


def _more_conditions(old: Mapping[str, str], new: Mapping[str, str]) -> Iterator[str]:
    if any(new[name] != old.get(name) for name in new):
        yield "hold under other conditions"
