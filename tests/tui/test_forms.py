"""Pages of lines to type: the line that is typed is seen; Enter stays on one that is not understood."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.tui.helpers import LARGE, SMALL, keys, new_app, screen_text, until
from tui.application import PlatesideApp
from tui.flow import new_case
from tui.plate_lines import plate_lines
from tui.screens.nameplate import NameplatePage
from tui.widgets.typed import TypedLine


async def to_plate(pilot, app: PlatesideApp, kind: str) -> NameplatePage:
    """Open the nameplate page of a kind."""
    app.run_worker(new_case(app, {"tag": "F-7", "complaint": "runs_hot", "kind": kind}))
    await until(pilot, "Nameplate")
    page = app.screen
    assert isinstance(page, NameplatePage)
    return page


@pytest.mark.parametrize(
    ("kind", "size"),
    [("induction_3ph", SMALL), ("induction_1ph", (40, 12)), ("dc_shunt", SMALL), ("induction_3ph", LARGE)],
)
async def test_every_line_of_the_plate_is_on_the_screen_while_it_is_typed(
    tmp_path: Path, kind: str, size: tuple[int, int]
):
    app = new_app(tmp_path)
    async with app.run_test(size=size) as pilot:
        page = await to_plate(pilot, app, kind)
        for line in plate_lines(kind):
            typed = page.query_one(TypedLine).region
            assert typed.bottom <= page.query_one("#remarks").region.y
            assert screen_text(app).splitlines()[typed.y].startswith(line.word)
            await keys(pilot, "down")


async def test_what_is_below_the_last_row_is_told(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await to_plate(pilot, app, "induction_3ph")
        shown = sum(line.word in screen_text(app) for line in plate_lines("induction_3ph"))
        assert f"{len(plate_lines('induction_3ph')) - shown} more lines: Down" in screen_text(app)


async def test_enter_stays_on_a_line_that_is_not_understood_and_says_why(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        page = await to_plate(pilot, app, "induction_3ph")
        await keys(pilot, *"7,5", "enter")
        await until(pilot, "7,5: the unit is missing")
        assert page.line.name == "power"
        await keys(pilot, *" kW", "enter")
        assert page.line.name == "voltage"
        assert page.texts["power"] == "7,5 kW"


async def test_a_pump_is_understood_as_the_usual_one_in_words(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        page = await to_plate(pilot, app, "induction_3ph")
        page.go_to("type")
        await keys(pilot, *"pump")
        await until(pilot, "centrifugal pump; else write pump positive")
        await keys(pilot, "enter")
        assert page.line.name == "mount"


async def test_down_leaves_a_line_that_is_not_understood_as_it_stands(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        page = await to_plate(pilot, app, "induction_3ph")
        await keys(pilot, *"7,5", "enter", "down")
        assert page.line.name == "voltage"
        assert page.texts["power"] == "7,5"


async def test_a_plate_with_a_value_that_no_plate_shows_is_not_done_and_names_its_line(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        page = await to_plate(pilot, app, "induction_3ph")
        for text in ("7.5 kW", "400", "15", "50", "1455", ".84", "887"):
            await keys(pilot, *text, "enter")
        await keys(pilot, "f8")
        await until(pilot, "note EFF 887 %: 0.05 to 0.999 is possible here")
        assert app.screen is page
        assert page.line.name == "efficiency"
        await keys(pilot, *"88.7", "f8")
        await until(pilot, "faults")


async def test_a_plate_with_two_ratings_is_not_done_without_the_one_in_use(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        page = await to_plate(pilot, app, "induction_3ph")
        await keys(pilot, *"7.5 kW", "enter", *"230/400", "enter", *"26/15", "f8")
        await until(pilot, "note IN USE the rating in use: 230 V or 400 V")
        assert page.line.name == "in_use"
        await keys(pilot, *"400", "f8")
        await until(pilot, "faults")
