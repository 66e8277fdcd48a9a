"""The history of a machine on the printed sheet: trends in words, and points to draw."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from calc.quantities import MEASURES
from calc.units import find_unit
from casebook.history import machine_history
from casebook.trend import trend_of
from rules.limit_bands import floor_of
from tui.words import measure_name, plain

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence
    from datetime import datetime

    from casebook.fold import Case
    from casebook.history import Series
    from rules.knowledge import Knowledge

LEAST_POINTS = 3
# They go where the one-minute value goes, which has the limit.
FOLLOWERS = frozenset({"insulation_resistance_30s", "insulation_resistance_10min"})


@dataclass(frozen=True)
class Chart:
    """One quantity over time, oldest first: moments as seconds, numbers in ``unit``."""

    title: str
    unit: str
    points: tuple[tuple[float, float], ...]
    first: str
    last: str


def trend_sentences(cases: Sequence[Case], *, tag: str, now: datetime, knowledge: Knowledge) -> list[str]:
    """Return the trends of a machine that stand out from their doubt, with when they meet a limit."""
    if not cases:
        return []
    sheet = cases[-1].sheet
    found = []
    for series in machine_history(tag, cases).series:
        if series.measure in FOLLOWERS:
            continue
        floor = floor_of(sheet, knowledge, series.measure)
        limit, text = (floor[0], f"the limit of {floor[1]}") if floor else (None, "")
        trend = trend_of(series, now=now, limit=limit, limit_text=text)
        found += [f"{trend.words} ({_what(series)})"] if trend.is_clear else []
    return found


def _what(series: Series) -> str:
    """Return which reading a trend is about: where and in which state, brought to which temperature."""
    state = "" if series.state == "isolated" else f", {plain(series.state)}"
    place = f", {plain(series.place)}" if series.place else ""
    warm = f" at {series.anchor_c:g} degC" if series.anchor_c is not None else ""
    return f"{measure_name(series.measure)}{warm}{place}{state}"


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
