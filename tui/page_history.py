"""The history of a machine on the printed sheet: trends in words, and points to draw."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from calc.quantities import MEASURES
from calc.units import find_unit
from casebook.history import machine_history
from casebook.trend import trend_of
from tui.words import measure_name

if TYPE_CHECKING:
    from collections.abc import Iterable
    from datetime import datetime

    from casebook.fold import Case
    from casebook.history import Series

LEAST_POINTS = 3


@dataclass(frozen=True)
class Chart:
    """One quantity over time, oldest first: moments as seconds, numbers in ``unit``."""

    title: str
    unit: str
    points: tuple[tuple[float, float], ...]
    first: str
    last: str


def trend_sentences(cases: Iterable[Case], *, tag: str, now: datetime) -> list[str]:
    """Return the trends of a machine that stand out from their doubt."""
    trends = [trend_of(series, now=now) for series in machine_history(tag, cases).series]
    return [trend.words for trend in trends if trend.is_clear]


def charts(cases: Iterable[Case], *, tag: str) -> list[Chart]:
    """Return what can be drawn: what was read three times or more, corrected to one temperature."""
    corrected = [one for one in machine_history(tag, cases).series if one.anchor_c is not None]
    found = [_chart(series) for series in corrected]
    return [chart for chart in found if chart is not None]


def _chart(series: Series) -> Chart | None:
    """Return one series as a chart; the lowest of three values stands for them."""
    measure = MEASURES.get(series.measure)
    unit = find_unit(measure.usual_unit, dimension=measure.dimension) if measure else None
    if unit is None:
        return None
    read = [
        (point.time_utc, min(point.corrected) / float(unit.factor))
        for point in series.points
        if point.corrected and all(math.isfinite(value) for value in point.corrected)
    ]
    if len(read) < LEAST_POINTS:
        return None
    return Chart(
        title=f"{measure_name(series.measure)} at {series.anchor_c:g} degC",
        unit=unit.name,
        points=tuple((moment.timestamp(), value) for moment, value in read),
        first=f"{read[0][0]:%Y-%m-%d}",
        last=f"{read[-1][0]:%Y-%m-%d}",
    )
