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


class Shift(msgspec.Struct, frozen=True, kw_only=True):
    """How one chance was moved: a starting share, or the chance of a complaint or observation.

    ``about`` is the complaint or observation, nothing for the starting share of the fault.
    ``cases`` is how many confirmed cases of the fault had something to say about it.
    """

    fault: str
    about: str = ""
    before: float
    after: float
    cases: float


def with_counts(knowledge: Knowledge, kind: str, counts: Counts) -> Knowledge:
    """Return knowledge whose odds and chances for a kind are shifted by confirmed cases.

    Odds are the mean of a Dirichlet distribution, chances the mean of a Beta distribution, both starting
    at the shipped tables with the weight of ``learned_weight`` cases (``weigh/weighing.yaml``). A cause
    inside a fault counts for the fault; a fault that is not known for the kind counts for nothing.
    """
    faults = faults_of(knowledge, kind)
    known = _of_known_faults(faults, counts)
    cases = sum(known.faults.values())
    if not cases > 0.0:
        return knowledge
    weight = weighing().learned_weight
    total = sum(fault.odds[kind] for fault in faults)
    shifted = dict(knowledge.faults)
    for fault in faults:
        share = (weight * fault.odds[kind] / total + known.faults.get(fault.id, 0.0)) / (weight + cases)
        whole = knowledge.faults[fault.id]
        chances = _chances(fault, knowledge, known, weight)
        complaints = _complaints(fault, known, weight)
        shifted[fault.id] = msgspec.structs.replace(
            whole,
            odds={**whole.odds, kind: share * total},
            observations_by_kind={**whole.observations_by_kind, kind: chances},
            complaints_by_kind={**whole.complaints_by_kind, kind: complaints},
        )
    return msgspec.structs.replace(knowledge, faults=shifted)


def shifts(knowledge: Knowledge, kind: str, counts: Counts) -> tuple[Shift, ...]:
    """Return what counts move for a kind, the largest change first: starting shares, then chances."""
    shifted = with_counts(knowledge, kind, counts)
    if shifted is knowledge:
        return ()
    after = {fault.id: fault for fault in faults_of(shifted, kind)}
    before = faults_of(knowledge, kind)
    known = _of_known_faults(before, counts)
    total = sum(fault.odds[kind] for fault in before)
    shares = [
        Shift(
            fault=fault.id,
            before=fault.odds[kind] / total,
            after=after[fault.id].odds[kind] / total,
            cases=known.faults.get(fault.id, 0.0),
        )
        for fault in before
    ]
    chances = [one for fault in before for one in _noted(fault, after[fault.id], knowledge, known)]
    return tuple(_by_size(shares) + _by_size(chances))


def _by_size(found: list[Shift]) -> list[Shift]:
    moved = [one for one in found if abs(one.after - one.before) > 1e-9]
    return sorted(moved, key=lambda one: (-abs(one.after - one.before), one.fault, one.about))


def _noted(fault: Fault, after: Fault, knowledge: Knowledge, known: Counts) -> list[Shift]:
    """Chances of what was noted in the confirmed cases of a fault, before and after."""
    found = []
    for name, (yes, no) in known.observations.get(fault.id, {}).items():
        if name in knowledge.observations:
            before = fault.observations.get(name, knowledge.observations[name].base_rate)
            moved = Shift(
                fault=fault.id, about=name, before=before, after=after.observations[name], cases=yes + no
            )
            found.append(moved)
    for name, count in known.complaints.get(fault.id, {}).items():
        before = fault.complaints.get(name, 0.0)
        found.append(
            Shift(fault=fault.id, about=name, before=before, after=after.complaints[name], cases=count)
        )
    return found


def _of_known_faults(faults: tuple[Fault, ...], counts: Counts) -> Counts:
    """Return counts by the faults of a kind alone, causes added to the fault that holds them."""
    holder = {part.id: fault.id for fault in faults for part in fault.within}
    holder |= {fault.id: fault.id for fault in faults}
    cases: dict[str, float] = {}
    complaints: dict[str, dict[str, float]] = {}
    answers: dict[str, dict[str, tuple[float, float]]] = {}
    for name, fault in holder.items():
        if name in counts.faults:
            cases[fault] = cases.get(fault, 0.0) + counts.faults[name]
        for complaint, count in counts.complaints.get(name, {}).items():
            noted = complaints.setdefault(fault, {})
            noted[complaint] = noted.get(complaint, 0.0) + count
        for observation, (yes, no) in counts.observations.get(name, {}).items():
            told = answers.setdefault(fault, {})
            before = told.get(observation, (0.0, 0.0))
            told[observation] = (before[0] + yes, before[1] + no)
    return Counts(faults=cases, complaints=complaints, observations=answers)


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
