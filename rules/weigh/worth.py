"""What each reading would tell, and of whom: what the leading hypotheses expect of it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from calc.twin import Floats
from rules.knowledge import Knowledge, ReadingRule
from rules.weigh.information import Leading, information
from rules.weigh.posterior import Posterior
from rules.weigh.predict import Outlook
from rules.weigh.settings import ProposalSettings, weighing
from rules.weigh.soft import shape, spread_of


@dataclass(frozen=True)
class View:
    """What the leading hypotheses say about one reading: means (h, m), covariances (h, m, m)."""

    mean: Floats
    spread: Floats
    share: float = 1.0
    """How much of the information is new, after what was read of the same family."""


def view(
    posterior: Posterior,
    knowledge: Knowledge,
    lead: Leading,
    look: Outlook | None,
    rule: ReadingRule,
    state: str,
) -> View | None:
    """What is expected of one reading; None where some hypothesis says nothing of it."""
    if look is not None:
        covariance = posterior.fit.covariance[[h.place for h in lead.hypotheses]]
        spread = look.slope @ covariance @ look.slope.transpose(0, 2, 1) + np.diag(look.error**2)
        return View(look.mean, spread)
    by_id = {f.id: f for f in posterior.faults}
    healthy = knowledge.faults.get("healthy")
    shapes = []
    for h in lead.hypotheses:
        found = spread_of(by_id[h.fault], healthy, rule.id, state)
        if found is None:
            return None
        shapes.append(shape(found))
    meter = posterior.meters[rule.id]
    error = meter.share if shapes[0][0] else meter.floor
    mean = np.array([[centre] for _, centre, _ in shapes])
    variance = np.array([[[sigma**2 + error**2]] for _, _, sigma in shapes])
    return View(mean, variance, _family_factor(posterior, rule.id))


def gains(views: Sequence[View | None], lead: Leading, s: ProposalSettings) -> list[float]:
    """Information of each reading about fault and part, all readings of one size at once. [nats]"""
    found = [0.0] * len(views)
    sizes = {one.mean.shape[1] for one in views if one is not None}
    for size in sorted(sizes):
        places = [i for i, one in enumerate(views) if one is not None and one.mean.shape[1] == size]
        picked = [one for one in views if one is not None and one.mean.shape[1] == size]
        mean, spread = np.stack([v.mean for v in picked]), np.stack([v.spread for v in picked])
        told = information(mean, spread, lead, s)
        for place, one, gain in zip(places, picked, told, strict=True):
            found[place] = one.share * float(gain)
    return found


def _family_factor(posterior: Posterior, measure: str) -> float:
    """A reading whose family was read already brings less that is new."""
    for family in weighing().families.values():
        if measure in family.measures and any(r.measure in family.measures for r in posterior.sheet.readings):
            return 1.0 - family.correlation**2 + 0.05
    return 1.0


def told_apart(view: View, lead: Leading) -> tuple[int, int]:
    """Return the hypotheses, of two faults, that a reading does most to tell apart, the likelier first.

    By their shares and by how little their expectations overlap (Bhattacharyya's distance of normals
    of one covariance).
    """
    gap = view.mean[:, None, :] - view.mean[None, :, :]
    spread = 0.5 * (view.spread[:, None] + view.spread[None, :])
    distance = (gap * np.linalg.solve(spread, gap[..., None])[..., 0]).sum(axis=-1)
    return _parted(1.0 - np.exp(-distance / 8.0), lead)


def told_apart_by_answer(yes: Floats, lead: Leading) -> tuple[int, int]:
    """Return the hypotheses that a yes or no does most to tell apart; ``yes`` are its chances, (h,)."""
    overlap = np.sqrt(np.outer(yes, yes)) + np.sqrt(np.outer(1.0 - yes, 1.0 - yes))
    return _parted(1.0 - overlap, lead)


def _parted(apart: Floats, lead: Leading) -> tuple[int, int]:
    weight = np.outer(lead.share, lead.share) * apart * (1.0 - lead.same_fault)
    one, other = np.unravel_index(int(np.argmax(weight)), weight.shape)
    first, second = sorted((int(one), int(other)), key=lambda place: (-lead.share[place], place))
    return first, second
