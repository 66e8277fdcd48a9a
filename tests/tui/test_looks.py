"""Golden screens: what a technician sees at 80 x 24 and at 120 x 40, as text that a diff can show.

``PLATESIDE_GOLDEN=write pytest tests/tui/test_looks.py`` writes them anew; read them before you commit.
The engine's answer is a fixed one here, so that a change of the odds does not change the looks.
"""

from __future__ import annotations

import os
import re
from pathlib import Path

import pytest

from calc.sheet_io import sheet_from_plain
from rules.answer import Band, Diagnosis, Energise, FaultOdds, Finding, GateLine, NextItem, Reason, Turn
from tests.tui.helpers import LARGE, MACHINE, SMALL, keys, new_app, screen_text, settled, until
from tui import compose
from tui.application import PlatesideApp

GOLDEN = Path(__file__).with_name("golden")
SIZES = pytest.mark.parametrize("size", [SMALL, LARGE], ids=["80x24", "120x40"])
READINGS = [
    {"measure": "insulation_resistance", "state": "isolated", "value": "0.4 Mohm"},
    {"measure": "winding_resistance", "state": "isolated", "value": ["1.01 ohm", "1.02 ohm", "1.00 ohm"]},
    {"measure": "line_current", "state": "loaded", "value": ["15.2 A", "18.9 A", "14.8 A"]},
]
ANSWER = Diagnosis(
    model="induction_3ph",
    expected=(
        Band(measure="line_current", state="loaded", low=7.1, mid=12.0, high=17.7, unit="A"),
        Band(measure="winding_resistance", state="isolated", low=0.70, mid=1.03, high=1.51, unit="ohm"),
        Band(measure="insulation_resistance", state="isolated", low=153, mid=1500, high=14700, unit="Mohm"),
    ),
    faults=(
        FaultOdds(
            id="damp_insulation",
            probability=0.54,
            reasons=(
                Reason(
                    about="insulation_resistance@isolated",
                    text="insulation to frame",
                    weight=5.7,
                    read="0.4 Mohm",
                ),
                Reason(about="complaint", text="the complaint", weight=-1.2, read="runs hot"),
            ),
        ),
        FaultOdds(id="turn_short", probability=0.31),
        FaultOdds(id="overload", probability=0.09),
        FaultOdds(id="other", probability=0.06, name="something else"),
    ),
    next=(
        NextItem(
            measure="winding_resistance",
            state="isolated",
            gain_bits=0.4,
            minutes=6,
            leads="U-V, V-W, W-U as connected; press the tips hard and note the winding temperature.",
            hazards=("live_parts",),
            why="tells damp insulation from shorted turns",
            expect="damp: 1.01 1.01 1.01 ohm; shorted turns: 0.97 1.01 0.97 ohm",
            sees="this meter shows shorted turns from 2 % of a phase",
        ),
    ),
    findings=(
        Finding(
            id="low",
            verdict="stop",
            says="insulation below 1 Mohm",
            source="a standard",
            about="insulation_resistance",
        ),
    ),
    energise=Energise(
        gate="shut",
        needs=("insulation_resistance",),
        lines=(
            GateLine(
                id="a",
                needs="insulation not below its limit",
                status="forbids",
                because="insulation read 0.4 Mohm",
            ),
            GateLine(id="b", needs="shaft free", status="needed", asks=("shaft_turns_freely",)),
        ),
    ),
    decision="dry and clean the winding",
    turns=(
        Turn(
            measure="insulation_resistance",
            state="isolated",
            value="20 Mohm",
            from_decision="dry",
            to_decision="leave",
            text="insulation of 20 Mohm or more after drying would turn it to 'no fault'",
        ),
    ),
)


@pytest.fixture
def app(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> PlatesideApp:
    """An app with one open case, its answer fixed."""
    monkeypatch.setattr(compose, "weigh", lambda *_args, **_kwargs: ANSWER)
    monkeypatch.setattr(compose.Visit, "turns", lambda _visit: ANSWER.turns)
    made = new_app(tmp_path)
    sheet = {
        "format": 1,
        "machine": {"tag": "P-104", **MACHINE},
        "complaint": "runs_hot",
        "readings": READINGS,
    }
    made.desk.book.log_sheet(sheet_from_plain(sheet), "R. Varga")
    return made


def compare(app: PlatesideApp, name: str) -> None:
    """Compare the screen with its golden file; case number, times and days are masked."""
    text = re.sub(r"C-[0-9A-Z]{6}", "C-XXXXXX", screen_text(app))
    text = re.sub(r"\d\d:\d\d\b", "hh:mm", re.sub(r"\d{4}-\d\d-\d\d", "yyyy-mm-dd", text)) + "\n"
    width, height = app.size
    file = GOLDEN / f"{name}-{width}x{height}.txt"
    if os.environ.get("PLATESIDE_GOLDEN") == "write":
        GOLDEN.mkdir(exist_ok=True)
        file.write_text(text, encoding="utf-8")
    assert text == file.read_text(encoding="utf-8")
    assert all(len(line) <= width for line in text.splitlines())


@SIZES
async def test_the_casebook_looks_as_it_did(app: PlatesideApp, size: tuple[int, int]):
    async with app.run_test(size=size) as pilot:
        await until(pilot, "P-104")
        compare(app, "casebook")


@SIZES
@pytest.mark.parametrize(
    ("name", "pressed", "words"),
    [
        ("worksheet", [], "faults"),
        ("reasons", ["f5"], "20 Mohm"),
        ("gate", ["f6"], "FORBIDS"),
        ("isolation", ["enter"], "Isolation of"),
        ("pick", ["f3", *"line"], "line current, loaded"),
        ("tick", ["f7", "y", "n"], "What was seen"),
        ("found", ["f8"], "What was it really"),
        ("closing", ["f8", "enter"], "known by"),
        ("machine", ["ctrl+o"], "expected"),
        ("correct", ["ctrl+r"], "What was wrong"),
        ("help", ["f2"], "Keys of this screen"),
    ],
)
async def test_a_page_of_a_case_looks_as_it_did(
    app: PlatesideApp, size: tuple[int, int], name: str, pressed: list[str], words: str
):
    async with app.run_test(size=size) as pilot:
        await until(pilot, "P-104")
        await keys(pilot, "enter")
        await until(pilot, "faults")
        await settled(pilot)
        await keys(pilot, *pressed)
        await until(pilot, words)
        await pilot.pause(0.2)
        compare(app, name)


@SIZES
async def test_the_nameplate_looks_as_it_did(app: PlatesideApp, size: tuple[int, int]):
    async with app.run_test(size=size) as pilot:
        await until(pilot, "P-104")
        await keys(pilot, "n", *"F-7", "enter", *"hot", "enter", "enter")
        await until(pilot, "Nameplate")
        await keys(
            pilot, *"10 hp", "enter", *"230/460", "enter", *"26/13", "enter", *"60", "enter", *"175o", "enter"
        )
        await until(pilot, "plate IN USE the rating in use")
        compare(app, "nameplate")


async def test_nothing_that_is_typed_is_taken_as_markup_or_as_a_code_for_the_terminal(app: PlatesideApp):
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "P-104")
        await keys(pilot, "n", *"[bold]X[/]", "enter")
        assert "[bold]X[/]" in await until(pilot, "What is wrong")


async def test_a_terminal_that_is_too_small_is_told_what_is_needed(app: PlatesideApp):
    async with app.run_test(size=(30, 8)) as pilot:
        await until(pilot, "needs 40x12")


async def test_forty_by_twelve_still_shows_gate_and_the_line_to_type(app: PlatesideApp):
    async with app.run_test(size=(40, 12)) as pilot:
        await keys(pilot, "enter")
        await until(pilot, "faults")
        lines = [line.partition("│") for line in screen_text(app).splitlines()]
        words = [word.strip() for word, *_ in lines]
        assert all(rule for _, rule, _ in lines)  # no line is broken over two
        for word in ("gate", "limit", "faults", "next", "type", "keys"):
            assert word in words
        assert "SHUT" in screen_text(app) and "STOP" in screen_text(app)
