"""From a typed reading to level, contrasts and their uncertainty."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc.induction_3ph import fit
from calc.observe import InstrumentError, context, contrasts_matrix, make_seen, project
from calc.sheet import Reading, Value
from calc.twin import Transform
from calc.values import parse_value
from tests.calc.induction_3ph.plates import PUMP, machine

TWIN = fit(machine(**PUMP))
PLAIN = InstrumentError(share=0.01)
LOG, MEAN, LINEAR = (
    Transform("log", floor=0.01),
    Transform("log_mean", floor=0.01),
    Transform("linear", scale=400.0),
)
triples = st.lists(st.floats(0.5, 500.0), min_size=3, max_size=3)
DIMENSION = {"winding_resistance": "resistance", "line_current": "current", "supply_voltage": "voltage"}


def reading(measure, *texts, state="loaded", **more):
    values = tuple(parse_value(text, dimension=DIMENSION[measure]) for text in texts)
    return Reading(measure=measure, state=state, values=values, **more)


def ohms(*texts, **more):
    return reading("winding_resistance", *texts, state="isolated", **more)


@given(triples, st.floats(0.5, 2.0), st.sampled_from([Transform("log"), Transform("log_mean")]))
def test_a_meter_that_reads_high_throughout_moves_the_level_and_no_contrast(values, gain, transform):
    plain, high = project(np.array([values]), transform)[0], project(gain * np.array([values]), transform)[0]
    assert high[0] - plain[0] == pytest.approx(math.log(gain), abs=1e-9)
    assert high[1:] == pytest.approx(plain[1:], abs=1e-9)


@given(st.floats(0.5, 500.0), st.sampled_from([LOG, MEAN, LINEAR]))
def test_three_equal_values_have_no_contrast(value, transform):
    assert project(np.full((1, 3), value), transform)[0, 1:] == pytest.approx([0.0, 0.0], abs=1e-12)


@given(triples, st.permutations([0, 1, 2]), st.sampled_from([LOG, MEAN, LINEAR]))
def test_another_order_turns_the_contrasts_and_keeps_their_length(values, order, transform):
    one = project(np.array([values]), transform)[0]
    other = project(np.array([values])[:, order], transform)[0]
    assert other[0] == pytest.approx(one[0])
    assert np.linalg.norm(other[1:]) == pytest.approx(np.linalg.norm(one[1:]), abs=1e-12)


@pytest.mark.parametrize("count", [2, 3])
def test_contrasts_are_orthonormal_and_see_no_common_part(count):
    rows = contrasts_matrix(count)
    assert rows @ rows.T == pytest.approx(np.eye(count - 1))
    assert rows @ np.ones(count) == pytest.approx(np.zeros(count - 1), abs=1e-15)


def test_a_line_without_current_is_a_contrast_and_no_minus_infinity():
    seen = make_seen(reading("line_current", "0.0 A", "21.3 A", "21.1 A"), TWIN, PLAIN)
    assert np.isfinite(seen.y).all()
    assert np.abs(seen.y[1:]).max() > 0.5


def far_from_sound(*texts):
    sound = make_seen(ohms("1.9 ohm", "1.9 ohm", "1.9 ohm"), TWIN, PLAIN)
    seen = make_seen(ohms(*texts), TWIN, PLAIN)
    assert np.isfinite(seen.y).all()
    return float(np.abs((seen.y - sound.y) / seen.sigma).max())


def test_an_open_circuit_is_far_from_any_winding():
    assert far_from_sound("open", "open", "1.9 ohm") > 20.0


def test_the_end_of_a_meters_range_says_as_much_as_the_word_open():
    assert far_from_sound("20 Mohm", "20 Mohm", "1.9 ohm") > 20.0


def test_a_value_that_was_not_read_leaves_one_contrast():
    missing = Value(text="", number=math.nan, kind="missing")
    full = reading("line_current", "15.2 A", "15.9 A", "14.8 A")
    seen = make_seen(
        Reading(measure="line_current", state="loaded", values=(*full.values[:2], missing)), TWIN, PLAIN
    )
    assert seen.present == (0, 1)
    assert len(seen.y) == 2
    assert seen.y[1] == pytest.approx((15.2 - 15.9) / math.sqrt(2.0) / 15.55, rel=1e-6)


def test_nothing_read_is_nothing_to_compare():
    missing = Value(text="", number=math.nan, kind="missing")
    assert (
        make_seen(Reading(measure="line_current", state="loaded", values=(missing,) * 3), TWIN, PLAIN) is None
    )


def test_a_prediction_is_projected_on_the_values_that_were_read():
    missing = Value(text="", number=math.nan, kind="missing")
    full = reading("line_current", "15.2 A", "15.9 A", "14.8 A")
    seen = make_seen(
        Reading(measure="line_current", state="loaded", values=(missing, *full.values[1:])), TWIN, PLAIN
    )
    assert seen.project(np.array([[99.0, 15.9, 14.8]]))[0] == pytest.approx(seen.y)


# How sure a reading is.


def sigma(found):
    return make_seen(found, TWIN, InstrumentError(share=0.005, floor=0.2, lead_ohm=0.15)).sigma


@pytest.mark.parametrize("measure", ["line_current", "winding_resistance", "supply_voltage"])
def test_fewer_digits_are_less_sure(measure):
    unit = {"line_current": "A", "winding_resistance": "ohm", "supply_voltage": "V"}[measure]
    state = "isolated" if measure == "winding_resistance" else "loaded"
    fine = reading(measure, *[f"19.37 {unit}"] * 3, state=state)
    coarse = reading(measure, *[f"19 {unit}"] * 3, state=state)
    assert (sigma(coarse) > sigma(fine)).all()


def test_leads_blur_the_level_of_a_low_resistance_and_not_its_balance():
    one = make_seen(ohms(*["0.4 ohm"] * 3), TWIN, InstrumentError(share=0.005, lead_ohm=0.0))
    leads = make_seen(ohms(*["0.4 ohm"] * 3), TWIN, InstrumentError(share=0.005, lead_ohm=0.2))
    assert leads.sigma[0] > 3.0 * one.sigma[0]
    assert leads.sigma[1:] == pytest.approx(one.sigma[1:])


@pytest.mark.parametrize("method", ["four_wire", "volt_drop"])
def test_four_wires_have_no_leads(method):
    error = InstrumentError(share=0.005, lead_ohm=0.2)
    two = make_seen(ohms(*["0.412 ohm"] * 3), TWIN, error)
    four = make_seen(ohms(*["0.412 ohm"] * 3, method=method), TWIN, error)
    assert four.sigma[0] < two.sigma[0]


def test_a_tenth_of_an_ohm_on_two_tenths_cannot_judge_balance():
    # A 0.1 ohm step on 0.2 ohm: 14 % sigma of one value (computed in the trade's figures).
    seen = make_seen(ohms(*["0.2 ohm"] * 3), TWIN, InstrumentError(share=0.005, floor=0.1, lead_ohm=0.2))
    assert seen.sigma[1] > 0.14


def test_a_large_unbalance_is_known_less_surely_than_a_small_one():
    small = sigma(reading("line_current", "15.0 A", "15.1 A", "14.9 A"))
    large = sigma(reading("line_current", "21.0 A", "15.1 A", "9.0 A"))
    assert (large[1:] > small[1:]).all()


@settings(max_examples=100)
@given(
    st.lists(st.floats(0.0, 1e6), min_size=3, max_size=3),
    st.sampled_from(sorted(DIMENSION)),
    st.floats(0.0, 100.0),
    st.floats(0.0, 0.5),
    st.floats(0.0, 10.0),
    st.floats(0.0, 10.0),
)
def test_sigma_is_a_finite_number_above_zero_for_anything_typed(values, measure, step, share, floor, lead):
    found = Reading(
        measure=measure,
        state="isolated" if measure == "winding_resistance" else "loaded",
        values=tuple(Value(text=str(v), number=v, resolution=step) for v in values),
    )
    seen = make_seen(found, TWIN, InstrumentError(share=share, floor=floor, lead_ohm=lead))
    assert np.isfinite(seen.y).all()
    assert np.isfinite(seen.sigma).all()
    assert (seen.sigma > 0.0).all()


def test_the_context_of_a_reading_goes_to_the_model():
    warm = ohms(
        "1.9 ohm",
        "1.9 ohm",
        "1.9 ohm",
        temperature=parse_value("24 degC", dimension="temperature"),
        at="motor",
    )
    ask = context(warm)
    assert (ask.key, ask.temperature_c, ask.at) == ("winding_resistance@isolated", 24.0, "motor")


def test_a_range_counts_as_its_middle():
    capacity = Value(text="14-16 A", number=14.0, high=16.0, kind="range")
    seen = make_seen(Reading(measure="line_current", state="loaded", values=(capacity,) * 3), TWIN, PLAIN)
    one = make_seen(reading("line_current", "15 A", "15 A", "15 A"), TWIN, PLAIN)
    assert seen.y == pytest.approx(one.y)
