"""The pages beside the worksheet, by keys: reasons, curves, history."""

from __future__ import annotations

from pathlib import Path

from calc.sheet_io import sheet_from_plain
from casebook.bodies import Closed
from tests.tui.helpers import SMALL, keys, known_machine, new_app, settled, until
from tests.tui.visit import absent, at_worksheet, flat, single_phase_case, to_worksheet
from tui.screens.worksheet import Worksheet


async def test_the_reasons_page_says_which_reading_would_turn_the_decision(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f5")
        await until(pilot, "turns if")
        await absent(pilot, "looking for the reading")
        visit = app.desk.visit(app.desk.book.cases()[0].id)
        turns, screen, decision = visit.turns(), flat(app), visit.weigh().diagnosis.decision
    assert turns
    assert all(turn.to_decision in screen for turn in turns[:1])
    assert decision and decision in screen


async def test_the_shop_s_own_cases_are_left_out_and_taken_in_by_one_key(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    done = known_machine(app).desk.book.cases()[0].id
    app.desk.book.record(done, Closed(found="bearing_defect", confirmed="teardown"), person="R. Varga")
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        page = app.screen
        assert isinstance(page, Worksheet) and page.weighed is not None
        with_them = page.weighed.diagnosis.faults
        await keys(pilot, "f5")
        await until(pilot, "1 confirmed, in the odds")
        await keys(pilot, "f4")
        await until(pilot, "1 confirmed, LEFT OUT")
        await keys(pilot, "f9")
        await settled(pilot)
        without = page.weighed.diagnosis.faults
    odds = [{f.id: f.probability for f in faults}["bearing_defect"] for faults in (with_them, without)]
    assert odds[0] > odds[1]


async def test_torque_and_current_are_drawn_over_speed(tmp_path: Path):
    async with at_worksheet(tmp_path) as (_app, pilot):
        await keys(pilot, "ctrl+t")
        assert "R rated" in await until(pilot, "torque over speed")
        await keys(pilot, "right")
        await until(pilot, "line current over speed")


async def test_insulation_over_the_years_is_drawn_with_its_limit(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    case = app.desk.book.cases()[0].id
    visit = app.desk.visit(case)
    for text in ("900 at 20 C", "400 at 22 C", "150 at 21 C"):
        visit.record(visit.understand("insulation_resistance", "isolated", text))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "P-104")
        await keys(pilot, "enter")
        await settled(pilot)
        await keys(pilot, "ctrl+t")
        await until(pilot, "torque over speed")
        await keys(pilot, "left")
        screen = await until(pilot, "insulation to frame")
    assert "at 40 degC" in screen
    assert "= limit 5 Mohm" in screen


async def test_back_emf_of_a_dc_machine_is_drawn_over_speed(tmp_path: Path):
    app = new_app(tmp_path)
    plate = {"power": "10 hp", "voltage": "240 V", "current": "38 A", "speed": "1750 rpm"}
    machine = {"tag": "BH-1", "kind": "dc_shunt", "nameplate": plate}
    app.desk.book.log_sheet(
        sheet_from_plain({"format": 1, "machine": machine, "complaint": "runs_fast"}), "R. Varga"
    )
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "BH-1")
        await keys(pilot, "enter")
        await settled(pilot)
        await keys(pilot, "ctrl+t")
        screen = await until(pilot, "back-EMF over speed")
    assert "nine in ten" in screen


async def test_torque_of_a_single_phase_machine_is_drawn_with_where_its_switch_opens(
    tmp_path: Path,
):
    app = single_phase_case(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "K-12")
        await keys(pilot, "enter")
        await settled(pilot)
        await keys(pilot, "ctrl+t")
        screen = await until(pilot, "torque over speed")
    assert "S start switch opens" in screen
