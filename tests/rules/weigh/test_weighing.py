"""What must hold of the odds, whatever was read."""

import itertools
import json
import math
import os
import random
import subprocess
import sys
from functools import cache
from pathlib import Path

import msgspec
import pytest

from calc.kinds import MODELS, twin_of
from calc.quantities import KINDS
from calc.sheet import CaseSheet, Machine
from calc.sheet_io import read_sheet
from rules.weigh.posterior import OTHER, weigh
from rules.weigh.reasons import reasons, rival
from tests.rules.makers import case, insulation, reading, shipped

from .cases import answer, apart, numbers_of, odds, simulated, with_readings

SHEETS = sorted((Path(__file__).parents[2] / "sheets").glob("*.yaml"))
FAULTY = (
    ("open_line", 0), ("series_resistance", 1), ("turn_short", 2), ("voltage_unbalance", 0),
    ("broken_bars", 0),
    ("open_phase", 1), ("excess_load", 0),
)  # fmt: skip
MODELLED = [path for path in SHEETS if read_sheet(path).machine.kind in MODELS]
each_sheet = pytest.mark.parametrize("path", MODELLED, ids=lambda p: p.stem)


@cache
def sheet_of(path: Path) -> CaseSheet:
    return read_sheet(path)


@cache
def posterior_of(path: Path):
    sheet = sheet_of(path)
    return weigh(sheet, shipped(), twin_of(sheet.machine))


@cache
def answer_of(path: Path):
    return answer(sheet_of(path))


# Odds are odds.


@each_sheet
def test_odds_lie_between_nought_and_one_and_sum_to_one(path):
    found = answer_of(path).faults
    assert sum(f.probability for f in found) == pytest.approx(1.0, abs=1e-9)
    assert all(0.0 <= f.probability <= 1.0 for f in found)
    assert len({f.id for f in found}) == len(found)
    assert OTHER in {f.id for f in found}
    assert [f.probability for f in found] == sorted((f.probability for f in found), reverse=True)


@each_sheet
def test_causes_inside_a_fault_carry_at_most_its_odds(path):
    for fault in answer_of(path).faults:
        assert sum(part.probability for part in fault.within) <= fault.probability + 1e-9
        assert all(part.probability >= 0.0 for part in fault.within)


@each_sheet
def test_every_number_of_an_answer_is_finite(path):
    assert all(math.isfinite(number) for number in numbers_of(answer_of(path)))


@each_sheet
def test_every_band_is_in_order(path):
    assert answer_of(path).expected
    for band in answer_of(path).expected:
        assert band.low <= band.mid <= band.high, band


# Order and repetition.


@each_sheet
def test_the_order_of_different_readings_does_not_matter(path):
    sheet = sheet_of(path)
    if len({r.key for r in sheet.readings}) < len(sheet.readings):
        pytest.skip("the last of several readings of one thing counts")
    mixed = list(sheet.readings)
    random.Random(3).shuffle(mixed)
    again = odds(with_readings(sheet, mixed))
    assert apart({f.id: f.probability for f in answer_of(path).faults}, again) < 1e-4


@pytest.mark.parametrize("order", list(itertools.permutations(range(3)))[1:], ids=str)
def test_the_order_of_three_insulation_readings_does_not_matter(order):
    three = (
        reading("insulation_resistance_30s", "isolated", "900 Mohm"),
        reading("insulation_resistance", "isolated", "3 Mohm"),
        reading("insulation_resistance_10min", "isolated", "20 Mohm"),
    )
    assert (
        apart(odds(case("routine_check", *three)), odds(case("routine_check", *(three[k] for k in order))))
        < 0.01
    )


def test_the_last_of_two_readings_of_one_thing_counts():
    first, last = insulation("2 Mohm"), insulation("800 Mohm")
    assert apart(odds(case("routine_check", first, last)), odds(case("routine_check", last))) < 1e-9


@pytest.mark.parametrize(("effect", "place"), FAULTY)
@pytest.mark.parametrize("steps", [1, 2])
def test_rotating_the_three_lines_of_every_reading_leaves_the_odds(effect, place, steps):
    sheet = simulated(5 * place + 1, effect, place=place, complaint="runs_hot")
    rotated = with_readings(
        sheet,
        [
            msgspec.structs.replace(r, values=r.values[-steps:] + r.values[:-steps])
            if len(r.values) == 3
            else r
            for r in sheet.readings
        ],
    )
    assert apart(odds(sheet), odds(rotated)) < 0.005


@each_sheet
def test_the_same_sheet_gives_the_same_bytes(path):
    assert msgspec.json.encode(answer_of(path)) == msgspec.json.encode(answer(sheet_of(path)))


def test_another_process_with_another_hash_seed_gives_the_same_bytes():
    script = (
        "import sys, msgspec; from calc.sheet_io import read_sheet; from rules.diagnosing import diagnose;"
        "from tests.rules.makers import shipped;"
        "answers = [diagnose(read_sheet(p), knowledge=shipped()) for p in sys.argv[1:]];"
        "[print(msgspec.json.encode(a).decode()) for a in answers]"
    )
    paths = [str(path) for path in MODELLED[:3]]
    printed = [
        subprocess.run(
            [sys.executable, "-c", script, *paths],
            env={**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": str(Path(__file__).parents[3])},
            capture_output=True, text=True, check=True,
        ).stdout
        for seed in ("1", "2")
    ]  # fmt: skip
    assert printed[0] == printed[1]
    assert len([json.loads(line) for line in printed[0].splitlines()]) == 3


# Reasons.


@each_sheet
def test_the_weights_of_all_reasons_add_up_to_the_odds(path):
    posterior = posterior_of(path)
    for fault, chance in posterior.odds.items():
        against = rival(posterior) if fault == "healthy" else "healthy"
        if fault == OTHER or not (chance > 1e-280 and posterior.odds[against] > 1e-280):
            continue
        found = reasons(posterior, fault, against)
        expected = math.log(chance / posterior.odds[against])
        assert sum(r.weight for r in found) == pytest.approx(expected, abs=1e-6), fault


@each_sheet
def test_what_is_shown_carries_the_reasons_of_the_leading_faults(path):
    found = answer_of(path)
    chances = {f.id: f.probability for f in found.faults}
    against = max((k for k in sorted(chances) if k not in {"healthy", OTHER}), key=lambda k: chances[k])
    for fault in found.faults[:4]:
        if fault.id == OTHER:
            continue
        other = against if fault.id == "healthy" else "healthy"
        assert fault.reasons
        if min(fault.probability, chances[other]) > 1e-280:
            weight = sum(r.weight for r in fault.reasons)
            assert weight == pytest.approx(math.log(fault.probability / chances[other]), abs=1e-6)
        assert all(r.text for r in fault.reasons)


# Kinds without a model.


@pytest.mark.parametrize("kind", sorted(set(KINDS) - set(MODELS)))
def test_a_kind_without_a_model_says_so_and_gives_no_odds(kind):
    sheet = CaseSheet(
        machine=Machine(kind=kind), complaint="routine_check", readings=(insulation("0.3 Mohm"),)
    )
    found = answer(sheet)
    assert found.model == "none"
    assert not found.faults
    assert not found.expected
    assert found.notes
    assert found.energise.gate == "shut"
    assert any(f.verdict == "stop" for f in found.findings)
