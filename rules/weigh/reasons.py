"""Why a fault stands where it stands: every piece of evidence, with weights that add up to the odds shown."""

from __future__ import annotations

import math

import numpy as np

from rules.answer import Reason
from rules.weigh.hypothesis import Hypothesis
from rules.weigh.posterior import Posterior
from rules.weigh.wording import amount_text, title, values_of

LEAST_WEIGHT = 0.1  # nats; smaller pieces are shown as one


def reasons(posterior: Posterior, fault: str, against: str = "healthy") -> tuple[Reason, ...]:
    """Return what speaks for (positive) and against a fault, compared with another one.

    The weights of all reasons add up to ln(P(fault) / P(against)).
    """
    if fault == against:
        return ()
    own, other = _best(posterior, fault), _best(posterior, against)
    found = [
        *_circuit(posterior, own, other),
        *_tables(posterior, fault, against),
        *_rest(posterior, own, other),
    ]
    found.sort(key=lambda r: -abs(r.weight))
    large = [r for r in found if abs(r.weight) >= LEAST_WEIGHT]
    small = sum(r.weight for r in found if abs(r.weight) < LEAST_WEIGHT)
    if small:
        large.append(Reason(about="rest", text="smaller pieces of evidence together", weight=small))
    return tuple(large)


def rival(posterior: Posterior) -> str:
    """The leading fault that is not healthy."""
    others = {k: v for k, v in posterior.odds.items() if k not in {"healthy", "other"}}
    return max(sorted(others), key=lambda name: others[name])


def _name(fault: str) -> str:
    return fault.replace("_", " ")


def _best(posterior: Posterior, fault: str) -> Hypothesis:
    rows = [i for i, h in enumerate(posterior.hypotheses) if h.fault == fault]
    return posterior.hypotheses[max(rows, key=lambda i: posterior.log_joint[i])]


def _circuit(posterior: Posterior, own: Hypothesis, other: Hypothesis) -> list[Reason]:
    gains = posterior.fit.log_likelihood[own.place] - posterior.fit.log_likelihood[other.place]
    found = []
    for place, (seen, gain) in enumerate(zip(posterior.data.seen, gains, strict=True)):
        weight = float(gain)
        if abs(weight) < LEAST_WEIGHT:  # is not shown by itself
            found.append(Reason(about=seen.ask.key, text="", weight=weight))
            continue
        with_fault, without = _expected(posterior, own, place), _expected(posterior, other, place)
        found.append(
            Reason(
                about=seen.ask.key,
                text=f"{title(seen.ask.key)}: this fault gives {with_fault}, {_name(other.fault)} {without}",
                weight=weight,
                read=posterior.texts.get(seen.ask.key, ""),
                expected=with_fault,
            )
        )
    return found


def _expected(posterior: Posterior, hypothesis: Hypothesis, place: int) -> str:
    """What a hypothesis gives for the reading at a place of the frame, in words."""
    seen, group = posterior.data.seen[place], posterior.data.groups[place]
    values = values_of(posterior.fit.predicted[hypothesis.place, group], seen.transform)
    return amount_text(seen.ask.measure, [float(v) for v in values], seen.transform.cap)


def _tables(posterior: Posterior, fault: str, against: str) -> list[Reason]:
    texts = posterior.texts
    found = []
    for name, table in posterior.tables.items():
        weight = table[fault] - table[against]
        if name == "complaint":
            read, text = posterior.sheet.complaint.replace("_", " "), "the complaint"
        elif name in posterior.sheet.observations:
            answer = "yes" if posterior.sheet.observations[name] else "no"
            read, text = answer, f"{title(name)}: {answer}"
        else:
            read, text = texts.get(name.rstrip("'"), ""), title(name)
        side = "more" if weight > 0 else "less"
        found.append(
            Reason(
                about=name,
                text=f"{text}, {side} usual than with {_name(against)}",
                weight=weight,
                read=read,
            )
        )
    return found


def _rest(posterior: Posterior, own: Hypothesis, other: Hypothesis) -> list[Reason]:
    fit = posterior.fit
    room = -(fit.stretch + fit.freedom)
    mode = posterior.modes[own.place]
    ways = _all_ways(posterior, own.fault) - _all_ways(posterior, other.fault)
    start = own.log_weight - other.log_weight
    where = f"; most likely: {mode.variant}" if mode.variant else ""
    return [
        Reason(about="start", text=f"how usual it is before any reading{where}", weight=start + ways),
        Reason(
            about="fit",
            text="how far the machine must differ from a typical one of its plate",
            weight=float(room[own.place] - room[other.place]),
        ),
        Reason(
            about="states",
            text="whether the machine could be in the states that were read",
            weight=float(posterior.state_terms[own.place] - posterior.state_terms[other.place]),
        ),
    ]


def _all_ways(posterior: Posterior, fault: str) -> float:
    """What the other ways of a fault add to its best one. [nats]"""
    joint = np.array(
        [v for h, v in zip(posterior.hypotheses, posterior.log_joint, strict=True) if h.fault == fault]
    )
    top = float(joint.max())
    return math.log(float(np.exp(joint - top).sum()))
