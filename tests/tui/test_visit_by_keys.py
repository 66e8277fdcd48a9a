"""Whole visits by keys: from the casebook to the closed entry. Each test is a task that a technician has."""

from __future__ import annotations

import time
from collections.abc import Awaitable, Callable
from pathlib import Path

import pytest
from textual.pilot import Pilot

from calc.sheet_io import sheet_from_plain
from casebook.bodies import Closed
from casebook.errors import DiskFull
from tests.tui.helpers import PATIENCE_S, SMALL, keys, known_machine, new_app, screen_text, settled, until
from tui.application import PlatesideApp
from tui.screens.casebook import CasebookPage
from tui.screens.worksheet import Worksheet

PLATE = ("7.5 kW", "400", "14.9", "50", "1455", ".84", "88.7", "d")


async def to_worksheet(pilot: Pilot[int], tag: str = "P-104", complaint: str = "runs hot") -> None:
    """Go from the casebook to the worksheet of a known machine."""
    await keys(pilot, "n")
    await until(pilot, "Which machine")
    await keys(pilot, *tag, "enter")
    await until(pilot, "What is wrong")
    await keys(pilot, *complaint, "enter")
    await until(pilot, "faults")
    await settled(pilot)


async def test_a_new_machine_goes_from_its_plate_to_a_worksheet_that_knows_what_to_read_next(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await keys(pilot, "n")
        await until(pilot, "Which machine")
        await keys(pilot, *"P-104", "enter")
        await until(pilot, "What is wrong")
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
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        assert "7.5 kW 400 V 14.9 A 1455 rpm" in screen_text(app)


async def test_a_reading_is_echoed_in_words_before_and_is_on_disk_after_enter(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, "f3", *"line current loaded", "enter", *"15.2 15.9", "enter")
        await until(pilot, "three values with spaces between")
        assert "15.2 15.9" in screen_text(app)
        assert not newest(app).readings


async def test_an_isolated_reading_waits_for_the_isolation_record(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot, complaint="smoke")
        assert "SHUT" in screen_text(app)
        await keys(pilot, "f3", *"line current loaded", "enter")
        await until(pilot, "GATE SHUT")
        await keys(pilot, *"15.2 15.9 14.8", "enter")
        await until(pilot, "Was it read already")
        await keys(pilot, "n")
        await pilot.pause()
        assert not newest(app).readings
        assert "15.2 15.9 14.8" in screen_text(app)


async def test_a_skipped_reading_is_not_proposed_again(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        page = app.screen
        assert isinstance(page, Worksheet) and page.target is not None
        skipped = page.target.key
        await keys(pilot, "f4")
        await until(pilot, "cannot be taken now")
        await settled(pilot)
        assert page.target is not None and page.target.key != skipped
        assert newest(app).skipped[0].what.key == skipped


async def test_a_wrong_reading_is_typed_anew_and_the_log_keeps_both(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, "f7")
        await until(pilot, "What was seen")
        await keys(pilot, "y", "n", "enter")
        await until(pilot, "stored:")
        answers = newest(app).observations
    assert sorted(answers.values()) == [False, True]


async def test_a_case_is_closed_with_what_was_found_and_how_it_is_known(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, "f8")
        await until(pilot, "What was it really")
        await keys(pilot, *"cooling", "enter")
        await until(pilot, "known by")
        await keys(pilot, "r", "enter", *"fins cleaned", "enter", "f8")
        await until(pilot, "Cases, newest first")
        closed = newest(app).closed
    assert closed is not None
    assert (closed.what.found, closed.what.confirmed, closed.what.done) == (
        "cooling_lost",
        "repair",
        "fins cleaned",
    )


async def test_a_closed_case_is_shown_as_it_was_and_can_go_on(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, "f8", *"cooling", "enter")
        await until(pilot, "known by")
        await keys(pilot, "f8")
        await until(pilot, "Cases, newest first")
        await keys(pilot, "enter")
        await until(pilot, "known by: believed")
        await keys(pilot, "f8")
        await until(pilot, "faults")
        assert newest(app).status == "open"


async def test_the_search_narrows_while_it_is_typed(tmp_path: Path):
    app = known_machine(known_machine(new_app(tmp_path)), tag="FAN-7")
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "FAN-7")
        await keys(pilot, "slash", *"p10")
        await pilot.pause()
        text = screen_text(app)
        assert "P-104" in text and "FAN-7" not in text


async def test_torque_and_current_are_drawn_over_speed(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, "ctrl+t")
        assert "R rated" in await until(pilot, "torque over speed")
        await keys(pilot, "right")
        await until(pilot, "line current over speed")


async def test_contradictions_of_a_plate_are_said_while_it_is_typed(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await keys(pilot, "n", *"P-9", "enter", *"runs hot", "enter", "enter")
        await until(pilot, "Nameplate")
        for line in ("7.5 kW", "400", "149", "50", "1455", ".84", "88.7"):
            await keys(pilot, *line, "enter")
        await until(pilot, "14.9 A instead of 149 A")


async def test_a_full_disk_is_told_and_what_was_typed_stays(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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


async def test_a_routine_case_takes_fewer_than_sixty_keystrokes_beyond_the_digits(tmp_path: Path):
    """Known machine, complaint, six readings, closed: what a worksheet may cost in keys."""
    app = known_machine(new_app(tmp_path))
    pressed = 0
    async with app.run_test(size=SMALL) as pilot:

        async def press(*wanted: str) -> None:
            nonlocal pressed
            pressed += sum(not (key.isdigit() or key in {".", "space", " "}) for key in wanted)
            await keys(pilot, *wanted)

        await press("n", "p", "enter", *"rout", "enter")
        await until(pilot, "faults")
        for _ in range(30):
            await settled(pilot)
            if len(newest(app).readings) == 6:
                break
            await take_what_is_proposed(pilot, press)
        await press("f8", "enter")
        await until(pilot, "known by")
        await press("f8")
        await until(pilot, "Cases, newest first")
        assert isinstance(app.screen, CasebookPage)
        case = newest(app)
    assert case.status == "closed"
    assert len(case.readings) == 6
    assert pressed < 60


async def take_what_is_proposed(pilot: Pilot[int], press: Callable[..., Awaitable[None]]) -> None:
    """Do what stands beside next: what comes first, then the middle of the band; skip a question."""
    page = pilot.app.screen
    assert isinstance(page, Worksheet) and page.diagnosis is not None, screen_text(pilot.app)
    item = page.target
    if item is None:  # nothing more is worth its minutes: the technician picks one all the same
        await press("f3", *"age loaded", "enter", *"400 400 400", "enter")
        return
    if item.observation:
        await press("f4")
        return
    first = page.wanted_first()
    bands = {(band.measure, band.state): band for band in page.diagnosis.expected}
    band = bands.get((str(item.measure), str(item.state)))
    value = f"{band.mid:.4g}" if band else "40"
    many = 3 if "three" in page.asks_for(item) else 1
    await press(*" ".join([value] * many), "enter")
    if first == "isolation":
        await until(pilot, "Isolation of")
        await press("y", "enter", "y", "f8")
    elif first == "acknowledge":
        await until(pilot, "Before readings")
        await press("enter")
    await settled(pilot)
    if "Enter again" in screen_text(pilot.app):
        await press("enter")


def newest(app: PlatesideApp):
    """The newest case as the casebook has it on disk."""
    return app.desk.book.case(app.desk.book.cases()[0].id)


async def test_temperature_and_test_voltage_are_typed_with_the_insulation_and_stored(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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


async def test_back_goes_one_question_back_and_keeps_what_was_told(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await keys(pilot, "n")
        await until(pilot, "Which machine")
        await keys(pilot, *"P-104", "enter")
        await until(pilot, "What is wrong")
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
        await keys(pilot, "n")
        await until(pilot, "Which machine")
        await keys(pilot, *"P-104", "enter")
        await until(pilot, "What is wrong")
        await keys(pilot, "enter")
        await until(pilot, "Type or move to a complaint")
        assert len(app.desk.book.cases()) == 1


async def test_leaving_in_the_middle_of_a_new_case_asks_and_keeps_it_as_a_draft(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await keys(pilot, "n")
        await until(pilot, "Which machine")
        await keys(pilot, *"P-104", "enter")
        await until(pilot, "What is wrong")
        await keys(pilot, *"runs hot", "enter")
        await until(pilot, "What kind")
        await keys(pilot, "ctrl+g")
        await until(pilot, "Typed and not stored: the new case of P-104")
        await keys(pilot, "y")
        await pilot.pause()
        draft = app.desk.drafts.load("new_case")
    assert (draft["tag"], draft["complaint"]) == ("P-104", "runs_hot")


async def test_the_reasons_page_says_which_reading_would_turn_the_decision(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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


async def test_an_isolation_that_is_lifted_on_the_gate_page_is_asked_for_again(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
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


async def test_a_word_that_can_mean_only_one_proposed_reading_picks_it_at_once(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, *"line current", "enter")
        await until(pilot, "picked: line current")
        assert "three values in A" in screen_text(app)


async def test_what_is_tried_by_hand_on_the_isolated_machine_waits_for_the_isolation_record(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, "f3", *"turn freely by hand", "enter")
        await until(pilot, "the isolation record comes first")
        await keys(pilot, "y", "enter")
        await until(pilot, "Isolation of P-104")
        await keys(pilot, "f9")
        await pilot.pause()
        assert not newest(app).observed


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


async def test_what_begins_as_it_is_typed_stands_first_in_a_list(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await keys(pilot, "n")
        await until(pilot, "Which machine")
        await keys(pilot, *"P-104", "enter")
        await until(pilot, "What is wrong")
        await keys(pilot, *"no", "enter")
        await until(pilot, "faults")
        assert newest(app).complaint == "noisy_or_vibrating"


def flat(app: PlatesideApp) -> str:
    """The screen as one line of words."""
    return " ".join(screen_text(app).replace("│", " ").split())


async def absent(pilot: Pilot[int], words: str) -> None:
    """Wait until words no longer stand on the screen."""
    end = time.monotonic() + PATIENCE_S
    while words in flat(pilot.app) and time.monotonic() < end:  # type: ignore[arg-type]
        await pilot.pause(0.02)
    assert words not in flat(pilot.app)  # type: ignore[arg-type]


async def test_the_sheet_of_a_case_is_shown_and_written_to_a_file_beside_the_casebook(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_worksheet(pilot)
        await keys(pilot, "f8")
        await until(pilot, "What was it really")
        await keys(pilot, "enter")
        await until(pilot, "known by")
        await keys(pilot, "f4")
        await until(pilot, "Energising")
        await keys(pilot, "f8")
        await until(pilot, "beside the casebook")
        await keys(pilot, *"pump.html", "enter")
        await until(pilot, "written:")
        await keys(pilot, "f8")
        await until(pilot, "beside the casebook")
        await keys(pilot, *"../pump", "enter")
        await until(pilot, "without a folder")
        await keys(pilot, "f9")
        await until(pilot, "known by")
        await keys(pilot, "f5")
        await until(pilot, "Please return with")
    assert (tmp_path / "sheets" / "pump.html").read_text(encoding="utf-8").startswith("<!DOCTYPE html>")
    assert [file.name for file in (tmp_path / "sheets").iterdir()] == ["pump.html"]


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
