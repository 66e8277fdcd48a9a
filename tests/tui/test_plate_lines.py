"""The nameplate as it is typed, and the machine that comes out of it."""

import pytest

from calc.quantities import KINDS
from calc.sheet_io import sheet_from_plain
from tui.plate_lines import hear, machine_of, plate_lines, raw_of, typed_of


def line(field: str, kind: str = "induction_3ph"):
    """One line of the plate."""
    return next(line for line in plate_lines(kind) if line.field == field)


@pytest.mark.parametrize(
    ("field", "typed", "kept"),
    [
        ("power", "10 hp", "10 hp"),
        ("voltage", "400", "400 V"),
        ("current", "14.9", "14.9 A"),
        ("efficiency", "88.7", "88.7 %"),
        ("efficiency", "0.887", "0.887"),
        ("connection", "d", "delta"),
        ("connection", "Y", "star"),
        ("connection", "wye", "star"),
        ("code_letter", "g", "G"),
        ("brake", "n", "no"),
        ("type", "pump c", "pump centrifugal"),
        ("type", "pump_positive", "pump positive"),
        ("type", "centrifugal pump", "pump centrifugal"),
    ],
)
def test_a_line_is_understood_as_people_type_it(field: str, typed: str, kept: str):
    assert hear(line(field), typed) == (kept, True)


@pytest.mark.parametrize(
    ("field", "typed"),
    [("power", "7.5"), ("current", "14.9 V"), ("connection", "mesh"), ("type", "co"), ("speed", "fast")],
)
def test_what_can_be_read_in_two_ways_or_not_at_all_is_refused_with_what_is_allowed(field: str, typed: str):
    said, fine = hear(line(field), typed)
    assert not fine
    assert said


def test_a_pump_of_no_named_kind_is_the_usual_one_and_that_is_said_with_the_other():
    said, fine = hear(line("type"), "Pump")
    assert fine
    assert said == "centrifugal pump; else write pump positive"
    assert machine_of("induction_3ph", "", {"type": "Pump"})["load"] == {"type": "pump_centrifugal"}


def test_two_ratings_become_a_list_with_the_one_in_use():
    typed = {"power": "10 hp", "voltage": "230/460", "current": "26/13", "connection": "d/y", "in_use": "460"}
    sheet = sheet_from_plain(
        {"format": 1, "machine": machine_of("induction_3ph", "P-1", typed), "complaint": "runs_hot"}
    )
    plate = sheet.machine.nameplate
    assert [(r.voltage.number, r.current.number, r.connection) for r in plate.ratings] == [
        (230.0, 26.0, "delta"),
        (460.0, 13.0, "star"),
    ]
    assert (plate.number("voltage"), plate.number("current"), plate.connection) == (460.0, 13.0, "star")


@pytest.mark.parametrize("kind", KINDS)
def test_a_machine_that_is_recalled_is_typed_again_as_the_same_machine(kind: str):
    typed = {
        "power": "7.5 kW",
        "voltage": "400",
        "speed": "1455",
        "starter": "direct",
        "brake": "no",
        "cable_length": "35",
    }
    first = machine_of(kind, "P-1", typed)
    sheet = sheet_from_plain({"format": 1, "machine": first, "complaint": "routine_check"})
    again = machine_of(kind, "P-1", typed_of(raw_of(sheet.machine)))
    assert sheet_from_plain({"format": 1, "machine": again, "complaint": "routine_check"}) == sheet


def test_a_plate_with_two_ratings_is_typed_again_as_it_was():
    typed = {"voltage": "230/400", "current": "26/15", "connection": "d/y", "in_use": "400"}
    first = machine_of("induction_3ph", "P-1", typed)
    sheet = sheet_from_plain({"format": 1, "machine": first, "complaint": "routine_check"})
    again = typed_of(raw_of(sheet.machine))
    assert (again["voltage"], again["current"], again["connection"]) == (
        "230 V/400 V", "26 A/15 A", "delta/star",
    )  # fmt: skip
    machine = machine_of("induction_3ph", "P-1", again)
    assert sheet_from_plain({"format": 1, "machine": machine, "complaint": "routine_check"}) == sheet
