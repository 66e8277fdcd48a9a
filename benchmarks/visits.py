"""A visit in which the tool asks and the machine answers, as far as the case can."""

from __future__ import annotations

import copy
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np

from benchmarks.figures import Figure, mean, share
from benchmarks.graded import Answer, Case, Plain
from benchmarks.scoring import mark
from calc.quantities import ENERGISED_STATES
from calc.values import ValueTextError, parse_value

SURE = 0.8  # odds of the truth at which a case counts as reached
MOST_READINGS = 8
FLOOR_OHM = 1e6  # insulation to frame below which nothing energised may be proposed
STOP_COMPLAINTS = frozenset({"shock_from_frame", "smoke_or_burning"})


@dataclass
class Visit:
    """One case on its way: what is on the sheet by now, and what was proposed."""

    case: Case
    sheet: Plain
    answer: Plain
    taken: int = 0
    reached: int | None = None
    proposals: int = 0
    refused: int = 0
    shut: int = 0
    first_right: list[bool] = field(default_factory=list)

    def note(self) -> None:
        """Record how the answer stands after this reading."""
        found = mark(self.case, self.answer)
        self.first_right.append(found.first)
        if self.reached is None and found.chance >= SURE:
            self.reached = self.taken
        self.shut += through_shut_gate(self.sheet, self.answer)


@dataclass(frozen=True)
class Visits:
    """What became of all visits."""

    visits: tuple[Visit, ...]
    reached: Figure
    refused: Figure
    readings_used: Figure
    through_shut_gate: int
    top1_after: tuple[float, ...]

    @property
    def answers(self) -> list[Plain]:
        """The last answers, in the order of the cases."""
        return [visit.answer for visit in self.visits]


def through_shut_gate(sheet: Plain, answer: Plain) -> int:
    """Count proposals of an energised reading where what is on the sheet forbids every one."""
    if not means_stop(sheet):
        return 0
    return sum(item.get("state") in ENERGISED_STATES for item in answer.get("next") or [])


def means_stop(sheet: Plain) -> bool:
    """Whether a complaint, or insulation to frame on record, keeps everything energised out."""
    return sheet.get("complaint") in STOP_COMPLAINTS or any(
        _ohm(reading["value"]) < FLOOR_OHM
        for reading in sheet.get("readings") or []
        if reading["measure"] == "insulation_resistance"
    )


def visit_all(cases: Sequence[Case], answer: Answer, most: int = MOST_READINGS) -> Visits:
    """Let every case be asked for up to ``most`` readings and observations."""
    known = {key for case in cases for key in _had(case)}
    visits = [_visit(case, answer, known, most) for case in cases]
    after = [np.mean([v.first_right[min(step, v.taken)] for v in visits]) for step in range(most + 1)]
    asked = [flag for v in visits for flag in [1.0] * v.refused + [0.0] * (v.proposals - v.refused)]
    return Visits(
        visits=tuple(visits),
        reached=share(np.array([float(v.reached is not None) for v in visits])),
        refused=share(np.array(asked)),
        readings_used=mean(np.array([float(v.taken) for v in visits])),
        through_shut_gate=sum(v.shut for v in visits),
        top1_after=tuple(float(x) for x in after),
    )


def _visit(case: Case, answer: Answer, known: set[str], most: int) -> Visit:
    sheet = copy.deepcopy(case.sheet)
    sheet["readings"] = list(sheet.get("readings") or [])
    sheet["observations"] = dict(sheet.get("observations") or {})
    visit = Visit(case, sheet, answer(copy.deepcopy(sheet)))
    visit.note()
    while visit.taken < most and _take_next(visit, known):
        visit.taken += 1
        visit.answer = answer(copy.deepcopy(visit.sheet))
        visit.note()
    return visit


def _take_next(visit: Visit, known: set[str]) -> bool:
    """Take the first proposal that the case can answer; what it cannot is counted as refused."""
    for item in _new_items(visit, known):
        visit.proposals += 1
        if _took(visit, item):
            return True
        visit.refused += 1
    return False


def _new_items(visit: Visit, known: set[str]) -> Iterator[Plain]:
    """Yield proposals that are not on the sheet, of measures that these cases carry at all."""
    have = {f"{r['measure']}@{r['state']}" for r in visit.sheet["readings"]} | set(
        visit.sheet["observations"]
    )
    for item in visit.answer.get("next") or []:
        name = item.get("observation") or item["measure"]
        key = item.get("observation") or f"{item['measure']}@{item['state']}"
        if name in known and key not in have:
            yield item


def _took(visit: Visit, item: Plain) -> bool:
    truth = visit.case.truth
    if "observation" in item:
        name = item["observation"]
        if name in truth["observations"]:
            visit.sheet["observations"][name] = truth["observations"][name]
            return True
        return False
    reading = truth["readings"].get(f"{item['measure']}@{item['state']}")
    if reading is not None:
        visit.sheet["readings"].append(reading)
    return reading is not None


def _had(case: Case) -> Iterator[str]:
    yield from (reading["measure"] for reading in case.truth["readings"].values())
    yield from case.truth["observations"]


def _ohm(value: object) -> float:
    texts = value if isinstance(value, list) else [value]
    found = []
    for text in texts:
        try:
            found.append(parse_value(str(text), dimension="resistance").number)
        except ValueTextError:
            continue
    return min(found, default=float("inf"))
