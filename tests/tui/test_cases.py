"""``cases``: where the cases found are of one machine, where its readings lead stands below them."""

import json
from datetime import UTC, datetime, timedelta

import pytest

from calc.sheet_io import sheet_from_plain
from casebook.book import open_casebook

NOW = datetime(2026, 6, 1, 8, 0, tzinfo=UTC)


def sheet(tag, megohms):
    reading = {"measure": "insulation_resistance", "state": "isolated", "value": f"{megohms} Mohm"}
    reading["temperature"] = "40 degC"
    plate = {"power": "7.5 kW", "voltage": "400 V"}
    machine = {"tag": tag, "kind": "induction_3ph", "nameplate": plate}
    return sheet_from_plain(
        {"format": 1, "machine": machine, "complaint": "routine_check", "readings": [reading]}
    )


@pytest.fixture
def plant(casebook):
    """One machine whose insulation halves every 90 days, and another."""
    with open_casebook(casebook) as book:
        for visit, megohms in enumerate((160, 80, 40, 20)):
            book.log_sheet(sheet("FP-2", megohms), "Ines", at=NOW + timedelta(days=90 * (visit - 3)))
        book.log_sheet(sheet("HP-7", 500), "Ines", at=NOW)
    return casebook


def test_the_trend_of_one_machine_stands_below_its_cases_with_the_limit(run, plant):
    """160, 80, 40, 20 Mohm: halves every 90 days; 5 Mohm is two halvings, 180 days, away."""
    text = " ".join(run("cases", "FP-2").out.split())
    assert "trend: insulation halves every 3 months" in text
    assert "reaches the limit of 5 Mohm in about 6 months" in text
    for line in run("cases", "FP-2", "--json").out.splitlines():
        (trend,) = json.loads(line)["trends"]
        assert trend.startswith("insulation halves every 3 months")


def test_the_report_says_the_same_of_the_newest_case(run, plant):
    number = json.loads(run("cases", "FP-2", "--json").out.splitlines()[0])["number"]
    text = " ".join(run("report", number).out.split())
    assert "reaches the limit of 5 Mohm in about 6 months" in text


def test_cases_of_several_machines_have_no_trend(run, plant):
    assert "trend" not in run("cases").out
    assert all("trends" not in json.loads(line) for line in run("cases", "--json").out.splitlines())


def test_one_reading_makes_no_trend(run, plant):
    done = run("cases", "HP-7")
    assert (done.status, done.err) == (0, "")
    assert "trend" not in done.out


@pytest.mark.parametrize("limit", ["0", "-3", "1.5", "many"])
def test_a_limit_below_one_is_refused_with_what_is_allowed_and_status_2(run, plant, limit):
    done = run("cases", "--limit", limit)
    assert (done.status, done.out) == (2, "")
    assert done.err.startswith(f"plateside: argument --limit: {limit}: give a whole number, 1 or more")


def test_a_limit_holds_the_list_to_its_newest_cases(run, plant):
    every = run("cases", "--json").out.splitlines()
    assert run("cases", "--limit", "1", "--json").out.splitlines() == every[:1]
    assert len(run("cases", "--limit", "3", "--json").out.splitlines()) == 3
    assert run("cases", "--limit", "9" * 30, "--json").out.splitlines() == every
