"""Figures with their 95 % intervals.

Shares get the score interval of E. B. Wilson (J. Am. Stat. Assoc. 22 (1927) 209), means and
calibration errors the percentiles of a bootstrap with a fixed seed (B. Efron, Ann. Stat. 7 (1979) 1).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import asdict, dataclass
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

Floats: TypeAlias = NDArray[np.float64]

NORMAL_975 = 1.959963984540054  # 97.5 % point of the standard normal
BINS = 10  # of confidence, for the calibration error
DRAWS = 1000
SEED = 7


@dataclass(frozen=True)
class Figure:
    """A number with its interval, and how many cases it rests on; ``nan`` where there are none."""

    value: float
    low: float
    high: float
    n: int

    def plain(self) -> dict[str, float | int | None]:
        """Return it for JSON: what is not finite is null."""
        return {key: value if math.isfinite(value) else None for key, value in asdict(self).items()}

    def as_share(self) -> str:
        """Return it in per cent."""
        if not self.n:
            return "-"
        return f"{100 * self.value:.1f} % ({100 * self.low:.1f}-{100 * self.high:.1f})"

    def as_number(self) -> str:
        """Return it as a plain number."""
        return f"{self.value:.3f} ({self.low:.3f}-{self.high:.3f})" if self.n else "-"


def share(hits: Floats) -> Figure:
    """Return the share of ones, with Wilson's score interval."""
    n = len(hits)
    if not n:
        return Figure(math.nan, math.nan, math.nan, 0)
    p, z2 = float(np.mean(hits)), NORMAL_975**2
    middle = (p + z2 / (2 * n)) / (1 + z2 / n)
    half = NORMAL_975 / (1 + z2 / n) * math.sqrt(p * (1 - p) / n + z2 / (4 * n * n))
    return Figure(p, max(middle - half, 0.0), min(middle + half, 1.0), n)


def mean(values: Floats) -> Figure:
    """Return the mean, with a bootstrapped interval."""
    return _bootstrapped(lambda rows: float(np.mean(values[rows])), len(values))


def calibration_error(confidence: Floats, hits: Floats) -> Figure:
    """Return the expected calibration error of the first entry, over ten equal bins, with its interval."""
    return _bootstrapped(lambda rows: calibration_gap(confidence[rows], hits[rows]), len(hits))


def calibration_gap(confidence: Floats, hits: Floats) -> float:
    """Return the mean distance of confidence and share right, bins weighed by their cases.

    M. P. Naeini, G. F. Cooper, M. Hauskrecht, AAAI 2015, 2901.
    """
    place = np.minimum((confidence * BINS).astype(np.int64), BINS - 1)
    gap = np.bincount(place, weights=hits - confidence, minlength=BINS)
    return float(np.sum(np.abs(gap)) / len(hits))


def _bootstrapped(figure: Callable[[NDArray[np.int64]], float], n: int) -> Figure:
    if not n:
        return Figure(math.nan, math.nan, math.nan, 0)
    draws = np.random.default_rng(SEED).integers(0, n, size=(DRAWS, n))
    low, high = np.quantile([figure(rows) for rows in draws], [0.025, 0.975])
    return Figure(figure(np.arange(n)), float(low), float(high), n)
