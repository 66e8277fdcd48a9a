"""What must hold of the odds, whatever was read."""

import itertools
import json
import math
import os
import random
import subprocess
import sys
import warnings
from functools import cache
from pathlib import Path

import msgspec
import pytest

from calc.kinds import MODELS, twin_of
from calc.quantities import KINDS
from calc.sheet import CaseSheet, Machine, Reading, Value
from calc.sheet_io import read_sheet
from rules.diagnosing import diagnose
from rules.learned import Counts, with_counts
from rules.weigh.posterior import OTHER, weigh
from rules.weigh.reasons import reasons, rival
from tests.rules.makers import case, insulation, reading, shipped, value

from .cases import answer, numbers_of, odds, simulated, typed

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


def apart(one, other):
    return max(abs(one.get(k, 0.0) - other.get(k, 0.0)) for k in one.keys() | other.keys())


def with_readings(sheet, readings):
    return msgspec.structs.replace(sheet, readings=tuple(readings))


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


# What a reading may and may not do.


def test_a_reading_that_says_nothing_changes_nearly_nothing():
    sheet = simulated(4, complaint="trips_under_load")
    blurred = Value(text="7 kW", number=7000.0, unit="kW", resolution=1e9)
    vague = Reading(
        measure="power_factor", state="loaded", values=(Value(text="0.8", number=0.8, resolution=50.0),)
    )
    without = [r for r in sheet.readings if r.measure != "input_power"]
    plain = odds(with_readings(sheet, without))
    assert apart(plain, odds(with_readings(sheet, [*without, vague]))) < 0.02
    power = Reading(measure="input_power", state="loaded", values=(blurred,))
    assert apart(plain, odds(with_readings(sheet, [*without, power]))) < 0.05


def test_a_reading_that_nobody_weighs_changes_nothing_and_is_named():
    sheet = simulated(4, complaint="trips_under_load")
    knowledge = shipped()
    posterior = weigh(sheet, knowledge, twin_of(sheet.machine))
    known = {r.measure for r in posterior.direct} | {s.ask.measure for s in posterior.data.seen}
    measure = next(
        m for m in ("starts_per_hour", "drive_current", "dc_bus_voltage", "overload_class", "brake_voltage")
        if m not in known and not any({m, f"{m}@standby"} & {*f.readings} for f in knowledge.faults.values())
    )  # fmt: skip
    more = with_readings(sheet, [*sheet.readings, typed(measure, "standby", [4.0])])
    assert apart(odds(sheet), odds(more)) < 1e-12
    assert any(measure in note.replace(" ", "_") for note in answer(more).notes)


def test_an_observation_that_no_rule_knows_changes_nothing():
    sheet = simulated(4)
    told = msgspec.structs.replace(sheet, observations={"smells_of_lavender": True})
    assert apart(odds(sheet), odds(told)) < 1e-12


def test_one_hot_bearing_of_two_speaks_for_a_bearing():
    cool = reading("bearing_temperature", "loaded", "47 degC", position="nde")
    hot = reading("bearing_temperature", "loaded", "95 degC", position="de")
    base = odds(case("noisy_or_vibrating", cool))
    found = answer(case("noisy_or_vibrating", cool, hot))
    both = {f.id: f.probability for f in found.faults}
    assert both["bearing_defect"] > 2.0 * base["bearing_defect"]
    assert not found.slips


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


# Evidence works in the right direction.


@pytest.mark.parametrize("efficiency", ["60 %", "10.8 %"])
def test_a_plate_that_contradicts_itself_does_not_decide_the_case(efficiency):
    plate = {"power": "6 kW", "voltage": "400 V", "current": "12.36 A", "power_factor": "0.74"}
    sheet = case("trips_at_start", insulation("0.02 Mohm"), nameplate=plate)
    told = msgspec.structs.replace(sheet.machine.nameplate, efficiency=value(efficiency, "percent"))
    machine = msgspec.structs.replace(sheet.machine, nameplate=told)
    found = odds(msgspec.structs.replace(sheet, machine=machine))
    assert all(math.isfinite(chance) for chance in found.values())
    assert found[OTHER] < 0.5


@pytest.mark.parametrize("rpm", ["2890 rpm", "1455 rpm", "955 rpm"])
def test_any_usual_speed_of_a_motor_whose_plate_cannot_be_read_is_no_fault(rpm):
    found = answer(case("routine_check", reading("speed", "loaded", rpm), plate=False))
    assert found.faults[0].id == "healthy"


@pytest.mark.parametrize("rpm", ["3510 rpm", "1755 rpm", "1165 rpm"])
def test_a_usual_speed_on_60_hz_of_a_motor_whose_plate_cannot_be_read_is_no_fault(rpm):
    found = answer(case("routine_check", reading("speed", "loaded", rpm), plate=False))
    assert found.faults[0].id == "healthy"


@pytest.mark.parametrize("kind", ["dc_series", "dc_shunt"])
def test_a_ripple_frequency_alone_leaves_finite_bands(kind):
    read = reading("ripple_frequency", "loaded", "64.96 Hz")
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        found = answer(case("after_repair", read, kind=kind, nameplate={}))
    assert all(math.isfinite(number) for number in numbers_of(found))


def test_even_windings_speak_against_a_turn_short_and_uneven_ones_for_it():
    plate = {"connection": "star"}
    plate |= {
        "power": "7.5 kW",
        "voltage": "400 V",
        "current": "14.9 A",
        "frequency": "50 Hz",
        "speed": "1455 rpm",
    }

    def of(*texts):
        read = (reading("winding_resistance", "isolated", *texts, method="four_wire"),)
        return odds(case("trips_under_load", *read, nameplate=plate))["turn_short"]

    even, uneven = of("1.912 ohm", "1.910 ohm", "1.911 ohm"), of("1.780 ohm", "1.911 ohm", "1.778 ohm")
    bare = odds(case("trips_under_load", nameplate=plate))["turn_short"]
    assert uneven > 3.0 * bare
    assert even < bare


@pytest.mark.parametrize(("megohm", "least"), [("0.2 Mohm", 0.8), ("800 Mohm", 0.0)])
def test_low_insulation_speaks_for_what_lowers_it(megohm, least):
    found = odds(case("routine_check", insulation(megohm)))
    wet = found["ground_fault"] + found["damp_insulation"]
    assert wet >= least if least else wet < 0.1


def test_confirmed_cases_of_the_shop_shift_the_start():
    sheet = case("noisy_or_vibrating")
    counted = with_counts(shipped(), "induction_3ph", Counts(faults={"misalignment": 30.0}))
    own = {f.id: f.probability for f in diagnose(sheet, knowledge=counted).faults}
    assert own["misalignment"] > 1.5 * odds(sheet)["misalignment"]
    assert sum(own.values()) == pytest.approx(1.0)


def test_no_confirmed_case_shifts_nothing():
    assert with_counts(shipped(), "induction_3ph", Counts()) is shipped()


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
