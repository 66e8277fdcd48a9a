"""The plain visit on a full disk, after a dropped line, and with lines that nobody means well with."""

import pytest

from casebook.errors import DiskFull
from casebook.sqlite_store import SqliteStore
from tests.tui.plain import OPEN_CASE, newest
from tui.drafts import Drafts
from tui.plate_lines import plate_lines

KIT = 30  # more answers than there are instruments to ask for


def test_a_plate_that_was_begun_is_asked_for_only_where_it_was_not_told(talk, kit, casebook):
    first, second, *rest = plate_lines("induction_3ph")
    dropped = talk("Ines", "WP-9", "induction_3ph", "7.5 kW", "400")
    assert "Left. What was accepted is in the casebook" in dropped.out
    again = talk("Ines", "yes", *([""] * (2 + len(rest))), "runs_hot")
    assert "WP-9: a new case was begun and not stored. Go on with it? yes/no" in again.out
    case = newest(casebook)
    plate = case.machine.nameplate
    assert (first.field, second.field) == ("power", "voltage")
    assert (case.tag, plate.number("power"), plate.number("voltage")) == ("WP-9", 7500.0, 400.0)
    assert Drafts(casebook).names() == []


def test_a_new_case_that_cannot_be_stored_is_tried_again_without_asking_anew(
    talk, kit, casebook, monkeypatch
):
    add, tries = SqliteStore.add, iter([True])

    def refuse_once(store, *arguments, **more):
        if next(tries, False):
            raise DiskFull("the disk that holds casebook.db is full")
        return add(store, *arguments, **more)

    monkeypatch.setattr(SqliteStore, "add", refuse_once)
    blank = [""] * (len(plate_lines("induction_3ph")) - 1)
    told = talk("Ines", "WP-9", "induction_3ph", "7.5 kW", *blank, "runs_hot", "yes", "", *blank)
    assert "is full. Nothing was written" in " ".join(told.out.split())
    assert newest(casebook).machine.nameplate.number("power") == 7500.0


def test_a_place_that_takes_no_draft_does_not_stop_the_visit(talk, known, casebook):
    Drafts(casebook).folder.write_text("a file stands where the folder should be", encoding="utf-8")
    done = talk(*OPEN_CASE, "", "note dry")
    assert newest(casebook).notes[0].what.text == "dry"
    assert "mistake of the program" not in done.err


HOSTILE = [
    "9" * 5000,
    "٣" * 5000,
    "1e" + "9" * 5000,
    "1/" + "0" * 5000,
    "9" * 5000 + "/3",
    "x" * 300_000,
    "e\u0301" * 2000,
    "\x1b]0;t\x07\x9b31m\u202e\u200b",
    "[bold]%s {0} \\",
    "- - -",
    "1 2 3 4 5 6 7 8 9",
    "5 at 99999 C 1e999 V nan",
]
STAGES = {
    "name": (),
    "tag": ("Ines",),
    "kind": ("Ines", "WP-9"),
    "plate": ("Ines", "WP-9", "induction_3ph"),
    "complaint": ("Ines", "WP-104 wash water", "yes"),
    "visit": OPEN_CASE,
    "reading": (*OPEN_CASE, "read"),
    "note": (*OPEN_CASE, "note " + "x" * 10_000_000),
    "isolation": (*OPEN_CASE, "isolate"),
    "correction": (*OPEN_CASE, "seen shaft_turns_freely yes", "correct"),
    "closing": (*OPEN_CASE, "close", "healthy", "believed"),
}


@pytest.mark.parametrize("stage", STAGES)
def test_no_line_is_more_than_asked_for_again(talk, known, kit, casebook, stage):
    for hostile in HOSTILE:
        done = talk(*STAGES[stage], *[hostile] * 12)
        assert "mistake of the program" not in done.out + done.err, (hostile[:20], done.err)
        assert not {"\x1b", "\x07", "\x9b", "\u202e"} & set(done.out + done.err), hostile[:20]
    assert talk("Ines").status == 0
