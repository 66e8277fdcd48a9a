"""The next reading worth taking: information about fault and repair, per minute and hazard.

For every reading and observation that is possible, allowed by the gate and within the kit, the
leading hypotheses predict what it would show. The mutual information between that and the fault
(and, with half the weight, the part of the machine) is estimated by fixed quasi-random draws from
the mixture, and divided by minutes and hazard (D. V. Lindley, Ann. Math. Stat. 27 (1956) 986).
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from calc.quantities import RUNNING_STATES
from calc.sheet import CaseSheet
from calc.twin import Ask
from rules.answer import NextItem
from rules.gate import GateState, situation_of
from rules.knowledge import Knowledge, Observation, ReadingRule
from rules.weigh import wording
from rules.weigh.gate_asks import gate_items, within_kit
from rules.weigh.information import Leading, binary_information, leading
from rules.weigh.posterior import Posterior
from rules.weigh.predict import Outlook, outlooks
from rules.weigh.settings import ProposalSettings, weighing
from rules.weigh.sight import smallest_seen
from rules.weigh.soft import answer_chance
from rules.weigh.worth import gains, told_apart, told_apart_by_answer, view

SEEN_FOR = 3  # proposals that say what the meter can show


@dataclass(frozen=True)
class Candidate:
    """One reading or observation that could be taken, and what it is worth."""

    score: float
    gain: float
    minutes: float
    key: str
    rule: ReadingRule | None = None
    state: str = ""
    look: Outlook | None = None
    known: Observation | None = None
    pair: tuple[int, int] = (0, 0)
    """The leading hypotheses, by place, that it does most to tell apart."""
    behind_gate: bool = False
    """The gate keeps its state shut; it is not proposed, but tells what the gate's lines are worth."""


def propose(
    posterior: Posterior, knowledge: Knowledge, gate: GateState, limit: int = 12
) -> tuple[NextItem, ...]:
    """Return what is worth taking next, best first; empty when nothing is worth its minutes."""
    s = weighing().proposal
    lead = leading(posterior, s)
    found = [
        *_readings(posterior, knowledge, gate, lead, s),
        *_observations(posterior, knowledge, gate, lead, s),
    ]
    worth = sorted(
        (c for c in found if c.gain >= s.least_bits * math.log(2.0)), key=lambda c: (-c.score, c.key)
    )
    open_items = [c for c in worth if not c.behind_gate]
    items = [
        _item(c, posterior, knowledge, lead, sees=place < SEEN_FOR)
        for place, c in enumerate(open_items[:limit])
    ]
    return tuple(_with_gate(items, worth, posterior, knowledge, gate)[:limit])


def _with_gate(
    items: list[NextItem],
    worth: Sequence[Candidate],
    posterior: Posterior,
    knowledge: Knowledge,
    gate: GateState,
) -> list[NextItem]:
    """Add what the gate still needs where a reading behind it is worth taking; first, if worth much more."""
    behind = next((c for c in worth if c.behind_gate), None)
    if behind is None:
        return items
    have = {item.key for item in items}
    needed = [i for i in gate_items(posterior.sheet, knowledge, gate, behind.state) if i.key not in have]
    best = next((c.score for c in worth if not c.behind_gate), 0.0)
    return needed + items if behind.score > 2.0 * best else items + needed


def _item(
    candidate: Candidate, posterior: Posterior, knowledge: Knowledge, lead: Leading, *, sees: bool
) -> NextItem:
    why = wording.why(candidate.pair, lead, posterior)
    bits = round(candidate.gain / math.log(2.0), 4)
    if candidate.known is not None:
        known = candidate.known
        return NextItem(
            observation=known.id,
            gain_bits=bits,
            minutes=candidate.minutes,
            leads=known.how or known.name,
            hazards=known.hazards,
            why=why,
        )
    if candidate.rule is None:
        raise TypeError(candidate)
    how = candidate.rule.states[candidate.state]
    measure, state = candidate.rule.id, candidate.state
    return NextItem(
        measure=measure,
        state=state,
        gain_bits=bits,
        minutes=candidate.minutes,
        leads=how.leads,
        hazards=how.hazards,
        why=why,
        expect=wording.expect(candidate.look, candidate.pair, lead, posterior, knowledge, candidate.key),
        sees=smallest_seen(posterior, candidate.look, lead.hypotheses) if sees and candidate.look else "",
    )


def _readings(
    posterior: Posterior,
    knowledge: Knowledge,
    gate: GateState,
    lead: Leading,
    s: ProposalSettings,
) -> list[Candidate]:
    sheet, twin = posterior.sheet, posterior.twin
    taken = {r.key for r in sheet.readings}
    chances: dict[str, float] = {}
    kept_from_running = s.found_standing if found_standing(sheet, knowledge, s) else 1.0
    for state, flags in lead.possible.items():
        running = kept_from_running if state in RUNNING_STATES else 1.0
        chances[state] = float(lead.share @ flags) * running
    candidates = []
    for rule in knowledge.readings.values():
        if not within_kit(rule, sheet, twin.kind):
            continue
        for state, how in rule.states.items():
            key = f"{rule.id}@{state}"
            chance = state_chance(sheet, state, chances, s)
            if key in taken or not how.proposed or chance < s.least_chance:
                continue
            candidates.append((rule, state, chance))
    asks = [_context(sheet, Ask(rule.id, state)) for rule, state, _ in candidates]
    covered = [ask for ask in asks if twin.covers(ask)]
    modes = [posterior.modes[h.place] for h in lead.hypotheses]
    z = posterior.fit.z[[h.place for h in lead.hypotheses]]
    looks = {look.ask.key: look for look in outlooks(twin, modes, z, covered, dict(posterior.meters))}
    views = [
        view(posterior, knowledge, lead, looks.get(ask.key), rule, state)
        for (rule, state, _), ask in zip(candidates, asks, strict=True)
    ]
    found = []
    told = zip(candidates, asks, views, gains(views, lead, s), strict=True)
    for (rule, state, chance), ask, one, gain in told:
        how = rule.states[state]
        minutes = how.minutes + arranging(sheet, state, s)
        there = twin.chance_of_part(ask) if ask.key in looks else 1.0
        score = chance * there * gain / ((minutes + s.overhead_minutes) * _hazard(how.hazards, s))
        found.append(
            Candidate(
                score=score,
                gain=gain,
                minutes=minutes,
                key=ask.key,
                rule=rule,
                state=state,
                look=looks.get(ask.key),
                pair=(0, 0) if one is None else told_apart(one, lead),
                behind_gate=shut(state, sheet, knowledge, gate),
            )
        )
    return found


def shut(state: str, sheet: CaseSheet, knowledge: Knowledge, gate: GateState) -> bool:
    """Whether the gate keeps a reading from being proposed: by its state, or by the start that it takes."""
    if gate.forbids(state):
        return True
    if state not in RUNNING_STATES or any(r.state == state for r in sheet.readings):
        return False
    runs_now = state == "loaded" and situation_of(sheet, knowledge) == "found_running"
    return not runs_now and gate.forbids("starting")


def found_standing(sheet: CaseSheet, knowledge: Knowledge, s: ProposalSettings) -> bool:
    """Whether it probably cannot be read running: it is said so, or several readings hold none of it."""
    complaint = knowledge.complaints.get(sheet.complaint)
    if complaint is None or complaint.runs == "yes":
        return False
    ran = any(r.state in RUNNING_STATES for r in sheet.readings)
    return not ran and (complaint.runs == "no" or len(sheet.readings) >= s.telling_readings)


def state_chance(sheet: CaseSheet, state: str, chances: Mapping[str, float], s: ProposalSettings) -> float:
    """Chance that the machine can be in a state: what was recorded in it shows that it can."""
    if any(r.state == state for r in sheet.readings):
        return 1.0
    return chances.get(state, 0.0) * s.access.get(state, 1.0)


def arranging(sheet: CaseSheet, state: str, s: ProposalSettings) -> float:
    """Minutes to bring the machine into a state; none where something was read in it already."""
    if any(r.state == state for r in sheet.readings):
        return 0.0
    return s.arrange_minutes.get(state, 0.0)


def _context(sheet: CaseSheet, ask: Ask) -> Ask:
    """Put to a reading the condition in which it would be taken now."""
    if ask.state == "isolated" and ask.measure.endswith("resistance"):
        noted = [r.temperature.number for r in sheet.readings if r.temperature and r.state == "isolated"]
        return replace(ask, temperature_c=noted[-1] if noted else None)
    if ask.state == "spun":
        return replace(ask, speed_rpm=sheet.machine.nameplate.number("speed"))
    return ask


def _hazard(hazards: Sequence[str], s: ProposalSettings) -> float:
    return 1.0 + s.hazard_cost * len(hazards)


def _observations(
    posterior: Posterior, knowledge: Knowledge, gate: GateState, lead: Leading, s: ProposalSettings
) -> list[Candidate]:
    sheet = posterior.sheet
    found = []
    by_id = {f.id: f for f in posterior.faults}
    for known in knowledge.observations.values():
        if known.id in sheet.observations or not known.proposed:
            continue
        if not ("any" in known.kinds or sheet.machine.kind in known.kinds):
            continue
        chance = _can_see(known, sheet, gate, lead, s)
        if chance < s.least_chance:
            continue
        yes = np.array([answer_chance(known, by_id[h.fault], True) for h in lead.hypotheses])
        gain = binary_information(yes, lead, s)
        score = chance * gain / ((known.minutes + s.overhead_minutes) * _hazard(known.hazards, s))
        pair = told_apart_by_answer(yes, lead)
        found.append(
            Candidate(score=score, gain=gain, minutes=known.minutes, key=known.id, known=known, pair=pair)
        )
    return found


def _can_see(
    known: Observation, sheet: CaseSheet, gate: GateState, lead: Leading, s: ProposalSettings
) -> float:
    """Chance that the machine is in a state in which this can be seen, and is allowed to be."""
    if "any" in known.states or "isolated" in known.states:
        return 1.0
    none = np.zeros(len(lead.share))
    odds = {state: float(lead.share @ lead.possible.get(state, none)) for state in known.states}
    chances = [state_chance(sheet, state, odds, s) for state in known.states if not gate.forbids(state)]
    return max(chances, default=0.0)
