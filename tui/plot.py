"""A small plotter for a terminal: axes, lines, bands and points in plain ASCII, or lines in braille dots.

Numbers come in, text comes out; nothing here knows what is drawn.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from collections.abc import Sequence

LABEL_WIDTH: Final = 9
_DOTS: Final = ((0x01, 0x08), (0x02, 0x10), (0x04, 0x20), (0x40, 0x80))
TINY: Final = 1e-300
"""Sizes below this are drawn as zero."""
NARROWEST: Final = 1e-12
"""A span narrower than this share of its ends is drawn as one value."""
_STEPS: Final = (1.0, 2.0, 2.5, 5.0, 10.0)


@dataclass(frozen=True, kw_only=True)
class Curve:
    """Points to draw with one mark; ``joined`` draws the line between them."""

    x: Sequence[float]
    y: Sequence[float]
    mark: str = "*"
    joined: bool = True
    name: str = ""


@dataclass(frozen=True, kw_only=True)
class Band:
    """A region between two curves over the same x."""

    x: Sequence[float]
    low: Sequence[float]
    high: Sequence[float]
    mark: str = "."
    name: str = ""


def plot(
    curves: Sequence[Curve],
    *,
    bands: Sequence[Band] = (),
    width: int = 70,
    height: int = 16,
    x_label: str = "",
    y_label: str = "",
    braille: bool = False,
) -> list[str]:
    """Return the lines of a plot, ``height`` of them, none longer than ``width``.

    Values that are not finite are left out. Without any finite point there is one line that says so.
    """
    frame = _Frame.around(curves, bands, width=width - LABEL_WIDTH - 1, height=height - 3)
    if frame is None:
        return ["nothing to draw yet"]
    for band in bands:
        frame.fill(band)
    for curve in curves:
        if braille and curve.joined:
            frame.dots(curve)
        else:
            frame.draw(curve)
    head = f"{y_label}    {_legend(curves, bands)}"[:width]
    return [head, *frame.rows(), *frame.foot(x_label, width)]


def _legend(curves: Sequence[Curve], bands: Sequence[Band]) -> str:
    """Return which mark is what."""
    items: list[Curve | Band] = [*curves, *bands]
    return "   ".join(f"{item.mark} {item.name}" for item in items if item.name)


class _Frame:
    """The area inside the axes, with the scales of both."""

    def __init__(self, x: tuple[float, float], y: tuple[float, float], width: int, height: int) -> None:
        self.x, self.y = x, y
        self.width, self.height = max(width, 4), max(height, 2)
        self.cells = [[" "] * self.width for _ in range(self.height)]

    @classmethod
    def around(
        cls, curves: Sequence[Curve], bands: Sequence[Band], *, width: int, height: int
    ) -> _Frame | None:
        """Return a frame that holds everything finite."""
        items: list[Curve | Band] = [*curves, *bands]
        xs = [v for item in items for v in item.x if math.isfinite(v)]
        ys = [v for curve in curves for v in curve.y if math.isfinite(v)]
        ys += [v for band in bands for v in (*band.low, *band.high) if math.isfinite(v)]
        if not xs or not ys:
            return None
        return cls(_span(min(xs), max(xs)), nice_span(min(ys), max(ys)), width, height)

    def column(self, x: float, per_cell: int = 1) -> int:
        """Return the column of a value."""
        return round((x - self.x[0]) / (self.x[1] - self.x[0]) * (self.width * per_cell - 1))

    def row(self, y: float, per_cell: int = 1) -> int:
        """Return the row of a value, from the top."""
        last = self.height * per_cell - 1
        return last - round((y - self.y[0]) / (self.y[1] - self.y[0]) * last)

    def fill(self, band: Band) -> None:
        """Draw a band."""
        points = list(zip(band.x, band.low, band.high, strict=True))
        for column in range(self.width):
            x = self.x[0] + (self.x[1] - self.x[0]) * column / (self.width - 1)
            low, high = _between(points, x)
            if low is not None and high is not None:
                for row in range(self.row(high), self.row(low) + 1):
                    self.cells[row][column] = band.mark

    def draw(self, curve: Curve) -> None:
        """Draw the points of a curve, and the way between them where it is joined."""
        for column, row in _walk(curve, self.column, self.row):
            self.cells[row][column] = curve.mark

    def dots(self, curve: Curve) -> None:
        """Draw a curve in braille dots, two by four to a cell."""
        bits: dict[tuple[int, int], int] = {}
        for x, y in _walk(curve, lambda v: self.column(v, 2), lambda v: self.row(v, 4)):
            cell = (y // 4, x // 2)
            bits[cell] = bits.get(cell, 0) | _DOTS[y % 4][x % 2]
        for (row, column), value in bits.items():
            self.cells[row][column] = chr(0x2800 + value)

    def rows(self) -> list[str]:
        """Return the drawn rows with the labels of the y axis."""
        out = []
        for index, cells in enumerate(self.cells):
            labelled = index in {0, self.height // 2, self.height - 1}
            value = self.y[1] - (self.y[1] - self.y[0]) * index / (self.height - 1)
            label = f"{_short(value):>{LABEL_WIDTH - 1}} " if labelled else " " * LABEL_WIDTH
            out.append(label + "|" + "".join(cells).rstrip())
        return out

    def foot(self, label: str, width: int) -> list[str]:
        """Return the x axis and its labels."""
        left, right = _short(self.x[0]), _short(self.x[1])
        room = self.width - len(left) - len(right)
        return [
            " " * LABEL_WIDTH + "+" + "-" * self.width,
            (" " * (LABEL_WIDTH + 1) + left + label[: max(room - 2, 0)].center(max(room, 0)) + right)[:width],
        ]


def _short(value: float) -> str:
    """Return a number in at most eight cells."""
    text = f"{value:.4g}"
    return text if len(text) < LABEL_WIDTH else f"{value:.1e}"[: LABEL_WIDTH - 1]


def _walk(curve: Curve, column: _Scale, row: _Scale) -> list[tuple[int, int]]:
    """Return the cells of a curve in order, without leaving the way between two points open."""
    cells: list[tuple[int, int]] = []
    last: tuple[int, int] | None = None
    for x, y in zip(curve.x, curve.y, strict=True):
        if not (math.isfinite(x) and math.isfinite(y)):
            last = None
            continue
        here = (column(x), row(y))
        if last is not None and curve.joined:
            many = max(abs(here[0] - last[0]), abs(here[1] - last[1]), 1)
            across, down = here[0] - last[0], here[1] - last[1]
            cells += [
                (last[0] + round(across * i / many), last[1] + round(down * i / many)) for i in range(1, many)
            ]
        cells.append(here)
        last = here
    return cells


def _between(points: list[tuple[float, float, float]], x: float) -> tuple[float | None, float | None]:
    """Return a band's ends at x, straight between its points."""
    for (x0, low0, high0), (x1, low1, high1) in pairwise(points):
        if min(x0, x1) <= x <= max(x0, x1) and all(map(math.isfinite, (low0, low1, high0, high1))):
            share = 0.0 if x1 == x0 else (x - x0) / (x1 - x0)
            return low0 + (low1 - low0) * share, high0 + (high1 - high0) * share
    return None, None


def _span(low: float, high: float) -> tuple[float, float]:
    """Return a span that is never empty, nor so narrow that its width is lost in rounding."""
    size = max(abs(low), abs(high))
    if size < TINY:
        return -0.5, 0.5
    if high - low > NARROWEST * size:
        return low, high
    return low - 0.1 * size, high + 0.1 * size


def nice_span(low: float, high: float) -> tuple[float, float]:
    """Return round ends around a span, with zero in it where zero is near."""
    low, high = _span(low, high)
    if 0.0 < low < 0.4 * high:
        low = 0.0
    raw = (high - low) / 4
    size = 10.0 ** math.floor(math.log10(raw))
    step = next(size * factor for factor in _STEPS if size * factor >= raw * 0.999)
    return math.floor(low / step + 1e-9) * step, math.ceil(high / step - 1e-9) * step


if TYPE_CHECKING:
    from collections.abc import Callable

    _Scale = Callable[[float], int]
