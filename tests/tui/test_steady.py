"""The screens go on hearing keys, on a machine that is too busy and after a refusal alike."""

from itertools import count
from pathlib import Path

import pytest
from textual.events import Key, Paste

from tests.tui.helpers import SMALL, keys, known_machine, new_app, settled, until
from tui.screens.ask import Ask
from tui.screens.casebook import CasebookPage
from tui.screens.page import Page
from tui.screens.reasons import Reasons
from tui.screens.worksheet import Worksheet
from tui.widgets.typed import TypedLine


async def test_a_timer_that_starts_late_fires_all_the_same(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "No case yet")
        fired: list[bool] = []
        clock = count()
        with monkeypatch.context() as patch:
            patch.setattr("textual.timer._time.get_time", lambda: float(next(clock)))  # a second at each look
            app.set_timer(0.01, lambda: fired.append(True))
            app.screen.set_timer(0.01, lambda: fired.append(True))
            await pilot.pause(0.1)
        assert fired == [True, True]


async def test_a_paste_waits_behind_the_keys_that_were_typed_before_it(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "No case yet")
        app.post_message(Key("n", "n"))
        app.post_message(Paste("F-7"))
        app.post_message(Key("x", "x"))
        await until(pilot, "Which machine")
        await until(pilot, "F-7x: a machine that the casebook does not know")
        assert app.screen.query_one(TypedLine).value == "F-7x"
        await keys(pilot, "f9")


async def test_thousands_of_keys_that_mean_nothing_on_a_page_hold_up_nothing(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "No case yet")
        for _ in range(3000):
            app.post_message(Key("x", "x"))
        app.post_message(Key("n", "n"))
        await until(pilot, "Which machine")
        assert not app.ahead.held


async def test_a_second_press_before_the_page_of_the_first_stands_opens_nothing_twice(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "P-104")
        page = app.screen
        assert isinstance(page, CasebookPage)
        page.action_open()
        page.action_open()
        page.action_new_case()
        await until(pilot, "faults")
        assert [type(screen) for screen in app.pages()] == [CasebookPage, Worksheet]
        await keys(pilot, "f9")
        await until(pilot, "Cases, newest first")
        await keys(pilot, "n")
        await until(pilot, "Which machine")


async def test_going_back_twice_leaves_one_page(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "P-104")
        await keys(pilot, "enter")
        await until(pilot, "faults")
        await keys(pilot, "f5")
        await until(pilot, "how usual it is")
        page = app.screen
        assert isinstance(page, Page)
        page.action_back()
        page.action_back()
        await pilot.pause()
        assert isinstance(app.screen, Worksheet)
        page.action_back()
        await pilot.pause()
        assert isinstance(app.screen, Worksheet)


async def test_a_page_whose_asker_is_gone_can_be_left(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "No case yet")

        async def ask() -> None:
            await app.push_screen_wait(Ask("Is it so?"))

        asker = app.run_worker(ask())
        await until(pilot, "Is it so?")
        asker.cancel()
        await keys(pilot, "y")
        await until(pilot, "No case yet")


async def test_what_a_thread_finds_after_the_page_is_gone_goes_nowhere(tmp_path: Path):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "P-104")
        await keys(pilot, "enter")
        await until(pilot, "faults")
        await settled(pilot)
        await keys(pilot, "f5")
        await until(pilot, "how usual it is")
        page = app.screen
        assert isinstance(page, Reasons)
        turns = page.visit.turns()
        await page.query("#keys").remove()  # as it is while a page is taken down
        page.turns = None
        page.found(page.diagnosis, turns)
        page.say("too late")
        assert page.turns is None
        await keys(pilot, "f9")
        await until(pilot, "faults")
