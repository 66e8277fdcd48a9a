"""The plotter: numbers in, text out."""

import math

from hypothesis import given
from hypothesis import strategies as st

from tui.plot import Band, Curve, nice_span, plot


def marks(lines: list[str], mark: str) -> list[tuple[int, int]]:
    """Where a mark stands inside the axes."""
    return [
        (x, y)
        for y, line in enumerate(lines[1:-2])
        for x, c in enumerate(line.partition("|")[2])
        if c == mark
    ]


def test_a_rising_line_rises_to_the_right():
    drawn = marks(plot([Curve(x=[0, 1], y=[0, 10])], width=40, height=12), "*")
    first, last = min(drawn), max(drawn)
    assert first[1] > last[1]


def test_a_joined_curve_has_no_hole_in_any_column():
    x = [i / 10 for i in range(101)]
    drawn = marks(plot([Curve(x=x, y=[math.sin(v) for v in x])], width=60, height=15), "*")
    columns = {column for column, _ in drawn}
    assert columns == set(range(min(columns), max(columns) + 1))


def test_nothing_finite_says_so():
    assert plot([Curve(x=[math.nan], y=[1.0])]) == ["nothing to draw yet"]


def test_a_band_lies_between_its_ends():
    lines = plot(
        [Curve(x=[0, 1], y=[0, 10])], bands=[Band(x=[0, 1], low=[4, 4], high=[6, 6])], width=40, height=24
    )
    rows = {y for _, y in marks(lines, ".")}
    assert rows == {8, 9, 10, 11, 12}  # of rows 0 (ten) to 20 (zero), those from six to four


def test_the_curve_is_drawn_over_the_band():
    lines = plot(
        [Curve(x=[0, 1], y=[5, 5])], bands=[Band(x=[0, 1], low=[0, 0], high=[10, 10])], width=40, height=23
    )
    assert marks(lines, "*")


def test_braille_draws_the_same_span_without_stars():
    lines = plot([Curve(x=[0, 1], y=[0, 10])], width=40, height=12, braille=True)
    assert any(0x2800 < ord(c) < 0x2900 for line in lines for c in line)


@given(
    st.lists(st.tuples(st.floats(-1e9, 1e9), st.floats(-1e9, 1e9)), min_size=1, max_size=30),
    st.integers(30, 120),
    st.integers(8, 40),
)
def test_a_plot_never_leaves_its_frame(points: list[tuple[float, float]], width: int, height: int):
    lines = plot([Curve(x=[x for x, _ in points], y=[y for _, y in points])], width=width, height=height)
    assert len(lines) == height
    assert max(map(len, lines)) <= width


@given(st.floats(-1e6, 1e6), st.floats(0.001, 1e6))
def test_round_ends_hold_what_they_are_made_for(low: float, span: float):
    nice_low, nice_high = nice_span(low, low + span)
    slack = 1e-6 * (abs(low) + span)
    assert nice_low <= low + slack and nice_high >= low + span - slack
