"""One fault in one of the ways in which it can show."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Hypothesis:
    """One fault in one mode; ``place`` is the mode's row in the fit."""

    fault: str
    place: int
    log_weight: float
