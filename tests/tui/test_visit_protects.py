"""What must come first, by keys: the isolation record, the shut gate, what is tried by hand."""

from __future__ import annotations

from pathlib import Path

from textual.pilot import Pilot

from tests.tui.helpers import SMALL, keys, new_app, screen_text, settled, until
from tests.tui.visit import at_worksheet, newest, single_phase_case
from tui.screens.tick import Tick
from tui.widgets.lines import Lines


async def test_an_isolated_reading_waits_for_the_isolation_record(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"winding resistance", "enter", *"1.91 1.92 1.90", "enter")
        await until(pilot, "Isolation of P-104")
        await keys(pilot, "f8")
        await until(pilot, "Not proved")
        assert not newest(app).isolation
        await keys(pilot, "y", "enter", "y", "enter", "enter")
        await until(pilot, "stored: winding resistance")
        case = newest(app)
    assert case.isolation[0].what.by == "R. Varga"
    assert case.isolation[0].what.proved_dead
    assert case.readings[0].what.reading.measure == "winding_resistance"


async def test_a_reading_behind_the_shut_gate_is_asked_about_and_n_stores_nothing(tmp_path: Path):
    async with at_worksheet(tmp_path, complaint="smoke") as (app, pilot):
        assert "SHUT" in screen_text(app)
        await keys(pilot, "f3", *"line current loaded", "enter")
        await until(pilot, "GATE SHUT")
        await keys(pilot, *"15.2 15.9 14.8", "enter")
        await until(pilot, "Was it read already")
        await keys(pilot, "n")
        await pilot.pause()
        assert not newest(app).readings
        assert "15.2 15.9 14.8" in screen_text(app)


async def test_an_isolation_that_is_lifted_on_the_gate_page_is_asked_for_again(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f6")
        await until(pilot, "No isolation is recorded")
        await keys(pilot, "f8")
        await until(pilot, "Isolation of P-104")
        await keys(pilot, "y", "enter", "y", "f8")
        await until(pilot, "stored: isolation record")
        await settled(pilot)
        await keys(pilot, "f6")
        await until(pilot, "R. Varga: isolated, locked out, proved dead")
        await keys(pilot, "f4")
        await until(pilot, "stored: isolation lifted")
        await keys(pilot, "f3", *"winding resistance", "enter", *"1.91 1.92 1.90", "enter")
        await until(pilot, "Isolation of P-104")
        assert not newest(app).readings


async def test_what_is_tried_by_hand_on_the_isolated_machine_waits_for_the_isolation_record(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"turn freely by hand", "enter")
        await until(pilot, "the isolation record comes first")
        await keys(pilot, "y", "enter")
        await until(pilot, "Isolation of P-104")
        await keys(pilot, "f9")
        await pilot.pause()
        assert not newest(app).observed


async def tick_by_hand(pilot: Pilot[int]) -> None:
    """Tick on the list what is tried by hand, and something that is seen from outside."""
    await keys(pilot, "f7")
    await until(pilot, "What was seen")
    page = pilot.app.screen
    assert isinstance(page, Tick)
    names = [name for name, _ in page.questions]
    for name in ("shaft_turns_freely", "hums"):
        page.query_one(Lines).highlighted = names.index(name)
        await keys(pilot, "y")
    assert {name for name, seen in page.answers.items() if seen} == {"shaft_turns_freely", "hums"}


async def test_the_tick_list_stores_what_is_tried_by_hand_only_on_an_isolation_record(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await tick_by_hand(pilot)
        await keys(pilot, "enter")
        await until(pilot, "Isolation of P-104")
        assert not newest(app).observed
        await keys(pilot, "y", "enter", "y", "f8")
        await until(pilot, "stored:")
        await settled(pilot)
        case = newest(app)
        assert case.isolation[0].what.proved_dead
        assert case.observations == {"shaft_turns_freely": True, "hums": True}
        assert case.isolation[0].time_utc <= case.observed["shaft_turns_freely"].time_utc


async def test_a_tick_list_whose_isolation_record_is_left_stores_none_of_its_answers(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await tick_by_hand(pilot)
        await keys(pilot, "enter")
        await until(pilot, "Isolation of P-104")
        await keys(pilot, "f9")
        await until(pilot, "What was seen")
        page = app.screen
        assert isinstance(page, Tick)
        assert set(page.changed()) == {"shaft_turns_freely", "hums"}
        assert not newest(app).observed
        assert not newest(app).isolation


async def test_the_tick_list_asks_for_no_isolation_record_where_nothing_is_tried_by_hand(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await tick_by_hand(pilot)
        page = app.screen
        assert isinstance(page, Tick)
        page.query_one(Lines).highlighted = [name for name, _ in page.questions].index("shaft_turns_freely")
        await keys(pilot, "space", "space", "enter")
        await until(pilot, "stored:")
        assert newest(app).observations == {"hums": True}
        assert not newest(app).isolation


async def test_the_isolation_record_of_a_single_phase_machine_wants_its_capacitors_discharged(tmp_path: Path):
    app = single_phase_case(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "K-12")
        await keys(pilot, "enter")
        await settled(pilot)
        await keys(pilot, "f6")
        await until(pilot, "needed motor capacitors discharged by a resistor, proved below 50 V")
        await keys(pilot, "f9")
        await keys(pilot, "f3", *"main winding resistance", "enter", *"1.1", "enter")
        await until(pilot, "y: motor capacitors discharged by a resistor, proved below 50 V")
        await keys(pilot, "y", "enter", "y", "f8")
        await until(pilot, "Not proved")
        assert not newest(app).isolation
        await keys(pilot, "y", "f8")
        await until(pilot, "stored: main winding resistance")
        await settled(pilot)
        await keys(pilot, "f6")
        await until(pilot, "more lines: PgDn")
        await keys(pilot, "pagedown", "pagedown")
        await until(pilot, "cleared motor capacitors discharged")
        assert newest(app).observations == {"capacitor_discharged": True}
        await keys(pilot, "f4")
        await until(pilot, "stored: isolation lifted")
        await settled(pilot)
        await keys(pilot, "f6")
        await until(pilot, "needed motor capacitors discharged")
