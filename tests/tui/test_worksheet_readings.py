"""The readings of the worksheet: each with the verdict on itself."""

import pytest

from calc.sheet_io import sheet_from_plain
from rules.diagnosing import diagnose
from rules.loading import load_knowledge
from tui.screens.worksheet_lines import reading_lines, readings_of

PLATE = {"power": "7.5 kW", "voltage": "400 V", "current": "14.9 A", "speed": "1455 rpm"}


def ohms(*values):
    return {"measure": "winding_resistance", "state": "isolated", "value": [f"{v} ohm" for v in values]}


@pytest.fixture(scope="module")
def said():
    """Return the lines of two readings of one winding: before a joint was remade, and after."""
    sheet = sheet_from_plain(
        {
            "format": 1,
            "machine": {"kind": "induction_3ph", "nameplate": PLATE},
            "complaint": "trips_under_load",
            "readings": [ohms(1.61, 1.12, 1.62), ohms(1.13, 1.12, 1.13)],
        }
    )
    knowledge = load_knowledge()
    reads = readings_of(sheet, diagnose(sheet, knowledge=knowledge), knowledge)
    return [line.plain for line in reading_lines(reads, 80)]


def test_a_winding_read_again_after_the_joint_was_remade_is_not_marked_by_the_reading_before(said):
    newest, _ = said
    assert "1.13 1.12 1.13" in newest
    assert "STOP" not in newest


def test_the_reading_that_crossed_the_limit_keeps_its_mark(said):
    _, oldest = said
    assert "1.61 1.12 1.62" in oldest
    assert "STOP" in oldest
