"""The curve of a thermal relay."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.errors import RangeError
from calc.overload_relay import trip_time_s

multiples = st.floats(1.3, 20.0)


@given(st.floats(0.5, 60.0), st.floats(0.5, 2.0))
def test_the_reference_time_comes_back_at_7_2_times(time_s, threshold):
    got = trip_time_s(multiple=7.2, threshold=threshold, time_at_reference_s=time_s)
    assert got == pytest.approx(time_s, rel=1e-9)


@given(multiples, multiples)
def test_more_current_trips_sooner(one, two):
    low, high = sorted((one, two))
    at = {m: trip_time_s(multiple=m, threshold=1.2, time_at_reference_s=10.0) for m in (low, high)}
    assert at[high] <= at[low]


@given(multiples, st.floats(0.0, 1.19))
def test_a_warm_relay_trips_sooner(multiple, preload):
    warm = trip_time_s(multiple=multiple, threshold=1.2, time_at_reference_s=10.0, preload=preload)
    assert warm <= trip_time_s(multiple=multiple, threshold=1.2, time_at_reference_s=10.0)


def test_at_its_threshold_it_holds_for_ever():
    assert trip_time_s(multiple=1.2, threshold=1.2, time_at_reference_s=10.0) == math.inf


def test_a_preload_above_the_threshold_has_tripped_already():
    assert trip_time_s(multiple=3.0, threshold=1.2, time_at_reference_s=10.0, preload=1.3) == 0.0


def test_far_above_the_threshold_the_square_of_the_current_times_the_time_is_constant():
    # adiabatic limit: t is proportional to 1/m^2
    at = {m: trip_time_s(multiple=m, threshold=1.05, time_at_reference_s=10.0) for m in (50.0, 100.0)}
    assert at[50.0] / at[100.0] == pytest.approx(4.0, rel=1e-3)


@pytest.mark.parametrize(
    ("wrong", "name"),
    [
        ({"multiple": -1.0}, "multiple"), ({"multiple": math.nan}, "multiple"),
        ({"multiple": math.inf}, "multiple"),
        ({"threshold": 0.0}, "threshold"), ({"threshold": 7.2}, "threshold"),
        ({"time_at_reference_s": 0.0}, "time_at_reference_s"), ({"preload": -0.1}, "preload"),
    ],
)  # fmt: skip
def test_what_the_formula_does_not_allow_is_named(wrong, name):
    right = {"multiple": 2.0, "threshold": 1.2, "time_at_reference_s": 10.0}
    with pytest.raises(RangeError, match=f"^{name} is "):
        trip_time_s(**right | wrong)
