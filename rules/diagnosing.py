"""One call from a case sheet to the whole answer."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import msgspec

from calc.fields import did_you_mean
from calc.kinds import twin_of
from calc.quantities import KINDS
from calc.sheet import CaseSheet
from rules.answer import Diagnosis, FaultOdds, NextItem, Turn
from rules.cautions import cautions_for, states_of, with_hazards
from rules.findings import findings
from rules.gate import gate
from rules.knowledge import Fault, Knowledge, Refinement
from rules.weigh import soft
from rules.weigh.bands import bands
from rules.weigh.conditioned import conditioned
from rules.weigh.posterior import OTHER, Posterior, faults_of, weigh
from rules.weigh.propose import propose
from rules.weigh.reasons import reasons, rival
from rules.weigh.settings import weighing
from rules.weigh.slips import slips
from rules.weigh.turning import decision_of, turns

SHOWN_REASONS = 6  # faults that get their reasons written out
SHOWN_CAUSES = 0.005  # odds from which a fault is split into its causes
NO_MODEL = "none"
_OTHER_NAME = "something else, or a reading gone wrong"


def diagnose(
    sheet: CaseSheet,
    *,
    knowledge: Knowledge,
    own: Mapping[str, Sequence[float]] | None = None,
    name: str = "",
) -> Diagnosis:
    """Weigh one case sheet.

    Parameters
    ----------
    sheet : CaseSheet
        Machine, complaint, readings, observations.
    knowledge : Knowledge
        From :func:`rules.loading.load_knowledge`, or :func:`rules.learned.with_counts` of it.
    own : mapping, optional
        What this machine's windings read before, when they were sound: measure to values at 25 degC. [ohm]
    name : str
        The sheet's path as given, for the answer.

    Returns
    -------
    Diagnosis
        A kind without a model gets limits, gate and cautions, and ``model`` says "none".

    """
    twin = twin_of(sheet.machine, sheet.readings)
    crossed = findings(sheet, knowledge)
    if twin is None or not faults_of(knowledge, sheet.machine.kind):
        state = gate(sheet, knowledge)
        kind = KINDS.get(sheet.machine.kind, sheet.machine.kind)
        return Diagnosis(
            sheet=name,
            model=NO_MODEL,
            findings=crossed,
            energise=state.energise,
            cautions=cautions_for(
                sheet, knowledge, states=("isolated",), faults=(), measures=state.energise.needs
            ),
            notes=(
                f"No model yet for a {kind}: limits and cautions only, no odds.",
                *_unknown(sheet, knowledge),
            ),
        )
    twin = conditioned(twin, own or {}, knowledge)
    posterior = weigh(sheet, knowledge, twin)
    state = gate(sheet, knowledge, suspects=posterior.odds)
    items = tuple(with_hazards(i, sheet, knowledge) for i in propose(posterior, knowledge, state))
    leading = [k for k, p in posterior.odds.items() if p > 0.1 and k not in {OTHER, "healthy"}]
    return Diagnosis(
        sheet=name,
        model=twin.kind,
        expected=bands(sheet, posterior.twin, knowledge, posterior),
        faults=fault_odds(posterior, knowledge),
        next=items,
        findings=crossed,
        energise=state.energise,
        cautions=_cautions(sheet, knowledge, items, leading),
        slips=slips(posterior),
        decision=_decision(sheet, knowledge, posterior),
        notes=(*_notes(posterior), *_unknown(sheet, knowledge)),
    )


def _cautions(
    sheet: CaseSheet, knowledge: Knowledge, items: Sequence[NextItem], leading: Sequence[str]
) -> tuple[str, ...]:
    """Every caution that what is proposed and the leading faults call for."""
    by_hand = any("isolated" in states_of(item, knowledge) for item in items)
    return cautions_for(
        sheet,
        knowledge,
        states={i.state for i in items if i.state} | ({"isolated"} if by_hand else set()),
        faults=leading,
        measures={i.measure for i in items if i.measure},
        hazards={hazard for i in items for hazard in i.hazards},
    )


def what_would_turn(
    sheet: CaseSheet, *, knowledge: Knowledge, own: Mapping[str, Sequence[float]] | None = None
) -> tuple[Turn, ...]:
    """Return the readings, with their values, that would turn the decision; empty without a model.

    Each is proved by weighing the sheet with it, so this takes some tenths of a second.
    """
    twin = twin_of(sheet.machine, sheet.readings)
    if twin is None or not faults_of(knowledge, sheet.machine.kind):
        return ()
    twin = conditioned(twin, own or {}, knowledge)
    posterior = weigh(sheet, knowledge, twin)
    items = propose(posterior, knowledge, gate(sheet, knowledge, suspects=posterior.odds))
    return turns(posterior, knowledge, items)


def expect(sheet: CaseSheet, *, knowledge: Knowledge, name: str = "") -> Diagnosis:
    """Return only what a healthy machine of this plate should read."""
    twin = twin_of(sheet.machine, sheet.readings)
    if twin is None:
        kind = KINDS.get(sheet.machine.kind, sheet.machine.kind)
        return Diagnosis(sheet=name, model=NO_MODEL, notes=(f"No model yet for a {kind}.",))
    return Diagnosis(sheet=name, model=twin.kind, expected=bands(sheet, twin, knowledge))


def fault_odds(posterior: Posterior, knowledge: Knowledge) -> tuple[FaultOdds, ...]:
    """All faults, most likely first, with reasons for those that matter."""
    order = sorted(posterior.odds.items(), key=lambda pair: (-pair[1], pair[0]))
    by_id = {f.id: f for f in posterior.faults}
    shown = []
    for place, (fault_id, probability) in enumerate(order):
        fault = by_id.get(fault_id)
        if fault is None:
            shown.append(FaultOdds(id=fault_id, probability=probability, name=_OTHER_NAME, part="other"))
            continue
        against = rival(posterior) if fault_id == "healthy" else "healthy"
        why = reasons(posterior, fault_id, against) if place < SHOWN_REASONS else ()
        shown.append(
            FaultOdds(
                id=fault_id,
                probability=probability,
                name=fault.name,
                part=fault.part,
                within=_within(fault, probability, posterior, knowledge),
                reasons=why,
            )
        )
    return tuple(shown)


def _within(
    fault: Fault, probability: float, posterior: Posterior, knowledge: Knowledge
) -> tuple[FaultOdds, ...]:
    """Causes inside a fault; together they carry at most the fault's own odds."""
    if not fault.within or probability < SHOWN_CAUSES:
        return ()
    ways = _ways(fault.id, posterior)
    left = max(1.0 - sum(r.share for r in fault.within), 0.0)
    weights = [
        _way(r, ways, posterior) * math.exp(_fits(r, fault, posterior, knowledge)) for r in fault.within
    ]
    total = sum(weights) + left
    if not total > 0.0:
        return ()
    found = [
        FaultOdds(id=r.id, probability=probability * w / total, name=r.name, part=fault.part)
        for r, w in zip(fault.within, weights, strict=True)
    ]
    return tuple(sorted(found, key=lambda f: (-f.probability, f.id)))


def _ways(fault: str, posterior: Posterior) -> dict[str, float]:
    """Probability of each cause that the circuit tells apart, given the fault."""
    share = posterior.share()
    ways: dict[str, float] = {}
    for hypothesis, p in zip(posterior.hypotheses, share, strict=True):
        if hypothesis.fault == fault:
            mode = posterior.modes[hypothesis.place]
            cause = mode.cause or mode.effect
            ways[cause] = ways.get(cause, 0.0) + float(p)
    total = sum(ways.values())
    return {cause: p / total for cause, p in ways.items()} if total > 0.0 else {}


def _way(refinement: Refinement, ways: dict[str, float], posterior: Posterior) -> float:
    """Weight of a cause: by the circuit where it tells, else its usual share."""
    if refinement.effect is None:
        return refinement.share
    # An effect that the model knows and this machine cannot show (no star-delta starter) is no cause here.
    told = len(ways) > 1 or refinement.effect in posterior.twin.effects
    return ways.get(refinement.effect, 1e-6 if told else refinement.share)


def _fits(refinement: Refinement, fault: Fault, posterior: Posterior, knowledge: Knowledge) -> float:
    """How much better a cause explains what was seen than its fault on average. [nats]"""
    own = msgspec.structs.replace(
        fault,
        observations={**fault.observations, **refinement.observations},
        complaints={**fault.complaints, **refinement.complaints},
        readings={**fault.readings, **refinement.readings},
    )
    return _soft(own, posterior, knowledge) - _soft(fault, posterior, knowledge)


def _soft(fault: Fault, posterior: Posterior, knowledge: Knowledge) -> float:
    """Log chance of complaint, observations and readings without a circuit under one form of a fault."""
    w = weighing()
    sheet, kind = posterior.sheet, posterior.twin.kind
    total = soft.complaint_table(sheet.complaint, [fault], knowledge, kind, w)[fault.id]
    for name, answer in sheet.observations.items():
        total += soft.observation_table(name, answer, [fault], knowledge, w)[fault.id]
    tables = soft.direct_tables(posterior.direct, [fault], knowledge, posterior.meters, w)
    return total + sum(table[fault.id] for table in tables.values())


def _decision(sheet: CaseSheet, knowledge: Knowledge, posterior: Posterior) -> str:
    """What the odds ask for; a complaint that means stop comes before them."""
    complaint = knowledge.complaints.get(sheet.complaint)
    if complaint is not None and complaint.stop and complaint.first:
        return complaint.first
    return decision_of(posterior)


def _notes(posterior: Posterior) -> tuple[str, ...]:
    if not posterior.unweighed:
        return ()
    names = ", ".join(sorted({r.key for r in posterior.unweighed}))
    return (f"Not weighed, kept in the log: {names}.",)


def _unknown(sheet: CaseSheet, knowledge: Knowledge) -> tuple[str, ...]:
    """Say which words of a sheet the rules do not know, so that a slip of the pen is seen."""
    words = [("Complaint", sheet.complaint, frozenset(knowledge.complaints))]
    words += [("Observation", name, frozenset(knowledge.observations)) for name in sheet.observations]
    return tuple(
        f"{what} {word} is not among the rules and was not weighed; {did_you_mean(word, known)}"
        for what, word, known in words
        if word not in known
    )
