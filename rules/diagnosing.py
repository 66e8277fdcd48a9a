"""One call from a case sheet to the whole answer."""

from __future__ import annotations

import math
from collections.abc import Mapping

import msgspec

from calc.kinds import twin_of
from calc.quantities import KINDS
from calc.sheet import CaseSheet
from rules.answer import Band, Diagnosis, FaultOdds
from rules.cautions import cautions_for
from rules.findings import findings
from rules.gate import gate
from rules.knowledge import Fault, Knowledge, Refinement
from rules.weigh import soft
from rules.weigh.bands import bands
from rules.weigh.posterior import OTHER, Posterior, faults_of, weigh
from rules.weigh.propose import propose
from rules.weigh.reasons import reasons, rival
from rules.weigh.settings import weighing
from rules.weigh.slips import slips

SHOWN_REASONS = 6  # faults that get their reasons written out
NO_MODEL = "none"
_OTHER_NAME = "something else, or a reading gone wrong"


def diagnose(
    sheet: CaseSheet,
    *,
    knowledge: Knowledge,
    odds: Mapping[str, float] | None = None,
    name: str = "",
) -> Diagnosis:
    """Weigh one case sheet.

    Parameters
    ----------
    sheet : CaseSheet
        Machine, complaint, readings, observations.
    knowledge : Knowledge
        From :func:`rules.loading.load_knowledge`.
    odds : mapping of str to float, optional
        Starting odds per fault where the shop's own confirmed cases shift them.
    name : str
        The sheet's path as given, for the answer.

    Returns
    -------
    Diagnosis
        A kind without a model gets limits, gate and cautions, and ``model`` says "none".

    """
    twin = twin_of(sheet.machine)
    crossed = findings(sheet, knowledge)
    if twin is None or not faults_of(knowledge, sheet.machine.kind):
        state = gate(sheet, knowledge)
        kind = KINDS.get(sheet.machine.kind, sheet.machine.kind)
        return Diagnosis(
            sheet=name,
            model=NO_MODEL,
            findings=crossed,
            energise=state.energise,
            cautions=cautions_for(sheet, knowledge, states=(), faults=()),
            notes=(f"No model yet for a {kind}: limits and cautions only, no odds.",),
        )
    posterior = weigh(sheet, knowledge, twin, odds)
    state = gate(sheet, knowledge, suspects=posterior.odds)
    items = propose(posterior, knowledge, state)
    leading = [k for k, p in posterior.odds.items() if p > 0.1 and k not in {OTHER, "healthy"}]
    return Diagnosis(
        sheet=name,
        model=twin.kind,
        expected=bands(sheet, twin, knowledge, posterior),
        faults=fault_odds(posterior, knowledge),
        next=items,
        findings=crossed,
        energise=state.energise,
        cautions=cautions_for(
            sheet,
            knowledge,
            states=tuple(dict.fromkeys(i.state for i in items[:3] if i.state)),
            faults=tuple(leading),
        ),
        slips=slips(posterior),
        notes=_notes(posterior),
    )


def expect(sheet: CaseSheet, *, knowledge: Knowledge, name: str = "") -> Diagnosis:
    """Return only what a healthy machine of this plate should read."""
    twin = twin_of(sheet.machine)
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
    if not fault.within:
        return ()
    left = max(1.0 - sum(r.share for r in fault.within), 0.0)
    weights = [r.share * math.exp(_fits(r, fault, posterior, knowledge)) for r in fault.within]
    total = sum(weights) + left
    found = [
        FaultOdds(id=r.id, probability=probability * w / total, name=r.name, part=fault.part)
        for r, w in zip(fault.within, weights, strict=True)
    ]
    return tuple(sorted(found, key=lambda f: (-f.probability, f.id)))


def _fits(refinement: Refinement, fault: Fault, posterior: Posterior, knowledge: Knowledge) -> float:
    """How much better a cause explains complaint and observations than its fault on average. [nats]"""
    own = msgspec.structs.replace(
        fault,
        observations={**fault.observations, **refinement.observations},
        complaints={**fault.complaints, **refinement.complaints},
        readings={**fault.readings, **refinement.readings},
    )
    w = weighing()
    sheet, kind = posterior.sheet, posterior.twin.kind
    gain = 0.0
    for one, sign in ((own, 1.0), (fault, -1.0)):
        gain += sign * soft.complaint_table(sheet.complaint, [one], knowledge, kind, w)[fault.id]
        for name, answer in sheet.observations.items():
            gain += sign * soft.observation_table(name, answer, [one], knowledge, w)[fault.id]
    return gain


def _notes(posterior: Posterior) -> tuple[str, ...]:
    if not posterior.unweighed:
        return ()
    names = ", ".join(sorted({r.key for r in posterior.unweighed}))
    return (f"Not weighed, kept in the log: {names}.",)


def bands_only(sheet: CaseSheet, knowledge: Knowledge) -> tuple[Band, ...]:
    """Bands of a healthy machine of this plate; empty where its kind has no model."""
    return expect(sheet, knowledge=knowledge).expected
