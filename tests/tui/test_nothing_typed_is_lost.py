"""A full disk, a place that may not be written, a program that is killed: what was typed stays."""

from __future__ import annotations

import os
import time
from pathlib import Path

import pytest
from textual.pilot import Pilot

from casebook.errors import CasebookError, DiskFull
from tests.tui.helpers import PATIENCE_S, SMALL, keys, new_app, screen_text, until
from tests.tui.visit import at_worksheet, newest, to_closing, to_complaint
from tui.application import PlatesideApp
from tui.screens.casebook import CasebookPage


class Disk:
    """A disk that is full until it is freed."""

    def __init__(self, app: PlatesideApp, monkeypatch: pytest.MonkeyPatch) -> None:
        self.app, self.patch = app, monkeypatch

    def fill(self) -> None:
        """Refuse every entry from now on."""

        def refuse(*_: object, **__: object) -> int:
            raise DiskFull("the disk that holds casebook.db is full")

        self.patch.setattr(self.app.desk.book.store, "add", refuse)

    def free(self) -> None:
        """Take entries again."""
        self.patch.undo()


async def refused(pilot: Pilot[int], *pressed: str) -> str:
    """Press keys that would store something; return the screen that says why it cannot be."""
    await keys(pilot, *pressed)
    return await until(pilot, "is full. Nothing was written. Free some space")


async def test_a_remark_stays_in_its_line_until_it_is_stored(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    async with at_worksheet(tmp_path) as (app, pilot):
        disk = Disk(app, monkeypatch)
        disk.fill()
        await keys(pilot, "ctrl+n")
        await until(pilot, "for the log")
        assert "oil at the seal" in await refused(pilot, *"oil at the seal", "enter")
        disk.free()
        await keys(pilot, "enter")
        await until(pilot, "stored: remark")
        assert [note.what.text for note in newest(app).notes] == ["oil at the seal"]


async def test_what_was_found_and_done_stays_until_the_case_is_closed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    async with at_worksheet(tmp_path) as (app, pilot):
        disk = Disk(app, monkeypatch)
        await to_closing(pilot, "bearing")
        disk.fill()
        await keys(pilot, "enter", *"bearings replaced", "enter")
        assert "bearings replaced" in await refused(pilot, "f8")
        disk.free()
        await keys(pilot, "f8")
        await until(pilot, "Cases, newest first")
        closed = newest(app).closed
    assert closed is not None
    assert closed.what.done == "bearings replaced"


async def test_an_isolation_record_stays_until_it_is_stored(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    async with at_worksheet(tmp_path) as (app, pilot):
        disk = Disk(app, monkeypatch)
        await keys(pilot, "f3", *"winding resistance isolated", "enter", *"1.9 1.9 1.9", "enter")
        await until(pilot, "Isolation of P-104")
        disk.fill()
        await refused(pilot, "y", "enter", "y", "enter", *"feeder 7", "f8")
        assert "feeder 7" in screen_text(app)
        assert not newest(app).isolation
        disk.free()
        await keys(pilot, "f8")
        await until(pilot, "stored: winding resistance")
        assert newest(app).isolation[-1].what.points == "feeder 7"


async def test_ticked_answers_are_stored_all_or_none(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    async with at_worksheet(tmp_path) as (app, pilot):
        disk = Disk(app, monkeypatch)
        await keys(pilot, "f7")
        await until(pilot, "What was seen")
        disk.fill()
        await keys(pilot, "y", "n", "enter")
        await until(pilot, "is full")
        assert not newest(app).observations
        disk.free()
        await keys(pilot, "enter")
        await until(pilot, "stored:")
        assert sorted(newest(app).observations.values()) == [False, True]


async def test_a_new_case_that_cannot_be_stored_goes_back_to_its_last_question(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        disk = Disk(app, monkeypatch)
        await to_complaint(pilot, "F-7")
        await keys(pilot, *"runs hot", "enter")
        await until(pilot, "What kind")
        await keys(pilot, "enter")
        await until(pilot, "Nameplate")
        disk.fill()
        await keys(pilot, *"10 hp", "enter", *"460", "enter", "f8")
        await until(pilot, "could not be stored")
        await keys(pilot, "n")
        assert "460" in await until(pilot, "Nameplate")
        disk.free()
        await keys(pilot, "f8")
        await until(pilot, "faults")
        assert newest(app).machine.nameplate.voltage is not None
    assert not app.desk.drafts.names()


async def test_a_refusal_in_the_middle_of_a_key_leaves_every_key_working(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    async with at_worksheet(tmp_path) as (app, pilot):

        def damaged(*_: object, **__: object) -> int:
            raise CasebookError("casebook.db is damaged")

        with monkeypatch.context() as patch:
            patch.setattr(app.desk, "rows", damaged)
            patch.setattr(app.desk.book.store, "count", damaged)
            await keys(pilot, "f9")
            await until(pilot, "casebook.db is damaged")
            await keys(pilot, "f3", *"pump")
            await until(pilot, "casebook.db is damaged")
        await keys(pilot, "backspace", "f2")
        await until(pilot, "Keys of this screen")
        await keys(pilot, "f9")
        assert isinstance(app.screen, CasebookPage)
        await keys(pilot, "ctrl+n")
        await until(pilot, "Which machine")


async def test_what_is_typed_is_in_its_draft_a_moment_later(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"speed loaded", "enter", *"1450")
        await until(pilot, "1450")
        assert await drafted(app, pilot) == "1450"


async def drafted(app: PlatesideApp, pilot: Pilot[int]) -> str:
    """Wait until something typed is in a draft by itself; return it."""
    end = time.monotonic() + PATIENCE_S
    while time.monotonic() < end:
        for name in app.desk.drafts.names():
            return str(app.desk.drafts.load(name)["typed"])
        await pilot.pause(0.05)
    raise AssertionError("no draft")


async def test_a_reading_that_waits_for_its_hazards_is_in_the_draft(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await keys(pilot, "f3", *"line current loaded", "enter", *"15 15 15", "enter")
        await until(pilot, "Before readings")
        app.keep_drafts()
        (name,) = app.desk.drafts.names()
        assert app.desk.drafts.load(name)["typed"] == "15 15 15"
        await keys(pilot, "enter")
        await until(pilot, "stored: line current")
        assert not app.desk.drafts.names()


async def test_what_was_typed_on_closing_is_there_after_the_line_dropped(tmp_path: Path):
    async with at_worksheet(tmp_path) as (app, pilot):
        await to_closing(pilot, "bearing")
        await keys(pilot, "enter", *"bearings replaced")
        await until(pilot, "bearings replaced")
        app.keep_drafts()  # what a dropped line does first
        case = newest(app).id
    again = new_app(tmp_path)
    async with again.run_test(size=SMALL) as pilot:
        assert again.desk.book.cases()[0].id == case
        await until(pilot, "Cases, newest first")
        await keys(pilot, "enter")
        await until(pilot, "faults")
        await to_closing(pilot, "bearing")
        assert "bearings replaced" in screen_text(again)
        await keys(pilot, "f8")
        await until(pilot, "Cases, newest first")
        assert newest(again).closed is not None
    assert not again.desk.drafts.names()


async def test_a_second_new_case_does_not_touch_the_draft_of_the_first(tmp_path: Path):
    app = new_app(tmp_path)
    app.desk.drafts.save("new_case", {"tag": "F-7", "complaint": "runs_hot", "kind": "", "lines": {}})
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "F-7: a new case was begun")
        await to_complaint(pilot, "M-9")
        app.keep_drafts()
        assert sorted(app.desk.drafts.load(name)["tag"] for name in app.desk.drafts.names()) == ["F-7", "M-9"]
        await keys(pilot, "f9")
        await until(pilot, "Which machine")
        await keys(pilot, "f9")
        await until(pilot, "F-7: a new case was begun")
        assert "M-9" not in screen_text(app)


async def test_leaving_asks_again_where_no_draft_can_be_kept(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    async with at_worksheet(tmp_path) as (app, pilot):
        monkeypatch.setattr(app.desk.drafts, "save", lambda *_, **__: "No space left on device")
        await keys(pilot, *"1450", "ctrl+g")
        await until(pilot, "Leave?")
        await keys(pilot, "y")
        await until(pilot, "No draft can be kept (No space left on device)")
        await keys(pilot, "n")
        await until(pilot, "faults")
        assert "1450" in screen_text(app)


async def test_where_name_and_kit_cannot_be_kept_the_visit_goes_on(tmp_path: Path):
    app = new_app(tmp_path, person="")
    app.desk.drafts.folder.write_text("a file stands where the folder should be", encoding="utf-8")
    async with app.run_test(size=SMALL) as pilot:
        await keys(pilot, "f5")
        await until(pilot, "your name")
        await keys(pilot, *"Ines", "f8")
        await until(pilot, "could not be kept")
        await to_complaint(pilot)
        assert app.desk.person == "Ines"


@pytest.mark.skipif(os.name == "nt", reason="modes are a matter of POSIX")
def test_a_draft_of_bytes_that_are_no_text_is_kept(tmp_path: Path):
    app = new_app(tmp_path)
    assert app.desk.drafts.save("case-7", {"typed": "15\udcff.2"}) == ""
    assert app.desk.drafts.load("case-7") == {"typed": "15?.2"}
    app.desk.close()
