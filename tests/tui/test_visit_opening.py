"""A new case by keys: machine, complaint, plate; back, drafts, and the search for a case."""

from __future__ import annotations

from pathlib import Path

from tests.tui.helpers import SMALL, keys, known_machine, new_app, screen_text, until
from tests.tui.visit import at_worksheet, newest, to_complaint

PLATE = ("7.5 kW", "400", "14.9", "50", "1455", ".84", "88.7", "d")


async def test_a_new_machine_goes_from_its_plate_to_a_worksheet_that_knows_what_to_read_next(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await to_complaint(pilot)
        await keys(pilot, *"runs hot", "enter")
        await until(pilot, "What kind")
        await keys(pilot, "enter")
        await until(pilot, "Nameplate")
        for line in PLATE:
            await keys(pilot, *line, "enter")
        await keys(pilot, "f8")
        await until(pilot, "faults")
        sheet = app.desk.visit(app.desk.book.cases()[0].id).sheet
    assert sheet.machine.nameplate.number("power") == 7500.0
    assert sheet.machine.nameplate.number("current") == 14.9
    assert sheet.machine.nameplate.connection == "delta"
    assert sheet.complaint == "runs_hot"


async def test_a_known_machine_brings_its_plate(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, _pilot):
        assert "7.5 kW 400 V 14.9 A 1455 rpm" in screen_text(app)


async def test_contradictions_of_a_plate_are_said_while_it_is_typed(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await keys(pilot, "n", *"P-9", "enter", *"runs hot", "enter", "enter")
        await until(pilot, "Nameplate")
        for line in ("7.5 kW", "400", "149", "50", "1455", ".84", "88.7"):
            await keys(pilot, *line, "enter")
        await until(pilot, "14.9 A instead of 149 A")


async def test_back_goes_one_question_back_and_keeps_what_was_told(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await to_complaint(pilot)
        await keys(pilot, *"runs hot", "enter")
        await until(pilot, "What kind")
        await keys(pilot, *"single", "enter")
        await until(pilot, "Nameplate")
        await keys(pilot, *"0.75 kW", "f9")
        await until(pilot, "What kind")
        await keys(pilot, "f9")
        await until(pilot, "What is wrong")
        await keys(pilot, "f9")
        await until(pilot, "Which machine")
        await keys(pilot, "enter")
        await until(pilot, "P-104 What is wrong")
        await keys(pilot, "enter")
        await until(pilot, "What kind")
        await keys(pilot, "enter")
        screen = await until(pilot, "Nameplate of a")
    assert "single-phase" in screen
    assert "0.75 kW" in screen


async def test_enter_without_a_choice_takes_no_complaint(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_complaint(pilot)
        await keys(pilot, "enter")
        await until(pilot, "Type or move to a complaint")
        assert len(app.desk.book.cases()) == 1


async def test_what_begins_as_it_is_typed_stands_first_in_a_list(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_complaint(pilot)
        await keys(pilot, *"no", "enter")
        await until(pilot, "faults")
        assert newest(app).complaint == "noisy_or_vibrating"


async def test_leaving_in_the_middle_of_a_new_case_asks_and_keeps_it_as_a_draft(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await to_complaint(pilot)
        await keys(pilot, *"runs hot", "enter")
        await until(pilot, "What kind")
        await keys(pilot, "ctrl+g")
        await until(pilot, "Typed and not stored: the new case of P-104")
        await keys(pilot, "y")
        await pilot.pause()
        draft = app.desk.drafts.load("new_case")
    assert (draft["tag"], draft["complaint"]) == ("P-104", "runs_hot")


async def test_a_draft_of_a_known_machine_is_not_asked_for_its_kind(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    app.desk.drafts.save("new_case", {"tag": "P-104", "complaint": "runs_hot", "kind": "", "lines": {}})
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "a new case was begun")
        await keys(pilot, "up", "up", "enter")
        await until(pilot, "What is wrong")
        await keys(pilot, "enter")
        await until(pilot, "faults")
        assert newest(app).complaint == "runs_hot"


async def test_the_search_narrows_while_it_is_typed(tmp_path: Path):
    app = known_machine(known_machine(new_app(tmp_path)), tag="FAN-7")
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "FAN-7")
        await keys(pilot, "slash", *"p10")
        await pilot.pause()
        text = screen_text(app)
        assert "P-104" in text and "FAN-7" not in text
