"""Small pictures for the printed page, as SVG that stands in the text."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from tui.plot import nice_span
from tui.words import number

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from tui.curve_pictures import Picture
    from tui.page_history import Chart
    from tui.page_parts import Scale
    from tui.plot import Band, Curve

    Place = Callable[[float, float], str]

DECADE = 5.0  # a spread above this factor is drawn on a logarithmic scale


def scale_svg(scale: Scale, *, width: int = 120, height: int = 14) -> str:
    """Return a reading on a line: the band as a box, each value as a stroke."""
    read = [value for value in scale.read if math.isfinite(value)]
    ends = [scale.low, scale.high, *read]
    low, high = min(ends), max(ends)
    span = (high - low) or 1.0
    low, span = low - 0.1 * span, 1.2 * span

    def x(value: float) -> float:
        return round((value - low) / span * width, 1)

    wide = max(1.0, x(scale.high) - x(scale.low))
    box = f'<rect x="{x(scale.low)}" y="3" width="{wide:.1f}" height="8" fill="#ddd"/>'
    strokes = "".join(
        f'<path d="M{x(value)} 0V{height}" stroke="#111" stroke-width="1.6"/>' for value in read
    )
    return (
        f'<svg width="{width}" height="{height}" viewBox="0 0 {width} {height}" role="img" '
        f'aria-label="reading in band"><path d="M0 7H{width}" stroke="#999"/>{box}{strokes}</svg>'
    )


def chart_svg(chart: Chart, *, width: int = 420, height: int = 110) -> str:
    """Return a quantity over time: a line through its readings, lowest and highest at the edge."""
    values = [value for _, value in chart.points]
    low, high = min(values), max(values)
    is_log = low > 0 and high / low > DECADE
    heights = [math.log(value) if is_log else value for value in values]
    span = (max(heights) - min(heights)) or 1.0
    start, end = chart.points[0][0], chart.points[-1][0]

    def place(moment: float, tall: float) -> tuple[float, float]:
        x = 60 + (moment - start) / ((end - start) or 1.0) * (width - 70)
        return round(x, 1), round(height - 25 - (tall - min(heights)) / span * (height - 40), 1)

    dots = [place(moment, tall) for (moment, _), tall in zip(chart.points, heights, strict=True)]
    line = "L".join(f"{x} {y}" for x, y in dots)
    marks = "".join(f'<circle cx="{x}" cy="{y}" r="3" fill="#111"/>' for x, y in dots)
    labels = [(0, 19, number(high)), (0, height - 21, number(low)), (60, height - 4, chart.first)]
    texts = "".join(f'<text x="{x}" y="{y}" font-size="11">{text}</text>' for x, y, text in labels)
    last = f'<text x="{width}" y="{height - 4}" font-size="11" text-anchor="end">{chart.last}</text>'
    return (
        f'<svg width="{width}" height="{height}" viewBox="0 0 {width} {height}" role="img" '
        f'aria-label="history"><path d="M{line}" fill="none" stroke="#555"/>{marks}{texts}{last}</svg>'
    )


def curve_svg(picture: Picture, *, width: int = 420, height: int = 190) -> str:
    """Return curves with their bands: the band in grey, lines, and a ring with its mark for every point."""
    xs = [x for curve in picture.curves for x in curve.x if math.isfinite(x)]
    ys = [y for curve in picture.curves for y in curve.y if math.isfinite(y)]
    ys += [y for band in picture.bands for y in (*band.low, *band.high) if math.isfinite(y)]
    if not xs or not ys:
        return ""
    (left, right), (low, high) = (min(xs), max(xs) or 1.0), nice_span(min(ys), max(ys))

    def place(x: float, y: float) -> str:
        across = 60 + (x - left) / ((right - left) or 1.0) * (width - 75)
        return f"{across:.1f} {height - 32 - (y - low) / (high - low) * (height - 45):.1f}"

    drawn = "".join(_band_svg(band, place) for band in picture.bands)
    drawn += "".join(_line_svg(curve, place) for curve in picture.curves)
    axes = f'<path d="M60 13V{height - 32}H{width - 15}" fill="none" stroke="#999"/>'
    labels = [
        (0, 22, "start", f"{high:g}"), (0, height - 30, "start", f"{low:g}"),
        (60, height - 16, "start", f"{left:g}"),
        (width - 8, height - 16, "end", f"{number(right)} {picture.x_label}"),
    ]  # fmt: skip
    texts = "".join(
        f'<text x="{x}" y="{y}" font-size="11" text-anchor="{anchor}">{text}</text>'
        for x, y, anchor, text in labels
    )
    return (
        f'<svg width="{width}" height="{height}" viewBox="0 0 {width} {height}" role="img" '
        f'aria-label="curve">{axes}{drawn}{texts}</svg>'
    )


def _band_svg(band: Band, place: Place) -> str:
    """Return a band as an area in grey."""
    there = [*zip(band.x, band.high, strict=True), *reversed([*zip(band.x, band.low, strict=True)])]
    return f'<path d="M{_path(there, place)}Z" fill="#ddd"/>'


def _line_svg(curve: Curve, place: Place) -> str:
    """Return a curve as a line through its points, or as a ring with its mark for each."""
    points = [(x, y) for x, y in zip(curve.x, curve.y, strict=True) if math.isfinite(x) and math.isfinite(y)]
    if curve.joined:
        return f'<path d="M{_path(points, place)}" fill="none" stroke="#111"/>' if points else ""
    drawn = ""
    for x, y in points:
        across, down = place(x, y).split()
        drawn += f'<circle cx="{across}" cy="{down}" r="3.5" fill="none" stroke="#111"/>'
        drawn += f'<text x="{float(across) + 6:.1f}" y="{down}" font-size="11">{curve.mark}</text>'
    return drawn


def legend(picture: Picture) -> str:
    """Return in words which mark is what."""
    said = [f"{curve.mark} {curve.name}" for curve in picture.curves if curve.name and not curve.joined]
    said += [f"line: {curve.name}" for curve in picture.curves if curve.name and curve.joined]
    return "; ".join([*said, *(f"grey: {band.name} such machines" for band in picture.bands)])


def _path(points: Sequence[tuple[float, float]], place: Place) -> str:
    """Return points as the steps of a path."""
    return "L".join(place(x, y) for x, y in points)
