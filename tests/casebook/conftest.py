"""A casebook in a throw-away folder, and a case sheet of the invented plant."""

import math
import sqlite3
import stat
from collections.abc import Iterator
from pathlib import Path

import pytest

from calc.sheet import CaseSheet, Machine, Nameplate, Reading, Value
from casebook.book import Casebook, open_casebook


def value(text: str, number: float, unit: str, **more: object) -> Value:
    return Value(text=text, number=number, unit=unit, **more)


def mode(path: Path) -> int:
    return stat.S_IMODE(path.stat().st_mode)


def is_sound(path: Path) -> bool:
    connection = sqlite3.connect(path)
    try:
        connection.execute("INSERT INTO case_text (case_text) VALUES ('integrity-check')")
        return connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    finally:
        connection.close()


def a_sheet(tag: str = "P-104", **changes: object) -> CaseSheet:
    plate = Nameplate(
        power=value("7.5 kW", 7500.0, "kW", resolution=100.0),
        voltage=value("400 V", 400.0, "V", resolution=1.0),
        current=value("14.9 A", 14.9, "A", resolution=0.1),
        insulation_class="F",
    )
    amps = tuple(value(f"{amp} A", amp, "A", resolution=0.1) for amp in (15.2, 15.9, 14.8))
    ohm = value("1.9 ohm", 1.9, "ohm", resolution=0.1)
    ohms = (value("open", math.inf, "ohm", kind="open"), ohm, ohm)
    fields: dict[str, object] = {
        "machine": Machine(kind="induction_3ph", tag=tag, nameplate=plate, starter="direct", mount="rigid"),
        "complaint": "trips_under_load",
        "kit": ("clamp_meter", "multimeter"),
        "readings": (
            Reading(measure="line_current", state="loaded", values=amps),
            Reading(measure="winding_resistance", state="isolated", values=ohms),
        ),
        "observations": {"shaft_turns_freely": True, "hums": False},
    }
    return CaseSheet(**{**fields, **changes})


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return tmp_path / "folder" / "casebook.db"


@pytest.fixture
def book(path: Path) -> Iterator[Casebook]:
    with open_casebook(path) as opened:
        yield opened
