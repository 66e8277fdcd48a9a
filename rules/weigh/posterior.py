"""The odds of every fault on one sheet: readings, complaint and observations weighed together."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from calc.observe import InstrumentError
from calc.sheet import CaseSheet, Reading
from calc.twin import Floats, Mode, Twin, attribute_rows
from rules.knowledge import Fault, Knowledge
from rules.weigh import soft
from rules.weigh.fitting import fit_modes
from rules.weigh.frame import Frame, frame
from rules.weigh.hypothesis import Hypothesis
from rules.weigh.instruments import instrument_errors
from rules.weigh.laplace import Fit, join_fits
from rules.weigh.metered import MeteredTwin, repeatability
from rules.weigh.other import other_evidence
from rules.weigh.pairs import make_pairs
from rules.weigh.settings import PairSettings, Weighing, weighing
from rules.weigh.sorting import newest, split_readings

OTHER = "other"


@dataclass(frozen=True)
class Posterior:
    """What a sheet says, in full: every term by itself, for reasons and next readings."""

    sheet: CaseSheet
    twin: Twin
    faults: tuple[Fault, ...]
    hypotheses: tuple[Hypothesis, ...]
    modes: tuple[Mode, ...]
    data: Frame
    fit: Fit
    tables: Mapping[str, soft.Table]
    state_terms: Floats
    """Log chance of the states that readings were noted in, per mode."""
    log_joint: Floats
    """Log odds of each hypothesis before they are made to sum to one."""
    log_other: float
    odds: Mapping[str, float]
    """Probability of every fault and of ``other``; sums to one."""
    meters: Mapping[str, InstrumentError]
    """What the usual instrument of each measure may be off by."""
    direct: tuple[Reading, ...] = ()
    """Readings weighed by their spread under each fault."""
    texts: Mapping[str, str] = field(default_factory=dict)
    """What was typed for each reading that was weighed, by its key."""
    unweighed: tuple[Reading, ...] = ()
    """Readings that neither the model nor any fault says anything about."""

    def share(self) -> Floats:
        """Probability of each hypothesis, (hypotheses,); what is missing to one is ``other``."""
        top = max(float(self.log_joint.max()), self.log_other)
        weights = np.exp(self.log_joint - top)
        return np.asarray(weights / (weights.sum() + math.exp(self.log_other - top)))


def faults_of(knowledge: Knowledge, kind: str) -> tuple[Fault, ...]:
    """Faults that a machine kind can have, healthy first."""
    chosen = [
        f.for_kind(kind)
        for f in knowledge.faults.values()
        if f.odds.get(kind, 0.0) > 0.0 and f.status != "retired"
    ]
    return tuple(sorted(chosen, key=lambda f: (f.id != "healthy", f.id)))


def hypotheses_of(
    faults: Sequence[Fault], twin: Twin, odds: Mapping[str, float]
) -> tuple[tuple[Hypothesis, ...], tuple[Mode, ...]]:
    """Every fault in every mode; faults that change nothing in the circuit share the healthy mode's fit."""
    modes: list[Mode] = []
    places: dict[object, int] = {}
    found: list[Hypothesis] = []
    for fault in faults:
        uses = fault.effects.get(twin.kind) or fault.effects.get("any") or ()
        known = [use for use in uses if use.name in twin.effects]
        found_modes = [(use.weight, twin.modes(use.name, use.severity)) for use in known]
        total = sum(weight for weight, modes_of in found_modes if modes_of)
        pairs = [(mode, weight / total) for weight, modes_of in found_modes for mode in modes_of]
        for mode, share in pairs or [(m, 1.0) for m in twin.modes("none")]:
            token = (tuple(sorted(mode.fixed.items())), mode.severity)
            place = places.setdefault(token, len(modes))
            if place == len(modes):
                modes.append(mode)
            weight = math.log(odds[fault.id]) + math.log(max(mode.weight * share, 1e-9))
            found.append(Hypothesis(fault=fault.id, place=place, log_weight=weight))
    return tuple(found), tuple(modes)


def weigh(sheet: CaseSheet, knowledge: Knowledge, twin: Twin) -> Posterior:
    """Weigh one sheet.

    Parameters
    ----------
    sheet : CaseSheet
        What was read, seen and complained of.
    knowledge : Knowledge
        Faults, observations, complaints, readings.
    twin : Twin
        The model of this machine.

    """
    w = weighing()
    faults = faults_of(knowledge, twin.kind)
    start = {f.id: f.odds[twin.kind] for f in faults}
    hypotheses, modes = hypotheses_of(faults, twin, start)
    errors = instrument_errors(knowledge)
    twin = twin if isinstance(twin, MeteredTwin) else MeteredTwin(twin, errors)
    meters = repeatability(errors)
    seen, direct, rest = split_readings(sheet, twin, knowledge, meters)
    data = frame(seen)
    case = Case(sheet, knowledge, twin, data, tuple(direct), meters)
    single = _weighed(case, faults, hypotheses, modes)
    log_other = _log_other(data, twin, single.tables, start, w)
    both = _pairs(case, single, start, log_other)
    whole = single if both is None else _together(single, both)
    return Posterior(
        sheet=sheet,
        twin=twin,
        faults=whole.faults,
        hypotheses=whole.hypotheses,
        modes=whole.modes,
        data=data,
        fit=whole.fit,
        tables=whole.tables,
        state_terms=whole.states,
        log_joint=whole.joint,
        log_other=log_other,
        odds=_odds(whole.hypotheses, whole.joint, log_other, whole.faults),
        meters=meters,
        direct=tuple(direct),
        texts={r.key: soft.reading_text(r) for r in newest(sheet)},
        unweighed=tuple(rest),
    )


@dataclass(frozen=True)
class Case:
    """What is weighed: the sheet, and its readings made ready."""

    sheet: CaseSheet
    knowledge: Knowledge
    twin: Twin
    data: Frame
    direct: tuple[Reading, ...]
    meters: Mapping[str, InstrumentError]


@dataclass(frozen=True)
class Weighed:
    """Faults with their hypotheses, fits and log odds."""

    faults: tuple[Fault, ...]
    hypotheses: tuple[Hypothesis, ...]
    modes: tuple[Mode, ...]
    fit: Fit
    tables: Mapping[str, soft.Table]
    states: Floats
    joint: Floats


def _weighed(
    case: Case, faults: tuple[Fault, ...], hypotheses: tuple[Hypothesis, ...], modes: tuple[Mode, ...]
) -> Weighed:
    """Fit all modes and add up what every hypothesis has for it."""
    w, kind = weighing(), case.twin.kind
    sheet, knowledge = case.sheet, case.knowledge
    fit = fit_modes(case.twin, modes, case.data)
    tables: dict[str, soft.Table] = {
        "complaint": soft.complaint_table(sheet.complaint, faults, knowledge, kind, w)
    }
    for name, answer in sorted(sheet.observations.items()):
        tables[name] = soft.observation_table(name, answer, faults, knowledge, w)
    tables |= soft.direct_tables(case.direct, faults, knowledge, case.meters, w)
    states = state_terms(sheet, knowledge, case.twin, modes, fit, w)
    joint = np.array(
        [
            h.log_weight + fit.evidence[h.place] + states[h.place] + sum(t[h.fault] for t in tables.values())
            for h in hypotheses
        ]
    )
    return Weighed(faults, hypotheses, modes, fit, tables, states, joint)


def _pairs(case: Case, single: Weighed, start: Mapping[str, float], log_other: float) -> Weighed | None:
    """Two faults at once, where no single one explains everything that was noted; None where one does."""
    s = weighing().pairs
    if not strained(single.fit, case.data, single, log_other, s):
        return None
    found = make_pairs(single.faults, single.hypotheses, single.modes, single.joint, start, s)
    if not found:
        return None
    hypotheses = tuple(
        Hypothesis(fault=pair.fault.id, place=place, log_weight=pair.log_weight)
        for place, pair in enumerate(found)
    )
    faults = tuple({pair.fault.id: pair.fault for pair in found}.values())
    both = _weighed(case, faults, hypotheses, tuple(pair.mode for pair in found))
    return both if both.joint.max() > max(float(single.joint.max()), log_other) + s.margin_nats else None


def strained(fit: Fit, data: Frame, single: Weighed, log_other: float, s: PairSettings) -> bool:
    """Whether the best single fault leaves something unexplained that another fault explains."""
    best = int(np.argmax(single.joint))
    if log_other > single.joint[best]:
        return True
    lead = single.hypotheses[best]
    r = (data.y - fit.predicted[lead.place]) / data.sigma
    worst = max((float((r[g] ** 2).mean()) for g in data.groups), default=0.0)
    if worst > s.strained_sigmas**2:
        return True
    return any(max(t.values()) - t[lead.fault] > s.strained_nats for t in single.tables.values())


def _together(one: Weighed, other: Weighed) -> Weighed:
    """Two sets of hypotheses as one."""
    shift = len(one.modes)
    moved = tuple(Hypothesis(h.fault, h.place + shift, h.log_weight) for h in other.hypotheses)
    return Weighed(
        faults=one.faults + other.faults,
        hypotheses=one.hypotheses + moved,
        modes=one.modes + other.modes,
        fit=join_fits(one.fit, other.fit),
        tables={name: {**table, **other.tables[name]} for name, table in one.tables.items()},
        states=np.concatenate([one.states, other.states]),
        joint=np.concatenate([one.joint, other.joint]),
    )


def state_terms(
    sheet: CaseSheet, knowledge: Knowledge, twin: Twin, modes: Sequence[Mode], fit: Fit, w: Weighing
) -> Floats:
    """Log chance, per mode, that readings were noted in the states in which they were."""
    rows = attribute_rows(modes, fit.z[:, None, :], twin.defaults)
    possible = twin.possible(fit.z, rows)
    terms = np.zeros(len(modes))
    states = {r.state for r in sheet.readings} - {"isolated", "standby", "coasting"}
    for state in sorted(states & set(possible)):
        floor = w.standing_reading if state == "stalled" else w.impossible_state
        terms += np.log(np.maximum(possible[state], floor))
    complaint = knowledge.complaints.get(sheet.complaint)
    if complaint is not None and complaint.runs == "yes" and not states & {"loaded", "no_load", "light_load"}:
        terms += np.log(np.maximum(possible["loaded"], w.impossible_state))
    return terms


def _log_other(
    data: Frame, twin: Twin, tables: Mapping[str, soft.Table], start: Mapping[str, float], w: Weighing
) -> float:
    return (
        math.log(w.other_odds)
        + other_evidence(twin, data)
        + soft.mean_table(list(tables.values()), start)
        + w.other_soft_nats
    )


def _odds(
    hypotheses: Sequence[Hypothesis], joint: Floats, log_other: float, faults: Sequence[Fault]
) -> dict[str, float]:
    top = max(float(joint.max()), log_other)
    odds = {fault.id: 0.0 for fault in faults}
    for hypothesis, value in zip(hypotheses, joint, strict=True):
        odds[hypothesis.fault] += math.exp(value - top)
    odds[OTHER] = math.exp(log_other - top)
    total = sum(odds.values())
    return {name: value / total for name, value in odds.items()}
