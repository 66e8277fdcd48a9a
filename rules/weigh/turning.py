"""What would change the verdict: the one reading and value that turns the decision, proved by weighing it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import msgspec
import numpy as np

from calc.quantities import MEASURES
from calc.sheet import CaseSheet, Reading, Value
from calc.twin import Ask, Twin
from calc.values import parse_value
from rules.answer import NextItem, Turn
from rules.knowledge import Knowledge
from rules.weigh.posterior import OTHER, Posterior, weigh
from rules.weigh.predict import in_usual_unit, outlooks
from rules.weigh.settings import weighing
from rules.weigh.soft import shape, spread_of
from rules.weigh.wording import figure, title, values_of

_TRIED = 5  # proposals that are looked at
_SHOWN = 3
_OPEN_OHM = 1e8  # a supposed winding above this is typed as open


@dataclass(frozen=True)
class Supposed:
    """A reading or an answer that is supposed, with its text."""

    sheet: CaseSheet
    measure: str
    state: str
    value: str


def decision_of(posterior: Posterior) -> str:
    """The decision that the odds ask for: of all parts of the machine the likeliest, in words."""
    return max(_decisions(posterior).items(), key=lambda pair: (pair[1], pair[0]))[0]


def _decisions(posterior: Posterior) -> dict[str, float]:
    words = weighing().decisions
    parts = {f.id: f.part for f in posterior.faults}
    totals: dict[str, float] = {}
    for fault, p in posterior.odds.items():
        by_fault = words.get(fault) if fault != OTHER else words["other"]
        decision = by_fault or words.get(parts.get(fault, "other"), words["other"])
        totals[decision] = totals.get(decision, 0.0) + p
    return totals


def turns(
    posterior: Posterior,
    knowledge: Knowledge,
    items: tuple[NextItem, ...],
) -> tuple[Turn, ...]:
    """Return readings that would turn the decision; each was weighed with its value and did.

    Parameters
    ----------
    posterior : Posterior
        The odds as they stand.
    items : tuple of NextItem
        What could be read next, best first.

    """
    now = decision_of(posterior)
    found: list[Turn] = []
    for item in items[:_TRIED]:
        for supposed in _suppositions(posterior, knowledge, item, now):
            then = decision_of(weigh(supposed.sheet, knowledge, posterior.twin))
            if then != now:
                found.append(_turn(supposed, now, then))
                break
        if len(found) == _SHOWN:
            break
    return tuple(found)


def _turn(supposed: Supposed, now: str, then: str) -> Turn:
    key = f"{supposed.measure}@{supposed.state}" if supposed.state else supposed.measure
    return Turn(
        measure=supposed.measure,
        state=supposed.state,
        value=supposed.value,
        from_decision=now,
        to_decision=then,
        text=f"{title(key)} of {supposed.value} would turn it from: {now}, to: {then}",
    )


def _suppositions(posterior: Posterior, knowledge: Knowledge, item: NextItem, now: str) -> Iterator[Supposed]:
    """What the leading faults of other decisions would show in a reading."""
    sheet = posterior.sheet
    if item.observation is not None:
        for answer, word in ((True, "yes"), (False, "no")):
            seen = {**sheet.observations, item.observation: answer}
            yield Supposed(msgspec.structs.replace(sheet, observations=seen), item.observation, "", word)
        return
    measure, state = item.measure or "", item.state or ""
    for fault in _rivals(posterior, now):
        values = _value_under(posterior, knowledge, fault, measure, state)
        if values is not None:
            reading = Reading(measure=measure, state=state, values=values)
            text = " / ".join(v.text for v in values)
            supposed = msgspec.structs.replace(sheet, readings=(*sheet.readings, reading))
            yield Supposed(supposed, measure, state, text)


def _rivals(posterior: Posterior, now: str) -> list[str]:
    """The likeliest fault of each other decision, likeliest first."""
    words = weighing().decisions
    parts = {f.id: f.part for f in posterior.faults}
    best: dict[str, str] = {}
    for fault, _ in sorted(posterior.odds.items(), key=lambda pair: (-pair[1], pair[0])):
        decision = words.get(fault) or words.get(parts.get(fault, "other"), words["other"])
        if fault != OTHER and decision != now:
            best.setdefault(decision, fault)
    return list(best.values())[:_SHOWN]


def _value_under(
    posterior: Posterior, knowledge: Knowledge, fault: str, measure: str, state: str
) -> tuple[Value, ...] | None:
    twin: Twin = posterior.twin
    ask = Ask(measure, state)
    rows = [i for i, h in enumerate(posterior.hypotheses) if h.fault == fault]
    best = posterior.hypotheses[max(rows, key=lambda i: posterior.log_joint[i])]
    if twin.covers(ask):
        mode = posterior.modes[best.place]
        z = posterior.fit.z[best.place][None]
        look = outlooks(twin, [mode], z, [ask], dict(posterior.meters))[0]
        return tuple(_typed(measure, float(v)) for v in values_of(look.mean[0], look.transform))
    by_id = {f.id: f for f in posterior.faults}
    spread = spread_of(by_id[fault], knowledge.faults.get("healthy"), measure, state)
    if spread is None:
        return None
    logarithmic, centre, _ = shape(spread)
    return (_typed(measure, float(np.exp(centre)) if logarithmic else centre),)


def _typed(measure: str, number: float) -> Value:
    """A number as it would be typed: three digits in the usual unit."""
    entry = MEASURES[measure]
    if entry.dimension == "resistance" and "insulation" not in measure and number >= _OPEN_OHM:
        return parse_value("open", dimension=entry.dimension)
    shown = figure(in_usual_unit(measure, number))
    return parse_value(f"{shown} {entry.usual_unit}", dimension=entry.dimension)
