"""The shop's own confirmed cases shift starting odds and chances; what is shipped counts as a few cases.

Counts come in as plain values. They never open a gate: the gate does not look at odds except to shut.
"""

from __future__ import annotations

from collections.abc import Mapping

import msgspec

from rules.knowledge import Fault, Knowledge
from rules.weigh.posterior import faults_of
from rules.weigh.settings import weighing


class Counts(msgspec.Struct, frozen=True, kw_only=True):
    """Confirmed cases of one machine kind.

    ``faults`` counts cases per fault; ``complaints[fault][complaint]`` and
    ``observations[fault][observation]`` (yes, no) count what was noted in them.
    """

    faults: Mapping[str, float] = {}
    complaints: Mapping[str, Mapping[str, float]] = {}
    observations: Mapping[str, Mapping[str, tuple[float, float]]] = {}


def with_counts(knowledge: Knowledge, kind: str, counts: Counts) -> Knowledge:
    """Return knowledge whose odds and chances for a kind are shifted by confirmed cases.

    Odds are the mean of a Dirichlet distribution, chances the mean of a Beta distribution, both starting
    at the shipped tables with the weight of ``learned_weight`` cases (``weigh/weighing.yaml``).
    """
    if not any(counts.faults.values()):
        return knowledge
    weight = weighing().learned_weight
    faults = faults_of(knowledge, kind)
    odds = {f.id: f.odds[kind] for f in faults}
    parents = {r.id: f.id for f in faults for r in f.within}
    known: dict[str, float] = {}
    for fault, count in counts.faults.items():
        parent = fault if fault in odds else parents.get(fault)
        if parent is not None:
            known[parent] = known.get(parent, 0.0) + count
    total, cases = sum(odds.values()), sum(known.values())
    shifted = dict(knowledge.faults)
    for fault in faults:
        share = (weight * odds[fault.id] / total + known.get(fault.id, 0.0)) / (weight + cases)
        whole = knowledge.faults[fault.id]
        chances = _chances(fault, knowledge, counts, weight)
        shifted[fault.id] = msgspec.structs.replace(
            whole,
            odds={**whole.odds, kind: max(share * total, 1e-6)},
            observations_by_kind={
                **whole.observations_by_kind,
                kind: chances,
            },
            complaints_by_kind={**whole.complaints_by_kind, kind: _complaints(fault, counts, weight)},
        )
    return msgspec.structs.replace(knowledge, faults=shifted)


def _chances(fault: Fault, knowledge: Knowledge, counts: Counts, weight: float) -> dict[str, float]:
    chances = dict(fault.observations)
    for name, (yes, no) in counts.observations.get(fault.id, {}).items():
        known = knowledge.observations.get(name)
        if known is not None:
            shipped = chances.get(name, known.base_rate)
            chances[name] = (weight * shipped + yes) / (weight + yes + no)
    return chances


def _complaints(fault: Fault, counts: Counts, weight: float) -> dict[str, float]:
    noted = counts.complaints.get(fault.id, {})
    total = sum(noted.values())
    names = {*fault.complaints, *noted}
    return {
        name: (weight * fault.complaints.get(name, 0.0) + noted.get(name, 0.0)) / (weight + total)
        for name in sorted(names)
    }
