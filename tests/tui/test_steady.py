"""The screens go on hearing keys, on a machine that is too busy and after a refusal alike."""

from itertools import count
from pathlib import Path

import pytest
from textual.events import Key, Paste

from tests.tui.helpers import SMALL, keys, new_app, until
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
