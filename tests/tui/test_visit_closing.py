"""From the worksheet to the closed entry by keys, and the printed sheet; a routine case and what it costs."""

from __future__ import annotations

from collections.abc import Awaitable, Callable
from pathlib import Path

from textual.pilot import Pilot

from tests.tui.helpers import SMALL, keys, known_machine, new_app, screen_text, settled, until
from tests.tui.visit import at_worksheet, newest, single_phase_case, to_closing
from tui.screens.casebook import CasebookPage
from tui.screens.worksheet import Worksheet


async def test_a_case_is_closed_with_what_was_found_and_how_it_is_known(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await to_closing(pilot, "cooling")
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
    async with at_worksheet(tmp_path) as (app, pilot):
        await to_closing(pilot, "cooling")
        await keys(pilot, "f8")
        await until(pilot, "Cases, newest first")
        await keys(pilot, "enter")
        await until(pilot, "known by: believed")
        await keys(pilot, "f8")
        await until(pilot, "faults")
        assert newest(app).status == "open"


async def test_the_sheet_of_a_case_is_shown_and_written_to_a_file_beside_the_casebook(tmp_path: Path):
    async with at_worksheet(tmp_path) as (_app, pilot):
        await to_closing(pilot)
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


async def test_what_is_read_after_the_repair_is_kept_with_the_closing_and_on_the_sheet(tmp_path: Path):
    app = single_phase_case(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "K-12")
        await keys(pilot, "enter")
        await settled(pilot)
        await to_closing(pilot, "main winding or its")
        await keys(pilot, "r", "enter", *"lead crimped", "enter", "enter", *"1,1 at 25")
        await until(pilot, "main winding resistance: 1.1 ohm (isolated)")
        await keys(pilot, "enter", "f8")
        await until(pilot, "Isolation of K-12")
        assert newest(app).status == "open"
        await keys(pilot, "y", "enter", "y", "enter", "y", "f8")
        await until(pilot, "Cases, newest first")
        await keys(pilot, "enter")
        await until(pilot, "re-test main winding resistance, isolated: 1,1 ohm expected")
        case = newest(app)
    assert case.closed is not None
    (again,) = case.closed.what.retested
    assert again.reading.numbers == (1.1,)
    assert again.expected
    assert not case.readings  # no evidence on the fault


async def test_a_retest_value_that_can_hardly_be_is_asked_about_once(tmp_path: Path):
    app = single_phase_case(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "K-12")
        await keys(pilot, "enter")
        await settled(pilot)
        await to_closing(pilot, "main winding or its")
        await keys(pilot, "enter", "enter", "enter", *"1.1k", "enter", "f8")
        await until(pilot, "Isolation of K-12")
        await keys(pilot, "y", "enter", "y", "enter", "y", "f8")
        await until(pilot, "more than 100 times the")
        assert newest(app).status == "open"
        await keys(pilot, "f8")
        await until(pilot, "Cases, newest first")
        closed = newest(app).closed
    assert closed is not None and closed.what.retested[0].reading.note == "checked"


async def test_the_fault_that_was_picked_last_is_closed_with_not_that_of_a_draft(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        page = app.screen
        assert isinstance(page, Worksheet)
        app.desk.drafts.save(f"closing-{page.draft_name}", {"found": "rotor rub", "done": "fins cleaned"})
        await to_closing(pilot, "cooling")
        await until(pilot, "done fins cleaned")
        await keys(pilot, "f8")
        await until(pilot, "Cases, newest first")
        closed = newest(app).closed
    assert closed is not None
    assert (closed.what.found, closed.what.done) == ("cooling_lost", "fins cleaned")
