"""One line of a table of measurements: what was measured, the figure, and what it is held against."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from math import ceil
from statistics import median

MISSED = 3  # exit status where all was measured and a target was not reached


@dataclass(frozen=True)
class Row:
    """A figure in words, and its target where there is one."""

    what: str
    figure: str
    target: str = ""
    is_reached: bool = True

    def __str__(self) -> str:
        """Return the line of the table."""
        judged = f"{self.target}{'' if self.is_reached else ', MISSED'}"
        return f"{self.what:<54}{self.figure:>22}  {judged}".rstrip()


def at_most(what: str, value: float, unit: str, most: float | None = None, *, decimals: int = 0) -> Row:
    """Return a figure, held against the most that it should be."""
    shown = f"{value:,.{decimals}f} {unit}"
    if most is None:
        return Row(what, shown)
    return Row(what, shown, f"at most {most:,g} {unit}", value <= most)


def told(rows: Iterable[Row]) -> int:
    """Print rows as they come; return the exit status."""
    status = 0
    for row in rows:
        print(row, flush=True)
        status = status if row.is_reached else MISSED
    return status


def percentile(values: Iterable[float], share: float) -> float:
    """Return the smallest value that a share of the values does not exceed."""
    ordered = sorted(values)
    return ordered[max(ceil(share * len(ordered)), 1) - 1]


def middle_and_worst(
    act: Callable[[], object], clock: Callable[[], float], times: int
) -> tuple[float, float]:
    """Return median and worst time of some runs. [ms]"""
    took = []
    for _ in range(times):
        start = clock()
        act()
        took.append(1e3 * (clock() - start))
    return median(took), max(took)
