"""Where a machine's readings are heading, in words, with the doubt that is left.

The logarithm of the reading is fitted with a straight line in time. How far one
reading strays from the next (contact, dew, temperature not known) is part of the
doubt: a few readings make no trend, and then that is said.
"""

from __future__ import annotations

import math
from datetime import datetime
from typing import Final

import msgspec

from casebook.history import INSULATION, Point, Series

# How far repeated readings of a sound winding stray, one sigma of the natural logarithm.
# Common practice, from memory: insulation repeats within about a third when its temperature is
# known; unknown by 10 K it strays by a factor of two (halving per 10 K); bridges repeat to 0.5 %.
_SCATTER: Final = {"insulation": (0.3, 0.75), "other": (0.005, 0.04)}
_LEAST_POINTS: Final = 3
_LEAST_DAYS: Final = 30.0
_YEAR_DAYS: Final = 365.25
_DRAWS: Final = 4000
_FAST: Final = 0.1  # a halving in under seven years is said as a halving
_FAR_MONTHS: Final = 600.0

# Student's t, 95th percentile, by degrees of freedom: any table of the distribution.
_T_95: Final = (6.314, 2.920, 2.353, 2.132, 2.015, 1.943, 1.895, 1.860, 1.833, 1.812)
_Z_95: Final = 1.645


class Trend(msgspec.Struct, frozen=True, kw_only=True):
    """A trend and its doubt.

    ``per_year`` is the change of the natural logarithm a year, 90 % between low and high;
    ``months_to_limit`` are 5 %, 50 % and 95 % (``inf``: not in sight), None without a limit.
    """

    words: str
    readings: int
    per_year: float = 0.0
    per_year_low: float = -math.inf
    per_year_high: float = math.inf
    is_clear: bool = False
    months_to_limit: tuple[float, float, float] | None = None


class _Fit(msgspec.Struct, frozen=True, kw_only=True):
    level: float  # of the logarithm, now
    slope: float  # a year
    covariance: tuple[tuple[float, float], tuple[float, float]]
    width: float  # half of the 90 % interval, in sigmas


def trend_of(
    series: Series, *, now: datetime, limit: float | None = None, limit_text: str = "the limit"
) -> Trend:
    """Return the trend of a series up to ``now``.

    ``limit`` is in the series' unit, at its anchor temperature. Readings beyond the meter's range,
    open circuits and values that were not read are left out.
    """
    points = [point for point in series.points if _value(series, point) is not None]
    days = (points[-1].time_utc - points[0].time_utc).total_seconds() / 86400 if points else 0.0
    if len(points) < _LEAST_POINTS or days < _LEAST_DAYS:
        return Trend(words=_too_few(len(points), days), readings=len(points))
    fit = _fit(series, points, now)
    sigma = math.sqrt(fit.covariance[1][1])
    low, high = fit.slope - fit.width * sigma, fit.slope + fit.width * sigma
    months = _months_to_limit(fit, limit) if limit is not None and limit > 0 else None
    is_clear = low > 0 or high < 0
    rate = _rate_words(fit, (low, high), f"{len(points)} readings over {_span(days)}")
    until = _limit_words(months, limit_text) if is_clear else ""
    return Trend(
        words=f"{_name(series)}{rate}{until}",
        readings=len(points),
        per_year=fit.slope,
        per_year_low=low,
        per_year_high=high,
        is_clear=is_clear,
        months_to_limit=months,
    )


def _value(series: Series, point: Point) -> float | None:
    """Return the one number of a reading that a trend follows: the lowest insulation, else the mean."""
    numbers = point.corrected if point.corrected is not None else point.numbers
    if point.kind != "exact" or not numbers or not all(0 < n < math.inf for n in numbers):
        return None
    return min(numbers) if series.measure in INSULATION else sum(numbers) / len(numbers)


def _sigma(series: Series, point: Point) -> float:
    known, unknown = _SCATTER["insulation" if series.measure in INSULATION else "other"]
    return known if point.corrected is not None or series.anchor_c is None else unknown


def _fit(series: Series, points: list[Point], now: datetime) -> _Fit:
    """Weighted least squares; where readings stray more than supposed, their own scatter counts."""
    import numpy as np  # noqa: PLC0415  (not on the way to the first screen)

    years = np.array([(point.time_utc - now).total_seconds() / 86400 / _YEAR_DAYS for point in points])
    logs = np.log([_value(series, point) or math.nan for point in points])
    weights = 1 / np.array([_sigma(series, point) for point in points]) ** 2
    design = np.column_stack([np.ones_like(years), years])
    covariance = np.linalg.inv(design.T @ (weights[:, None] * design))
    level, slope = covariance @ design.T @ (weights * logs)
    freedom = len(points) - 2
    excess = float(weights @ (logs - design @ [level, slope]) ** 2) / freedom
    if excess > 1:
        covariance = covariance * excess
    width = _Z_95 if excess <= 1 else (_T_95[freedom - 1] if freedom <= len(_T_95) else _Z_95 * 1.05)
    rows = [[float(cell) for cell in row] for row in covariance]
    return _Fit(
        level=float(level),
        slope=float(slope),
        covariance=((rows[0][0], rows[0][1]), (rows[1][0], rows[1][1])),
        width=width,
    )


def _months_to_limit(fit: _Fit, limit: float) -> tuple[float, float, float]:
    """5 %, 50 % and 95 % of the months until the line meets a limit below it; 0 when it has."""
    import numpy as np  # noqa: PLC0415

    draws = np.random.default_rng(0).multivariate_normal([fit.level, fit.slope], fit.covariance, _DRAWS)
    above = draws[:, 0] - math.log(limit)
    with np.errstate(divide="ignore", invalid="ignore"):
        months = np.where(draws[:, 1] < 0, -12 * above / draws[:, 1], math.inf)
    months = np.where(above <= 0, 0.0, months)
    low, mid, high = (float(m) for m in np.quantile(months, [0.05, 0.5, 0.95], method="inverted_cdf"))
    return low, mid, high


def _too_few(readings: int, days: float) -> str:
    plural = "" if readings == 1 else "s"
    return f"too few for a trend: {readings} reading{plural} in {_span(days)}"


def _name(series: Series) -> str:
    return "insulation" if series.measure in INSULATION else series.measure.replace("_", " ")


def _rate_words(fit: _Fit, bounds: tuple[float, float], readings: str) -> str:
    low, high = bounds
    if low <= 0 <= high:
        worst = f"; at worst it {_rate(low)}" if low < 0 else ""
        return f": no clear trend in {readings}{worst}"
    slow, fast = sorted((low, high), key=abs)
    in_months = abs(fit.slope) >= _FAST
    return (
        f" {_rate(fit.slope)} ({_amount(fast, in_months=in_months)} to {_amount(slow, in_months=in_months)})"
    )


def _rate(per_year: float) -> str:
    """Say a change of the logarithm: as a halving or doubling where it is fast, else in per cent a year."""
    if abs(per_year) >= _FAST:
        return f"{'halves' if per_year < 0 else 'doubles'} every {_amount(per_year, in_months=True)}"
    return f"{'falls' if per_year < 0 else 'rises'} by {_amount(per_year, in_months=False)} a year"


def _amount(per_year: float, *, in_months: bool) -> str:
    if in_months:
        return _months(12 * math.log(2) / abs(per_year))
    return f"{100 * abs(math.expm1(per_year)):.1f} %"


def _limit_words(months: tuple[float, float, float] | None, limit_text: str) -> str:
    if months is None or months[1] == math.inf:
        return ""
    low, mid, high = months
    if mid == 0:
        return f"; has reached {limit_text}"
    until = "or later than can be told" if high > _FAR_MONTHS else f"to {_months(high)}"
    return f"; reaches {limit_text} in about {_months(mid)} ({_months(low)} {until})"


def _months(months: float) -> str:
    if months < 1.5:
        return f"{max(1, round(months * 30.4))} days"
    return f"{months:.0f} months" if months < 36 else f"{months / 12:.0f} years"


def _span(days: float) -> str:
    return f"{days:.0f} days" if days < 60 else _months(days / 30.44)
