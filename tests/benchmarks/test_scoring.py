"""The figures of the benchmarks against small cases worked by hand."""

import math

import numpy as np
import pytest

from benchmarks.figures import calibration_gap, mean, share
from benchmarks.graded import Case
from benchmarks.healthy_bands import score_bands
from benchmarks.scoring import odds_of, per_fault, score


def case(name, fault, severity=0.5, **truth):
    sheet = {"format": 1, "machine": {"kind": "induction_3ph"}, "complaint": "routine_check"}
    empty = {"readings": {}, "observations": {}, "healthy_readings": {}}
    return Case(name, sheet, {"fault": fault, "severity": severity, **empty, **truth})


def answer(**odds):
    return {"faults": [{"id": fault, "probability": p} for fault, p in odds.items()]}


def test_odds_are_scaled_to_one_and_doubled_ids_are_added():
    faults = [
        {"id": "a", "probability": 1.0},
        {"id": "b", "probability": 2.0},
        {"id": "a", "probability": 1.0},
    ]
    assert odds_of({"faults": faults}) == {"a": 0.5, "b": 0.5}


def test_log_loss_is_the_mean_of_the_negative_logarithm_of_the_truths_odds():
    cases = [case("1", "healthy", 0.0), case("2", "overload")]
    found = score(cases, [answer(healthy=0.5, overload=0.5), answer(healthy=0.75, overload=0.25)])
    assert found.figures["log_loss"].value == pytest.approx((math.log(2) + math.log(4)) / 2)


def test_a_truth_that_was_not_named_costs_no_more_than_the_floor():
    found = score([case("1", "overload")], [answer(healthy=1.0)])
    assert found.figures["log_loss"].value == pytest.approx(-math.log(1e-4))


def test_an_answer_with_an_error_counts_as_wrong():
    found = score([case("1", "overload")], [{"error": "broken"}])
    assert found.top1 == 0.0
    assert found.errors == 1


def test_healthy_accused_counts_healthy_machines_only():
    cases = [case("1", "healthy", 0.0), case("2", "healthy", 0.0), case("3", "overload")]
    found = score(cases, [answer(healthy=0.9), answer(overload=0.9, healthy=0.1), answer(healthy=1.0)])
    assert found.figures["healthy_accused"].value == 0.5
    assert found.figures["healthy_accused"].n == 2
    assert found.figures["fault_missed"].value == 1.0


def test_a_wrong_first_entry_is_bold_from_odds_of_eight_in_ten():
    cases = [case("1", "overload"), case("2", "overload"), case("3", "overload")]
    answers = [
        answer(healthy=0.8, overload=0.2),
        answer(healthy=0.79, overload=0.21),
        answer(overload=0.9, x=0.1),
    ]
    assert score(cases, answers).figures["boldly_wrong"].value == pytest.approx(1 / 3)


def test_severity_splits_at_three_and_seven_tenths():
    levels = [case("", "overload", s).severity for s in (0.29, 0.3, 0.69, 0.7)]
    assert levels == ["incipient", "moderate", "moderate", "gross"]


def test_of_two_faults_at_once_either_counts_and_their_odds_add():
    both = case("1", "overload", faults=["overload", "damp_insulation"])
    joined = {
        "faults": [
            {"id": "damp_insulation+overload", "probability": 0.5},
            {"id": "overload", "probability": 0.25},
            {"id": "healthy", "probability": 0.25},
        ]
    }
    found = score([both], [joined])
    assert found.top1 == 1.0
    assert found.figures["log_loss"].value == pytest.approx(-math.log(0.75))


def test_per_fault_tells_what_was_said_instead():
    cases = [case("1", "overload"), case("2", "overload")]
    found = per_fault(score(cases, [answer(overload=1.0), answer(healthy=0.6, overload=0.4)]).marks)
    n, right, chance, instead = found["overload"]
    assert (n, right.value, chance, instead) == (2, 0.5, 0.7, [("healthy", 1)])


def test_calibration_error_weighs_the_bins_by_their_cases():
    # bin .9-1: three at .95, two right -> |.667 - .95| * 3; bin .5-.6: one at .55, right -> .45; over 4
    confidence, hits = np.array([0.95, 0.95, 0.95, 0.55]), np.array([1.0, 1.0, 0.0, 1.0])
    assert calibration_gap(confidence, hits) == pytest.approx((0.85 + 0.45) / 4)


def test_full_confidence_falls_into_the_last_bin():
    assert calibration_gap(np.array([1.0]), np.array([1.0])) == 0.0


def test_the_score_interval_of_a_share_is_wilsons():
    # R. G. Newcombe, Stat. Med. 17 (1998) 857, table I: 81/263 -> .2553 to .3662; 0/20 -> 0 to .1611
    found = share(np.r_[np.ones(81), np.zeros(182)])
    assert (found.low, found.high) == (pytest.approx(0.2553, abs=5e-5), pytest.approx(0.3662, abs=5e-5))
    none = share(np.zeros(20))
    assert (none.low, none.high) == (0.0, pytest.approx(0.1611, abs=5e-5))


def test_the_bootstrapped_interval_of_a_mean_is_near_the_normal_one_and_repeats():
    values = np.random.default_rng(3).normal(2.0, 1.0, 400)
    found = mean(values)
    half = 1.96 * values.std() / 20
    assert found.low == pytest.approx(values.mean() - half, abs=0.02)
    assert found.high == pytest.approx(values.mean() + half, abs=0.02)
    assert mean(values) == found


def test_nothing_to_count_is_no_share():
    assert share(np.array([])).n == 0
    assert share(np.array([])).as_share() == "-"


def band(low, high, unit, **more):
    return {
        "measure": "winding_resistance",
        "state": "isolated",
        "low": low,
        "mid": (low + high) / 2,
        "high": high,
        "unit": unit,
        **more,
    }


def test_a_band_is_held_against_the_mean_of_three_at_its_own_temperature():
    # copper: 1.000 ohm at 20 degC is 254.5/294.5 -> 1.1572 ohm at 60 degC
    reading = {
        "measure": "winding_resistance",
        "state": "isolated",
        "temperature": "20 degC",
        "value": ["0.99 ohm", "1.00 ohm", "1.01 ohm"],
    }
    one = case("1", "healthy", 0.0, healthy_readings={"winding_resistance@isolated": reading})
    inside = {"expected": [band(1.15, 1.16, "ohm", temperature="60 degC")]}
    outside = {"expected": [band(0.99, 1.01, "ohm", temperature="60 degC")]}
    found = score_bands([one, one], [inside, outside], twins=False)["winding_resistance@isolated"]
    assert found.coverage.value == 0.5
    assert score_bands([one], [inside], twins=True) == {}


def test_a_band_in_another_unit_is_converted():
    reading = {"measure": "input_power", "state": "no_load", "value": "412 W"}
    one = case("1", "overload", healthy_readings={"input_power@no_load": reading})
    kw = {"measure": "input_power", "state": "no_load", "low": 0.4, "mid": 0.41, "high": 0.42, "unit": "kW"}
    found = score_bands([one], [{"expected": [kw]}], twins=True)["input_power@no_load"]
    assert found.coverage.value == 1.0
    assert found.width == pytest.approx(0.02 / 0.41)
