"""What an ohm meter at the terminals sees of joints and of paths between phases."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from calc.induction_3ph.network import path_resistance
from calc.twin import Floats


def line_extra(rows: Mapping[str, Floats]) -> Floats:
    """Resistance of a joint at the motor, seen in the two readings that share its line."""
    seen = np.where(rows["line_place"] > 1.5, rows["line_r"], 0.0)
    line = rows["line"].astype(np.int64)
    extra = np.zeros((len(line), 3))
    index = np.arange(len(line))
    extra[index, line] += seen
    extra[index, (line + 2) % 3] += seen
    return extra


def with_path(rows: Mapping[str, Floats], phases: Floats, between: Floats) -> Floats:
    """Terminal resistances where a path between two phases is in parallel with parts of them."""
    where = np.flatnonzero(rows["path_r"] > 0.0)
    if not len(where):
        return between
    ends = np.stack([rows["path_a"][where], rows["path_b"][where]], axis=1)
    out = between.copy()
    out[where] = path_resistance(
        phases[where], rows["phase"][where].astype(np.int64), ends, rows["path_r"][where]
    )
    return out
