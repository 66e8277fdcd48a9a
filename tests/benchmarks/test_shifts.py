"""Shifted cases: what changes, and that nothing else does."""

from collections import Counter

import pytest

from benchmarks.cases import make_cases
from benchmarks.shifts import SHIFTS, coarse_ohms, shifted
from benchmarks.texts import shown, stepped
from calc.sheet_io import sheet_from_plain

CASES = list(make_cases(12, seed=5))


@pytest.mark.parametrize("name", sorted(SHIFTS))
def test_the_same_cases_are_shifted_in_the_same_way_twice(name):
    assert shifted(name, CASES) == shifted(name, CASES)


@pytest.mark.parametrize("name", sorted(set(SHIFTS) - {"gross_slips"}))
def test_every_shifted_sheet_can_be_read(name):
    for case in shifted(name, CASES):
        sheet_from_plain(case.complete_sheet(), file=case.name)


@pytest.mark.parametrize("name", sorted(set(SHIFTS) - {"other_odds"}))
def test_a_reading_on_the_sheet_stays_the_reading_of_the_truth(name):
    for case in shifted(name, CASES):
        for reading in case.sheet["readings"]:
            assert reading == case.truth["readings"][f"{reading['measure']}@{reading['state']}"]


def test_coarse_ohms_are_tenths_with_the_leads_added():
    reading = {
        "measure": "winding_resistance",
        "state": "isolated",
        "value": ["0.042 ohm", "1.872 ohm", "20 Mohm"],
    }
    case = CASES[0]
    truth = {**case.truth, "readings": {"winding_resistance@isolated": reading}}
    changed = coarse_ohms(type(case)("1", case.sheet, truth), None)
    assert changed.truth["readings"]["winding_resistance@isolated"]["value"] == [
        "0.2 ohm",
        "2.1 ohm",
        "20 Mohm",
    ]


def test_other_odds_give_a_third_healthy_and_the_rest_evenly():
    cases = [case for case in CASES for _ in range(10)]
    counts = Counter(case.truth["fault"] for case in shifted("other_odds", cases))
    healthy = counts.pop("healthy")
    assert healthy == round(0.35 * len(cases))
    assert max(counts.values()) - min(counts.values()) <= 1


@pytest.mark.parametrize(
    ("text", "factor", "moved"),
    [
        ("14.9 A", 10, "149 A"),
        ("1441 rpm", 0.1, "144.1 rpm"),
        ("0.42 ohm", 0.1, "0.042 ohm"),
        ("20 Mohm", 10, "200 Mohm"),
    ],
)
def test_a_moved_decimal_point_keeps_the_digits(text, factor, moved):
    assert shown(text, factor) == moved


@pytest.mark.parametrize(
    ("number", "step", "text"), [(0.449, 0.1, "0.4 A"), (12.8, 0.5, "13.0 A"), (118.6, 1, "119 A")]
)
def test_a_display_shows_its_steps(number, step, text):
    assert stepped(number, step, "A") == text
