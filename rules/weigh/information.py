"""What a reading or an answer would tell: mutual information with the fault and the part of the machine."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from statistics import NormalDist

import numpy as np

from calc.twin import Floats, attribute_rows
from rules.weigh.hypothesis import Hypothesis
from rules.weigh.posterior import Posterior
from rules.weigh.settings import ProposalSettings, weighing


@dataclass(frozen=True)
class Leading:
    """The hypotheses that carry nearly all of the probability, as a mixture."""

    hypotheses: tuple[Hypothesis, ...]
    share: Floats
    same_fault: Floats
    """1.0 where two hypotheses are of one fault, (h, h)."""
    same_part: Floats
    """1.0 where two hypotheses are of one part of the machine, (h, h)."""
    possible: Mapping[str, Floats]


def leading(posterior: Posterior, s: ProposalSettings) -> Leading:
    """Pick the hypotheses that matter and what states they allow."""
    share = posterior.share()
    order = np.argsort(-share, kind="stable")[: s.hypotheses]
    chosen = tuple(posterior.hypotheses[i] for i in order)
    weights = share[order]
    parts = {f.id: f.part for f in posterior.faults}
    places = [h.place for h in chosen]
    modes = [posterior.modes[p] for p in places]
    z = posterior.fit.z[places]
    rows = attribute_rows(modes, z[:, None, :], posterior.twin.defaults)
    return Leading(
        hypotheses=chosen,
        share=weights / weights.sum(),
        same_fault=_same([h.fault for h in chosen]),
        same_part=_same([parts[h.fault] for h in chosen]),
        possible=posterior.twin.possible(z, rows),
    )


def _same(names: Sequence[str]) -> Floats:
    """1.0 where two names are the same, (names, names)."""
    return np.array([[float(one == other) for other in names] for one in names])


@cache
def _draws(count: int, dims: int) -> Floats:
    """Fixed quasi-random normal draws: a Kronecker sequence of square roots of primes."""
    primes = (2, 3, 5, 7, 11, 13)[:dims]
    n = np.arange(1, count + 1)[:, None]
    uniform = (0.5 + n * np.sqrt(np.array(primes))) % 1.0
    inverse = np.vectorize(NormalDist().inv_cdf)
    return np.asarray(inverse(np.clip(uniform, 1e-4, 1.0 - 1e-4)))


def information(mean: Floats, spread: Floats, lead: Leading, s: ProposalSettings) -> Floats:
    """Mutual information of readings with fault, and less weighted with part: (readings,). [nats]

    Parameters
    ----------
    mean : ndarray
        Predicted readings per hypothesis, (readings, h, m).
    spread : ndarray
        Their covariance per hypothesis, (readings, h, m, m).

    """
    dims = mean.shape[2]
    root = np.linalg.cholesky(spread + 1e-12 * np.eye(dims))
    samples = mean[:, :, None, :] + _draws(s.draws, dims) @ root.transpose(0, 1, 3, 2)
    # Rows: readings, then the hypothesis that is asked (k); below it all draws of all hypotheses.
    gap = samples.reshape(len(mean), 1, -1, dims) - mean[:, :, None, :]
    white = gap @ np.linalg.inv(root).transpose(0, 1, 3, 2)
    log_det = np.log(np.diagonal(root, axis1=2, axis2=3)).sum(axis=2)
    # Student-like tails keep far hypotheses from looking infinitely telling.
    log_density = -0.5 * (4.0 + dims) * np.log1p((white**2).sum(axis=-1) / 4.0) - log_det[:, :, None]
    top = log_density.max(axis=1, keepdims=True)
    weighted = lead.share[:, None] * np.exp(log_density - top)
    total = weighted.sum(axis=1)
    gain = np.zeros(len(mean))
    for same_group, factor in ((lead.same_fault, 1.0), (lead.same_part, s.part_weight)):
        # What each draw says of the group that its own hypothesis belongs to.
        same = (same_group @ weighted).reshape(*mean.shape[:2], *mean.shape[1:2], -1)
        own = np.diagonal(same, axis1=1, axis2=2).transpose(0, 2, 1)
        prior = same_group @ lead.share
        ratio = np.maximum(own, 1e-300) / total.reshape(own.shape) / prior[:, None]
        gain += factor * (np.log(ratio).mean(axis=2) @ lead.share)
    return np.maximum(gain, 0.0)


def binary_information(yes: Floats, lead: Leading, s: ProposalSettings) -> float:
    """Information of a yes or no about fault and part, ``yes`` its chance per hypothesis, (h,). [nats]"""
    power = weighing().soft_power
    gain = 0.0
    for chance in (yes, 1.0 - yes):
        total = float(lead.share @ chance)
        for same_group, factor in ((lead.same_fault, 1.0), (lead.same_part, s.part_weight)):
            prior = same_group @ lead.share
            same = same_group @ (lead.share * chance)
            gain += factor * float(lead.share @ (chance * np.log(np.maximum(same / prior, 1e-12) / total)))
    return power * max(gain, 0.0)
