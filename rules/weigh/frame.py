"""The readings of a sheet laid side by side, ready to be compared with predictions."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from calc.observe import Seen
from calc.twin import Ask, Floats

NU = 5.0  # degrees of freedom of a reading's error: one bad reading cannot decide


@dataclass(frozen=True)
class Frame:
    """The readings of a sheet laid side by side: which columns belong to which reading."""

    seen: tuple[Seen, ...]
    y: Floats
    sigma: Floats
    groups: tuple[slice, ...]
    constant: float

    @property
    def asks(self) -> list[Ask]:
        """What is asked of the model, one per reading."""
        return [one.ask for one in self.seen]


def frame(seen: Sequence[Seen]) -> Frame:
    """Lay readings side by side."""
    groups, start, constant = [], 0, 0.0
    for one in seen:
        size = len(one.y)
        groups.append(slice(start, start + size))
        start += size
        constant += t_constant(size) - float(np.log(one.sigma).sum())
    y = np.concatenate([one.y for one in seen]) if seen else np.zeros(0)
    sigma = np.concatenate([one.sigma for one in seen]) if seen else np.zeros(0)
    return Frame(seen=tuple(seen), y=y, sigma=sigma, groups=tuple(groups), constant=constant)


def t_constant(size: int) -> float:
    """Log normalising constant of a multivariate t of NU degrees of freedom and unit scale."""
    return math.lgamma((NU + size) / 2.0) - math.lgamma(NU / 2.0) - 0.5 * size * math.log(NU * math.pi)
