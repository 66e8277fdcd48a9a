"""A band and its readings on one short line: ``------(==1=23)------``.

The band always stands at the same place, so that a column of readings is
judged at a glance: what lies left of the brackets is low, right of them high.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from collections.abc import Sequence

OUTSIDE: Final = 6
INSIDE: Final = 5
WIDTH: Final = OUTSIDE + 1 + INSIDE + 1 + OUTSIDE
_LEFT: Final = OUTSIDE
_RIGHT: Final = OUTSIDE + INSIDE + 1
_LOG_FROM: Final = 4.0
"""A band whose ends differ by more than this factor is drawn on a logarithmic scale."""


def scale(values: Sequence[float], low: float, high: float) -> str:
    """Return the scale with its values: ``o`` for one, 1 2 3 for three, ``*`` where they coincide."""
    cells = ["-"] * OUTSIDE + ["("] + ["="] * INSIDE + [")"] + ["-"] * OUTSIDE
    for index, value in enumerate(values):
        if math.isnan(value):
            continue
        at = column(value, low, high)
        mark = str(index + 1) if len(values) > 1 else "o"
        cells[at] = "*" if cells[at] in "123o*" else mark
    return "".join(cells)


def column(value: float, low: float, high: float) -> int:
    """Return the cell of a value; what is further off stands at the end."""
    where = _share(value, low, high)
    if 0.0 <= where <= 1.0:
        at = _LEFT + 1 + math.floor(where * INSIDE)
        return min(max(at, _LEFT + 1), _RIGHT - 1)
    if math.isinf(where):
        return WIDTH - 1 if where > 0 else 0
    outside = _LEFT + where * OUTSIDE if where < 0 else _RIGHT + (where - 1.0) * OUTSIDE
    at = math.floor(outside) if where < 0 else math.ceil(outside)
    return min(max(at, 0), _LEFT - 1) if where < 0 else max(min(at, WIDTH - 1), _RIGHT + 1)


def _share(value: float, low: float, high: float) -> float:
    """Return where a value lies: 0 at the low end of the band, 1 at the high end."""
    if math.isinf(value):
        return value
    if low > 0.0 and high / low > _LOG_FROM:
        low, high = math.log(low), math.log(high)
        value = math.log(value) if value > 0.0 else -math.inf
        if math.isinf(value):
            return value
    if not high > low:
        spread = max(abs(low), 1e-12) * 0.02
        low, high = low - spread, high + spread
    return (value - low) / (high - low)


def side(values: Sequence[float], low: float, high: float) -> tuple[list[int], list[int]]:
    """Return which values lie below the band and which above, by index."""
    below = [index for index, value in enumerate(values) if value < low]
    above = [index for index, value in enumerate(values) if value > high]
    return below, above
