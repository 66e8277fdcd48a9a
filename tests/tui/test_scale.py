"""The in-line scale: the band always at the same place, values where they belong."""

import math

from hypothesis import given
from hypothesis import strategies as st

from tui.widgets.scale import WIDTH, column, scale

LEFT, RIGHT = 6, 12


def test_a_value_in_the_middle_of_its_band_stands_in_the_middle():
    assert scale([14.0], 13.0, 15.0) == "------(==o==)------"


def test_three_values_stand_under_their_numbers():
    assert scale([13.1, 14.0, 14.9], 13.0, 15.0) == "------(1=2=3)------"


def test_values_that_coincide_are_starred():
    assert scale([14.0, 14.0, 14.0], 13.0, 15.0) == "------(==*==)------"


def test_an_open_circuit_stands_at_the_right_end_and_a_missing_value_nowhere():
    assert scale([math.inf, math.nan, 14.0], 13.0, 15.0) == "------(==3==)-----1"


def test_a_tenth_of_the_insulation_band_stands_left_of_it_on_a_logarithmic_scale():
    assert column(2e6, 2e7, 5e9) < LEFT


@given(
    low=st.floats(0.001, 1e6),
    factor=st.floats(1.01, 1e4),
    a=st.floats(0, 1e12),
    b=st.floats(0, 1e12),
)
def test_a_higher_value_never_stands_left_of_a_lower_one(low: float, factor: float, a: float, b: float):
    high = low * factor
    small, large = sorted((a, b))
    assert 0 <= column(small, low, high) <= column(large, low, high) < WIDTH


@given(low=st.floats(0.001, 1e6), factor=st.floats(1.01, 1e4), value=st.floats(0, 1e12))
def test_a_value_is_drawn_inside_the_brackets_exactly_when_it_is_inside_the_band(
    low: float, factor: float, value: float
):
    high = low * factor
    assert (LEFT < column(value, low, high) < RIGHT) == (low <= value <= high)
