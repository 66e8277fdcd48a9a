"""Curves of a machine whose plate leaves much open: many likely ones are drawn, most lie in a band."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from calc.twin import Floats

ROWS: Final = 200
"""Machines drawn from what the plate leaves open."""
PERCENTILES: Final = (5.0, 50.0, 95.0)
"""Ends and middle of a band: nine in ten machines lie inside."""


@dataclass(frozen=True)
class SpeedCurves:
    """Shaft torque and line current at rated volts and frequency; each array has one entry per speed."""

    speed_rpm: Floats
    torque_nm: tuple[Floats, Floats, Floats]
    """Low, middle and high."""
    current_a: tuple[Floats, Floats, Floats]
    rated_speed_rpm: float
    rated_torque_nm: float
    switch_rpm: float | None = None
    """Where a start switch opens; None where the motor most likely has none."""


def band(values: Floats) -> tuple[Floats, Floats, Floats]:
    """Return the low, middle and high percentiles of curves of shape (rows, points)."""
    low, middle, high = np.percentile(values, PERCENTILES, axis=0)
    return low, middle, high
