"""Readings by keys: typed, echoed, asked about, skipped, corrected, ticked; on disk after Enter."""

from __future__ import annotations

from pathlib import Path

import pytest

from casebook.errors import DiskFull
from tests.tui.helpers import SMALL, keys, known_machine, new_app, screen_text, settled, until
from tests.tui.visit import at_worksheet, newest
from tui.screens.worksheet import Worksheet


async def test_a_reading_is_echoed_in_words_before_and_is_on_disk_after_enter(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"line current loaded", "enter")
        await keys(pilot, *"15.2/15.9/14.8")
        await until(pilot, "L1 15.2 A, L2 15.9 A, L3 14.8 A")
        assert not newest(app).readings
        await keys(pilot, "enter")
        await until(pilot, "Before readings in the state 'loaded'")
        await keys(pilot, "enter")
        await until(pilot, "stored:")
        assert newest(app).readings[0].what.reading.numbers == (15.2, 15.9, 14.8)


async def test_a_value_that_can_hardly_be_is_asked_about_once(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"age loaded", "enter")
        await keys(pilot, *"4010 398 402", "enter")
        await until(pilot, "Before readings")
        await keys(pilot, "enter")
        await until(pilot, "Enter again keeps it")
        assert not newest(app).readings
        await keys(pilot, "enter")
        await until(pilot, "stored:")
        assert newest(app).readings[0].what.reading.numbers[0] == 4010.0


async def test_what_is_no_reading_stays_in_the_line_and_nothing_is_stored(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"line current loaded", "enter", *"15.2 15.9", "enter")
        await until(pilot, "three values with spaces between")
        assert "15.2 15.9" in screen_text(app)
        assert not newest(app).readings


async def test_temperature_and_test_voltage_are_typed_with_the_insulation_and_stored(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"insulation resistance", "enter")
        await until(pilot, "add: at 24 C, 500 V")
        await keys(pilot, *"350 at 24 C 500 V")
        await until(pilot, "350 megohm (isolated), at 24 °C, 500 V test voltage")
        await keys(pilot, "enter")
        await until(pilot, "Isolation of P-104")
        await keys(pilot, "y", "enter", "y", "enter", "enter")
        await until(pilot, "stored: insulation")
        reading = newest(app).readings[0].what.reading
    assert reading.numbers == (350e6,)
    assert reading.temperature is not None and reading.temperature.number == 24.0
    assert reading.test_voltage is not None and reading.test_voltage.number == 500.0


async def test_a_word_that_can_mean_only_one_proposed_reading_picks_it_at_once(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, *"line current", "enter")
        await until(pilot, "picked: line current")
        assert "three values in A" in screen_text(app)


async def test_a_skipped_reading_is_not_proposed_again(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        page = app.screen
        assert isinstance(page, Worksheet) and page.target is not None
        skipped = page.target.key
        await keys(pilot, "f4")
        await until(pilot, "cannot be taken now")
        await settled(pilot)
        assert page.target is not None and page.target.key != skipped
        assert newest(app).skipped[0].what.key == skipped


async def test_a_wrong_reading_is_typed_anew_and_the_log_keeps_both(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"line current loaded", "enter", *"15.2 15.9 1.48", "enter")
        await until(pilot, "Before readings")
        await keys(pilot, "enter")
        await until(pilot, "stored:")
        await settled(pilot)
        await keys(pilot, "ctrl+r")
        await until(pilot, "What was wrong?")
        await keys(pilot, "enter")
        await until(pilot, "type it anew")
        await keys(pilot, "enter")
        await keys(pilot, *"15.2 15.9 14.8", "enter")
        await until(pilot, "stored:")
        case = newest(app)
    assert [one.what.reading.numbers for one in case.readings] == [(15.2, 15.9, 14.8)]
    assert sum(line.entry.kind == "reading" for line in case.lines) == 1
    assert sum(line.entry.kind == "correction" for line in case.lines) == 1


async def test_what_was_seen_is_ticked_with_y_and_n(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f7")
        await until(pilot, "What was seen")
        await keys(pilot, "y", "n", "enter")
        await until(pilot, "stored:")
        answers = newest(app).observations
    assert sorted(answers.values()) == [False, True]


async def test_a_full_disk_is_told_and_what_was_typed_stays(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"speed loaded", "enter", *"1450")
        page = app.screen
        assert isinstance(page, Worksheet)
        monkeypatch.setattr(page.visit.book.store, "add", refuse)
        await keys(pilot, "enter")
        if "Before readings" in await until(pilot, ("Before readings", "is full")):
            await keys(pilot, "enter")
        await until(pilot, "is full")
        assert "1450" in screen_text(app)


def refuse(_entries: object) -> int:
    """Refuse as a full disk does."""
    raise DiskFull("the disk that holds casebook.db is full")


async def test_a_unit_a_thousand_times_too_large_is_asked_about_once(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"winding resistance isolated", "enter", *"1.9k 1.9k 1.9k", "enter")
        await until(pilot, "Isolation of P-104")
        await keys(pilot, "y", "enter", "y", "f8")
        await until(pilot, "more than 100 times the")
        assert not newest(app).readings
        await keys(pilot, "enter")
        await until(pilot, "stored: winding resistance")
        assert newest(app).readings[0].what.reading.note == "checked"


async def test_values_with_nothing_asked_for_stay_in_the_line(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        page = app.screen
        assert isinstance(page, Worksheet)
        while page.target is not None:
            await keys(pilot, "f4")
            await settled(pilot)
        await keys(pilot, *"15.2 15.9 14.8", "enter")
        await until(pilot, "No reading is asked for: F3 or a word picks one")
        assert "15.2 15.9 14.8" in screen_text(app)
        assert not newest(app).readings


async def test_a_dash_says_that_a_question_cannot_be_answered(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"burnt smell", "enter")
        await until(pilot, "Does it smell burnt?")
        await keys(pilot, "9", "enter")
        await until(pilot, "y or n; - or F4 where it cannot be told")
        await keys(pilot, "-", "enter")
        await until(pilot, "cannot be taken now: Does it smell burnt?")
        case = newest(app)
    assert [one.what.observation for one in case.skipped] == ["burnt_smell"]
    assert not case.observed


async def test_a_reading_in_the_state_that_was_read_last_stands_first(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    visit = app.desk.visit(app.desk.book.cases()[0].id)
    visit.record(visit.understand("line_current", "light_load", "6.1 6.2 6.0"))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "P-104")
        await keys(pilot, "enter")
        await settled(pilot)
        await keys(pilot, "f3", *"input power", "enter")
        await until(pilot, "input power, light load")
