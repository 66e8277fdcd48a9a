"""What is picked by hand carries the hazards of this very machine, as what is proposed does."""

from __future__ import annotations

from pathlib import Path

import pytest

from calc.sheet_io import sheet_from_plain
from tests.tui.helpers import SMALL, keys, new_app, settled, shipped, until
from tui.picked import item_of


def case(**machine: object):
    """A case on a machine of which only this is known."""
    return sheet_from_plain({"format": 1, "machine": machine, "complaint": "runs_fast"})


# What such machines are known to do to people: common practice, from memory.
@pytest.mark.parametrize(
    ("machine", "key", "hazard"),
    [
        ({"kind": "dc_series"}, "speed@light_load", "series_runaway"),
        ({"kind": "dc_permanent_magnet"}, "speed@spun", "magnet_rotor_live"),
        ({"kind": "induction_1ph"}, "insulation_resistance@isolated", "capacitor_charge"),
        ({"kind": "induction_3ph", "load": {"type": "hoist"}}, "line_current@loaded", "moving_load"),
        ({"kind": "induction_3ph", "hazardous_area": True}, "line_current@loaded", "explosive_atmosphere"),
    ],
)
def test_a_reading_that_is_picked_by_hand_has_the_hazards_of_its_machine(machine, key, hazard):
    found = item_of(key, case(**machine), shipped())
    own = shipped().readings[str(found.measure)].states[str(found.state)].hazards
    assert hazard in found.hazards
    assert set(own) <= set(found.hazards)


async def test_a_series_motor_that_could_run_away_is_told_of_before_its_picked_reading(tmp_path: Path):
    app = new_app(tmp_path)
    plate = {"power": "15 kW", "voltage": "230 V", "current": "78 A", "speed": "720 rpm"}
    sheet = {
        "machine": {"tag": "BH-1", "kind": "dc_series", "nameplate": plate},
        "complaint": "brushes_spark",
    }
    app.desk.book.log_sheet(sheet_from_plain({"format": 1, **sheet}), "R. Varga")
    hazard = shipped().hazards["series_runaway"]
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "BH-1")
        await keys(pilot, "enter")
        await settled(pilot)
        await keys(pilot, "f3", *"armature current loaded", "enter", *"70", "enter")
        await until(pilot, ("Was it read already", "Before readings"))
        await keys(pilot, "y")
        await until(pilot, hazard.name)
