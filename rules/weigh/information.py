"""What a reading or an answer would tell: mutual information with the fault and the part of the machine."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray

from calc.twin import Floats, attribute_rows
from rules.knowledge import Fault, Observation
from rules.weigh.hypothesis import Hypothesis
from rules.weigh.posterior import Posterior
from rules.weigh.settings import ProposalSettings, weighing
from rules.weigh.soft import answer_chance


@dataclass(frozen=True)
class Leading:
    """The hypotheses that carry nearly all of the probability, as a mixture."""

    hypotheses: tuple[Hypothesis, ...]
    share: Floats
    faults: tuple[str, ...]
    label: NDArray[np.int64]
    part: NDArray[np.int64]
    possible: Mapping[str, Floats]


def leading(posterior: Posterior, s: ProposalSettings) -> Leading:
    """Pick the hypotheses that matter and what states they allow."""
    share = posterior.share()
    order = np.argsort(-share, kind="stable")[: s.hypotheses]
    chosen = tuple(posterior.hypotheses[i] for i in order)
    weights = share[order]
    faults = tuple(dict.fromkeys(h.fault for h in chosen))
    parts = {f.id: f.part for f in posterior.faults}
    names = tuple(dict.fromkeys(parts[h.fault] for h in chosen))
    places = [h.place for h in chosen]
    modes = [posterior.modes[p] for p in places]
    z = posterior.fit.z[places]
    rows = attribute_rows(modes, z[:, None, :], posterior.twin.defaults)
    return Leading(
        hypotheses=chosen,
        share=weights / weights.sum(),
        faults=faults,
        label=np.array([faults.index(h.fault) for h in chosen]),
        part=np.array([names.index(parts[h.fault]) for h in chosen]),
        possible=posterior.twin.possible(z, rows),
    )


@cache
def _draws(count: int, dims: int) -> Floats:
    """Fixed quasi-random normal draws: a Kronecker sequence of square roots of primes."""
    primes = (2, 3, 5, 7, 11, 13)[:dims]
    n = np.arange(1, count + 1)[:, None]
    uniform = (0.5 + n * np.sqrt(np.array(primes))) % 1.0
    inverse = np.vectorize(NormalDist().inv_cdf)
    return np.asarray(inverse(np.clip(uniform, 1e-4, 1.0 - 1e-4)))


def information(mean: Floats, spread: Floats, lead: Leading, s: ProposalSettings) -> float:
    """Mutual information of a reading with the fault, and with half the weight with the part. [nats]

    Parameters
    ----------
    mean : ndarray
        Predicted reading per hypothesis, (h, m).
    spread : ndarray
        Its covariance per hypothesis, (h, m, m).

    """
    dims = mean.shape[1]
    root = np.linalg.cholesky(spread + 1e-12 * np.eye(dims))
    draws = _draws(s.draws, dims)
    samples = mean[:, None, :] + np.einsum("hij,dj->hdi", root, draws)
    gap = samples[:, :, None, :] - mean[None, None, :, :]
    inverse = np.linalg.inv(root)
    white = np.einsum("kij,hdkj->hdki", inverse, gap)
    log_det = np.log(np.diagonal(root, axis1=1, axis2=2)).sum(axis=1)
    # Student-like tails keep far hypotheses from looking infinitely telling.
    log_density = -0.5 * (4.0 + dims) * np.log1p((white**2).sum(axis=-1) / 4.0) - log_det
    top = log_density.max(axis=2, keepdims=True)
    weighted = lead.share * np.exp(log_density - top)
    total = weighted.sum(axis=2)
    gain = 0.0
    for labels, factor in ((lead.label, 1.0), (lead.part, s.part_weight)):
        indicator = (labels[:, None] == labels[None, :]).astype(float)
        same = np.einsum("hdk,hk->hd", weighted, indicator)
        prior = indicator @ lead.share
        per_hypothesis = np.log(np.maximum(same, 1e-300) / total / prior[:, None]).mean(axis=1)
        gain += factor * float(lead.share @ per_hypothesis)
    return max(gain, 0.0)


def binary_information(
    known: Observation, faults: Sequence[Fault], lead: Leading, s: ProposalSettings
) -> float:
    """Information of a yes or no about fault and part. [nats]"""
    power = weighing().soft_power
    yes = np.array([answer_chance(known, fault, True) for fault in faults])
    gain = 0.0
    for chance in (yes, 1.0 - yes):
        total = float(lead.share @ chance)
        for labels, factor in ((lead.label, 1.0), (lead.part, s.part_weight)):
            indicator = (labels[:, None] == labels[None, :]).astype(float)
            prior = indicator @ lead.share
            same = indicator @ (lead.share * chance)
            gain += factor * float(lead.share @ (chance * np.log(np.maximum(same / prior, 1e-12) / total)))
    return power * max(gain, 0.0)
