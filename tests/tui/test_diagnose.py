"""``diagnose`` and ``expect``: the JSON contract of case-sheet format 1, and the text for people."""

import contextlib
import io
import json
import math
import types
from pathlib import Path

import pytest

from calc.quantities import ENERGISED_STATES
from rules.answer import Band, Diagnosis, FaultOdds, NextItem
from tui.cli import main
from tui.commands import diagnose as command
from tui.jsonout import as_json

SHEETS = sorted((Path(__file__).resolve().parent.parent / "sheets").glob("*.yaml"))


def numbers_in(value):
    if isinstance(value, bool) or value is None or isinstance(value, str):
        return
    if isinstance(value, dict):
        value = list(value.values())
    if isinstance(value, list):
        for inner in value:
            yield from numbers_in(inner)
    else:
        yield value


@pytest.fixture(scope="module")
def answers():
    """The answers to all example sheets, from one process."""
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        status = main(["diagnose", "--json", *map(str, SHEETS)])
    assert (status, err.getvalue()) == (0, "")
    return [json.loads(line) for line in out.getvalue().splitlines()]


def test_every_sheet_gets_one_line_in_the_order_given(answers):
    assert [answer["sheet"] for answer in answers] == [str(path) for path in SHEETS]


def test_the_keys_of_the_contract_are_there(answers):
    for answer in answers:
        assert {"sheet", "expected", "faults", "next", "findings", "energise"} <= answer.keys()
        assert answer["energise"]["gate"] in {"shut", "no_finding_forbids"}
        assert {"gate", "needs", "because"} <= answer["energise"].keys()
        for band in answer["expected"]:
            assert {"measure", "state", "low", "mid", "high", "unit", "coverage"} <= band.keys()
            assert band["low"] <= band["mid"] <= band["high"]
        for finding in answer["findings"]:
            assert all(finding[key] for key in ("id", "verdict", "says", "source"))


def test_the_odds_of_a_kind_with_a_model_are_sorted_and_sum_to_one(answers):
    for answer in answers:
        odds = [fault["probability"] for fault in answer["faults"]]
        if answer["model"] == "none":
            assert odds == []
            continue
        assert sum(odds) == pytest.approx(1.0, abs=1e-4)
        assert odds == sorted(odds, reverse=True)
        assert "other" in {fault["id"] for fault in answer["faults"]}


def test_a_kind_without_a_model_says_so(answers):
    (crusher,) = [answer for answer in answers if "wound_rotor" in answer["sheet"]]
    assert crusher["model"] == "none"
    assert crusher["notes"]


def test_every_number_is_finite(answers):
    for answer in answers:
        assert all(math.isfinite(number) for number in numbers_in(answer))


def test_what_comes_next_is_a_reading_in_a_state_or_an_observation(answers):
    for answer in answers:
        for item in answer["next"]:
            assert set(item) & {"measure", "observation"}
            assert ("measure" in item) == ("state" in item)
            assert ("measure" in item) != ("observation" in item)


def test_nothing_energised_comes_next_where_the_complaint_means_stop(answers):
    (shock,) = [answer for answer in answers if "shock_from_frame" in answer["sheet"]]
    assert shock["energise"]["gate"] == "shut"
    assert not {item.get("state") for item in shock["next"]} & ENERGISED_STATES


def test_the_condition_of_a_band_stands_as_text_with_a_unit():
    band = Band(
        measure="open_circuit_voltage", state="spun", low=1, mid=2, high=3, unit="V",
        temperature_c=20.0, speed_rpm=1500.0,
    )  # fmt: skip
    (shown,) = as_json(Diagnosis(expected=(band,)))["expected"]
    assert (shown["temperature"], shown["speed"]) == ("20 degC", "1500 rpm")


def test_what_is_not_finite_becomes_null():
    band = Band(measure="x", state="isolated", low=0.0, mid=math.inf, high=math.nan, unit="ohm")
    (shown,) = as_json(Diagnosis(expected=(band,)))["expected"]
    assert (shown["mid"], shown["high"]) == (None, None)


def test_causes_within_a_fault_stand_inside_it():
    inner = FaultOdds(id="fuse_blown", probability=0.4)
    answer = as_json(Diagnosis(faults=(FaultOdds(id="open_supply_line", probability=0.6, within=(inner,)),)))
    assert answer["faults"] == [
        {"id": "open_supply_line", "probability": 0.6, "within": [{"id": "fuse_blown", "probability": 0.4}]}
    ]


def test_an_observation_that_comes_next_has_no_measure():
    (item,) = as_json(Diagnosis(next=(NextItem(observation="hums", minutes=1.0),)))["next"]
    assert item == {"observation": "hums", "gain_bits": 0.0, "minutes": 1.0}


def test_one_bad_sheet_gets_its_own_line_and_does_not_stop_the_others(run, sheet, tmp_path):
    bad = tmp_path / "bad.yaml"
    bad.write_text(
        "format: 1\nmachine: {kind: induction_3ph, nameplate: {current: 14.9 V}}\ncomplaint: runs_hot\n"
    )
    done = run("diagnose", "--json", str(bad), sheet("pump_overload"))
    first, second = (json.loads(line) for line in done.out.splitlines())
    assert done.status == 2
    assert first["sheet"] == str(bad)
    assert "current" in first["error"]
    assert first["problems"][0]["line"] == 2
    assert second["faults"]
    assert f"{bad}, line 2" in done.err


@pytest.mark.parametrize("name", ["missing.yaml", "."])
def test_a_sheet_that_is_no_file_is_told_with_status_2(run, tmp_path, name):
    done = run("diagnose", str(tmp_path / name))
    assert (done.status, done.out) == (2, "")
    assert done.err.count("\n") == 1


def test_a_sheet_that_stumbles_the_program_is_told_and_the_others_answered(run, sheet, monkeypatch):
    right = command.weigh

    def stumble(given, knowledge, *, name=""):
        if "mixer" in name:
            raise ZeroDivisionError("inner detail")
        return right(given, knowledge, name=name)

    monkeypatch.setattr(command, "weigh", stumble)
    done = run("diagnose", "--json", sheet("mixer_bearing"), sheet("pump_overload"))
    first, second = (json.loads(line) for line in done.out.splitlines())
    assert done.status == 1
    assert "inner detail" not in done.out + done.err
    assert "error" in first
    assert second["faults"]


@pytest.mark.parametrize("path", SHEETS, ids=lambda path: path.stem)
def test_the_answer_in_words_fits_a_screen(run, path):
    done = run("diagnose", str(path))
    assert done.status == 0
    lines = done.out.splitlines()
    assert len(lines) <= 50
    assert max(len(line) for line in lines) <= 80
    assert "Energising: " in done.out


def test_escape_codes_in_a_sheet_never_reach_the_terminal(run, tmp_path):
    path = tmp_path / "tag.yaml"
    path.write_text('format: 1\nmachine: {kind: induction_3ph, tag: "P\\x1b[2J-1"}\ncomplaint: runs_hot\n')
    done = run("diagnose", str(path))
    assert "\x1b" not in done.out + done.err


def test_a_sheet_comes_from_standard_input_too(run, sheet, monkeypatch):
    text = Path(sheet("pump_overload")).read_bytes()
    monkeypatch.setattr("sys.stdin", types.SimpleNamespace(buffer=io.BytesIO(text)))
    done = run("diagnose", "--json", "-")
    assert json.loads(done.out)["faults"][0]["id"] == "overload"


def test_expect_prints_the_bands_of_the_plate_alone(run, sheet):
    done = run("expect", sheet("pump_overload"))
    assert done.status == 0
    assert "line current" in done.out
    assert max(len(line) for line in done.out.splitlines()) <= 80


def test_expect_as_json_has_bands_and_no_odds(run, sheet):
    answer = json.loads(run("expect", "--json", sheet("pump_overload")).out)
    assert answer["expected"]
    assert "faults" not in answer


def test_expect_says_where_a_kind_has_no_model(run, sheet):
    done = run("expect", sheet("wound_rotor_crusher"))
    assert done.status == 0
    assert "no model" in done.out.lower()


@pytest.mark.parametrize("by", ["option", "environment"])
def test_a_shops_own_rules_are_laid_over_the_shipped_ones(run, tmp_path, monkeypatch, by):
    shop = tmp_path / "shop"
    shop.mkdir()
    (shop / "complaints.yaml").write_text(
        "complaints:\n  - {id: squeals, name: squeals like the old winch, source: this shop, runs: 'yes'}\n"
    )
    sheet = tmp_path / "winch.yaml"
    sheet.write_text("format: 1\nmachine: {kind: induction_3ph, tag: W-1}\ncomplaint: squeals\n")
    if by == "environment":
        monkeypatch.setenv("PLATESIDE_RULES", str(shop))
    options = ["--rules", str(shop)] if by == "option" else []
    assert "squeals like the old winch" in run(*options, "diagnose", str(sheet)).out
