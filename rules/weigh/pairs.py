"""Two faults at once: the leading single faults joined two by two, as faults of their own."""

from __future__ import annotations

import itertools
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import msgspec

from calc.twin import Floats, Mode
from rules.knowledge import Fault, Spread
from rules.weigh.hypothesis import Hypothesis
from rules.weigh.settings import PairSettings
from rules.weigh.soft import shape


@dataclass(frozen=True)
class Pair:
    """Two faults as one, in one mode."""

    fault: Fault
    mode: Mode
    log_weight: float


def make_pairs(
    faults: Sequence[Fault],
    hypotheses: Sequence[Hypothesis],
    modes: Sequence[Mode],
    joint: Floats,
    start: Mapping[str, float],
    s: PairSettings,
) -> list[Pair]:
    """Join the leading faults two by two, each in its best mode.

    The chance of both is that of each by itself, times ``s.together``: faults seldom come together by chance,
    but one may bring the other.
    """
    by_id = {f.id: f for f in faults}
    best: dict[str, int] = {}
    for i, h in enumerate(hypotheses):
        if h.fault != "healthy" and (h.fault not in best or joint[i] > joint[best[h.fault]]):
            best[h.fault] = i
    leading = sorted(best, key=lambda fault: (-joint[best[fault]], fault))[: s.faults]
    total = sum(start.values())
    healthy = by_id.get("healthy")
    found = []
    for a, b in itertools.combinations(sorted(leading), 2):
        mode = merged(modes[hypotheses[best[a]].place], modes[hypotheses[best[b]].place])
        if mode is None or healthy is None:
            continue
        weight = math.log(start[a]) + math.log(start[b] / total) + math.log(s.together)
        weight += math.log(max(modes[hypotheses[best[a]].place].weight, 1e-3))
        weight += math.log(max(modes[hypotheses[best[b]].place].weight, 1e-3))
        found.append(Pair(fault=joined(by_id[a], by_id[b], healthy), mode=mode, log_weight=weight))
    return found


def merged(one: Mode, other: Mode) -> Mode | None:
    """Both modes at once, or None where they set the same attribute to different values."""
    clash = [
        name
        for name in set(one.fixed) & set(other.fixed)
        if one.fixed[name] != other.fixed[name] and name not in {"delta"}
    ]
    names = {s.attribute for s in one.severity}
    if clash or names & {s.attribute for s in other.severity}:
        return None
    return Mode(
        effect=f"{one.effect}+{other.effect}",
        variant="; ".join(v for v in (one.variant, other.variant) if v),
        weight=one.weight * other.weight,
        fixed={**one.fixed, **other.fixed},
        severity=one.severity[:1] + other.severity[:1],
    )


def joined(one: Fault, other: Fault, healthy: Fault) -> Fault:
    """Two faults as one: of each chance and spread the one that differs more from the healthy machine's."""
    complaints = {
        c: 0.5 * (one.complaints.get(c, 0.0) + other.complaints.get(c, 0.0))
        for c in sorted({*one.complaints, *other.complaints})
    }
    observations = {
        name: _farther(
            one.observations.get(name), other.observations.get(name), healthy.observations.get(name)
        )
        for name in sorted({*one.observations, *other.observations})
    }
    readings = {
        key: _wider(one.readings.get(key), other.readings.get(key), healthy.readings.get(key))
        for key in sorted({*one.readings, *other.readings})
    }
    return msgspec.structs.replace(
        one,
        id="+".join(sorted((one.id, other.id))),
        name=f"{one.name}; and {other.name}",
        complaints=complaints,
        observations=observations,
        readings=readings,
        within=(),
        forbids_energising=one.forbids_energising or other.forbids_energising,
        cautions=tuple(dict.fromkeys(one.cautions + other.cautions)),
    )


def _logit(chance: float) -> float:
    return math.log(chance / (1.0 - chance))


def _farther(one: float | None, other: float | None, usual: float | None) -> float:
    given = [c for c in (one, other) if c is not None]
    middle = _logit(usual) if usual is not None else 0.0
    return max(given, key=lambda c: abs(_logit(min(max(c, 0.001), 0.999)) - middle))


def _wider(one: Spread | None, other: Spread | None, usual: Spread | None) -> Spread:
    given = [s for s in (one, other) if s is not None]
    if len(given) == 1 or usual is None:
        return given[0]
    centre = shape(usual)[1]
    return max(given, key=lambda s: abs(shape(s)[1] - centre))
