"""What must come first, by keys: the isolation record, the shut gate, what is tried by hand."""

from __future__ import annotations

from pathlib import Path

from tests.tui.helpers import SMALL, keys, new_app, screen_text, settled, until
from tests.tui.visit import at_worksheet, newest, single_phase_case


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
