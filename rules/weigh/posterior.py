"""The odds of every fault on one sheet: readings, complaint and observations weighed together."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from calc.observe import InstrumentError, Seen, context, make_seen
from calc.sheet import CaseSheet, Reading
from calc.twin import Floats, Mode, Twin, attribute_rows
from rules.knowledge import Fault, Knowledge
from rules.weigh import soft
from rules.weigh.instruments import instrument_errors
from rules.weigh.laplace import Fit, Frame, fit_modes, frame
from rules.weigh.other import other_evidence
from rules.weigh.settings import Weighing, weighing

OTHER = "other"


@dataclass(frozen=True)
class Hypothesis:
    """One fault in one mode; ``place`` is the mode's row in the fit."""

    fault: str
    place: int
    log_weight: float


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
    direct: tuple[Reading, ...] = ()
    """Readings weighed by their spread under each fault."""
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


def split_readings(
    sheet: CaseSheet, twin: Twin, knowledge: Knowledge
) -> tuple[list[Seen], list[Reading], list[Reading]]:
    """Sort readings into those the model predicts, those with a spread per fault, and the rest.

    Of several readings of one key the last counts.
    """
    newest = {(r.key, r.at, r.position, r.links): r for r in sheet.readings}
    errors = instrument_errors(knowledge)
    healthy = knowledge.faults.get("healthy")
    seen: list[Seen] = []
    direct: list[Reading] = []
    rest: list[Reading] = []
    for reading in newest.values():
        made = None
        if twin.covers(context(reading)):
            made = make_seen(reading, twin, _error(errors, reading))
        if made is not None:
            seen.append(made)
        elif healthy is not None and soft.spread_of(healthy, None, reading.measure, reading.state):
            direct.append(reading)
        else:
            rest.append(reading)
    return seen, direct, rest


def _error(errors: Mapping[str, InstrumentError], reading: Reading) -> InstrumentError:
    return errors.get(reading.measure, InstrumentError(share=0.03))


def weigh(
    sheet: CaseSheet, knowledge: Knowledge, twin: Twin, odds: Mapping[str, float] | None = None
) -> Posterior:
    """Weigh one sheet.

    Parameters
    ----------
    sheet : CaseSheet
        What was read, seen and complained of.
    knowledge : Knowledge
        Faults, observations, complaints, readings.
    twin : Twin
        The model of this machine.
    odds : mapping, optional
        Starting odds per fault; the shipped ones of the kind where it is None.

    """
    w = weighing()
    faults = faults_of(knowledge, twin.kind)
    start = {f.id: (odds or {}).get(f.id, f.odds[twin.kind]) for f in faults}
    hypotheses, modes = hypotheses_of(faults, twin, start)
    seen, direct, rest = split_readings(sheet, twin, knowledge)
    data = frame(seen)
    fit = fit_modes(twin, modes, data)
    tables: dict[str, soft.Table] = {
        "complaint": soft.complaint_table(sheet.complaint, faults, knowledge, twin.kind, w)
    }
    for name, answer in sorted(sheet.observations.items()):
        tables[name] = soft.observation_table(name, answer, faults, knowledge, w)
    tables |= soft.direct_tables(direct, faults, knowledge, instrument_errors(knowledge), w)
    states = state_terms(sheet, knowledge, twin, modes, fit, w)
    joint = np.array(
        [
            h.log_weight + fit.evidence[h.place] + states[h.place] + sum(t[h.fault] for t in tables.values())
            for h in hypotheses
        ]
    )
    log_other = _log_other(data, twin, tables, start, w)
    return Posterior(
        sheet=sheet,
        twin=twin,
        faults=faults,
        hypotheses=hypotheses,
        modes=modes,
        data=data,
        fit=fit,
        tables=tables,
        state_terms=states,
        log_joint=joint,
        log_other=log_other,
        odds=_odds(hypotheses, joint, log_other, faults),
        direct=tuple(direct),
        unweighed=tuple(rest),
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
