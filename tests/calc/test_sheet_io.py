"""Case sheets in and out: everything that is written is read as the same sheet."""

import math
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc import vocabulary as words
from calc.errors import InputError
from calc.quantities import KINDS, MEASURES, STATES
from calc.sheet_io import read_sheet, sheet_from_plain, sheet_from_text, sheet_to_plain, sheet_to_yaml

SHEETS = sorted((Path(__file__).parents[1] / "sheets").glob("*.yaml"))


def same(one, other):
    """Compare two sheets; nan equals nan."""
    return repr(one) == repr(other)


@pytest.mark.parametrize("path", SHEETS, ids=lambda path: path.stem)
def test_every_example_sheet_is_read_and_survives_a_round_trip(path):
    sheet = read_sheet(path)
    assert same(sheet_from_text(sheet_to_yaml(sheet), file="again"), sheet)
    assert same(sheet_from_plain(sheet_to_plain(sheet)), sheet)


def test_the_example_sheets_cover_every_kind_that_has_a_model():
    kinds = {read_sheet(path).machine.kind for path in SHEETS}
    modelled = {"induction_3ph", "induction_1ph"} | {kind for kind in KINDS if kind.startswith("dc_")} - {
        "dc_generator"
    }
    assert modelled <= kinds


def test_a_sheet_is_what_was_typed_and_what_it_means():
    sheet = read_sheet(next(path for path in SHEETS if path.stem == "pump_overload"))
    plate = sheet.machine.nameplate
    assert (plate.power.text, plate.power.number) == ("7.5 kW", 7500.0)
    assert plate.number("efficiency") == pytest.approx(0.887)
    assert sheet.machine.load_type == "pump_centrifugal"
    assert (sheet.machine.brake, sheet.machine.hazardous_area) == (False, False)
    assert sheet.observations == {"shaft_turns_freely": True, "overload_tripped": True}
    reading = sheet.last_reading("insulation_resistance", "isolated")
    assert (reading.numbers, reading.test_voltage.number, reading.temperature.number) == (
        (350e6,),
        500.0,
        24.0,
    )


def test_a_value_that_was_not_read_is_a_gap_in_its_place():
    sheet = read_sheet(next(path for path in SHEETS if path.stem == "filler_routine_dual_voltage"))
    first, second, third = sheet.last_reading("line_current", "no_load").numbers
    assert (first, math.isnan(second), third) == (1.9, True, 1.9)


def test_the_rating_in_use_fills_the_plate():
    sheet = read_sheet(next(path for path in SHEETS if path.stem == "filler_routine_dual_voltage"))
    plate = sheet.machine.nameplate
    assert (plate.voltage.text, plate.current.text, plate.connection) == ("400 V", "3.3 A", "star")
    assert len(plate.ratings) == 2


def minimal(**machine):
    return {"format": 1, "machine": {"kind": "induction_3ph", **machine}, "complaint": "runs_hot"}


RATINGS = [{"voltage": "230 V", "current": "28 A"}, {"voltage": "400 V", "current": "16.2 A"}]


@pytest.mark.parametrize(
    ("extra", "supply", "volts"),
    [
        ({"in_use": "400 V"}, {}, 400.0),
        ({"voltage": "230 V"}, {}, 230.0),
        ({}, {"nominal_voltage": "400 V"}, 400.0),
    ],
)
def test_the_rating_in_use_is_found_by_what_is_told(extra, supply, volts):
    sheet = sheet_from_plain(minimal(nameplate={"ratings": RATINGS, **extra}, supply=supply))
    assert sheet.machine.nameplate.number("voltage") == volts


def test_two_ratings_without_a_choice_are_asked_about():
    with pytest.raises(InputError, match="the rating in use: 230 V or 400 V"):
        sheet_from_plain(minimal(nameplate={"ratings": RATINGS}))


def test_a_plate_field_that_contradicts_the_rating_in_use_is_refused():
    with pytest.raises(InputError, match=r"current: 28 A; 16\.2 A as the rating in use says"):
        sheet_from_plain(minimal(nameplate={"ratings": RATINGS, "in_use": "400 V", "current": "28 A"}))


def test_numbers_and_bools_of_another_program_are_taken():
    plate = {"power_factor": 0.84, "service_factor": 1.15, "locked_rotor_current_ratio": 6, "poles": 4}
    sheet = sheet_from_plain(minimal(nameplate=plate, brake=True))
    numbers = [sheet.machine.nameplate.number(name) for name in plate]
    assert numbers == [0.84, 1.15, 6.0, 4.0]
    assert sheet.machine.brake is True


def test_a_plate_percentage_without_its_sign_is_still_one():
    plate = {"efficiency": "88.7", "power_factor": "84"}
    sheet = sheet_from_plain(minimal(nameplate=plate))
    assert sheet.machine.nameplate.number("efficiency") == pytest.approx(0.887)
    assert sheet.machine.nameplate.number("power_factor") == pytest.approx(0.84)


def test_the_same_reading_twice_is_kept_and_the_last_counts():
    readings = [{"measure": "speed", "state": "loaded", "value": f"{rpm} rpm"} for rpm in (1441, 1443)]
    sheet = sheet_from_plain(minimal() | {"readings": readings})
    assert len(sheet.readings) == 2
    assert sheet.last_reading("speed", "loaded").numbers == (1443.0,)


def test_ids_that_nobody_knows_yet_are_kept():
    sheet = sheet_from_plain(minimal() | {"complaint": "own_complaint", "observations": {"own_sign": "yes"}})
    assert (sheet.complaint, sheet.observations) == ("own_complaint", {"own_sign": True})


@pytest.mark.parametrize(
    ("typed", "kept"), [("F", "F"), ("f", "F"), ("155 (F)", "F"), ("155", "F"), ("B", "B")]
)
def test_an_insulation_class_is_read_as_letter_or_degrees(typed, kept):
    assert (
        sheet_from_plain(minimal(nameplate={"insulation_class": typed})).machine.nameplate.insulation_class
        == kept
    )


def test_an_alternator_may_show_kva():
    data = {
        "format": 1,
        "machine": {"kind": "alternator", "nameplate": {"power": "200 kVA"}},
        "complaint": "routine_check",
    }
    assert sheet_from_plain(data).machine.nameplate.number("power") == 200e3


def test_yes_and_no_are_written_without_quotes_and_numbers_too():
    text = sheet_to_yaml(sheet_from_plain(minimal(nameplate={"power_factor": 0.84}, brake=True)))
    assert "brake: yes\n" in text
    assert "power_factor: 0.84\n" in text


PRINTABLE = st.text(
    st.characters(codec="utf-8", exclude_categories=["C", "Zl", "Zp"]), min_size=1, max_size=40
)
TEXT = PRINTABLE.filter(lambda text: text.strip() == text and text not in {"null", "Null", "NULL", "~"})
IDS = st.from_regex(r"[a-z][a-z0-9_]{0,20}", fullmatch=True)
UNIT = {
    "power": "kW",
    "voltage": "V",
    "current": "A",
    "frequency": "Hz",
    "speed": "rpm",
    "resistance": "ohm",
    "temperature": "degC",
    "velocity": "mm/s",
    "acceleration": "m/s2",
    "capacitance": "uF",
    "time": "s",
    "percent": "%",
    "ratio": "",
    "length": "mm",
    "force": "N",
    "rate": "1/h",
    "count": "",
    "cable": "m",
}
LOOSE = [
    m for m in MEASURES.values() if m.suits("induction_3ph") and m.dimension not in {"level", "resistance"}
]


@st.composite
def readings(draw):
    measure = draw(st.sampled_from(LOOSE))
    unit = UNIT[measure.dimension]
    number = st.integers(1, 9).map(str) if measure.dimension != "ratio" else st.just("0.84")
    value = number.map(lambda digits: f"{digits} {unit}".strip())
    values = draw(st.tuples(value, value | st.none(), value)) if measure.arity == 3 else draw(value)
    given = {"measure": measure.id, "state": draw(st.sampled_from(sorted(STATES))), "value": values}
    if draw(st.booleans()):
        given |= {
            "temperature": "24 degC",
            "at": draw(st.sampled_from(sorted(words.PLACES))),
            "note": draw(TEXT),
        }
    return given


@st.composite
def sheets(draw):
    plate = {
        name: draw(st.sampled_from([None, text]))
        for name, text in {
            "power": "10 hp",
            "voltage": "460 V",
            "power_factor": 0.82,
            "code_letter": "h",
        }.items()
    }
    machine = {
        "kind": "induction_3ph",
        "tag": draw(TEXT | st.none()),
        "nameplate": plate,
        "brake": draw(st.booleans() | st.none()),
    }
    observed = draw(st.dictionaries(IDS, st.booleans(), max_size=4))
    kit = draw(st.none() | st.lists(IDS, max_size=3))
    listed = draw(st.lists(readings(), max_size=4))
    return {
        "format": 1,
        "machine": machine,
        "complaint": draw(IDS),
        "readings": listed,
        "observations": observed,
        "kit": kit,
    }


@pytest.mark.parametrize("space", ["\u00a0", "\u202f", "\u2009", "\u3000"])
def test_a_tag_that_was_pasted_with_another_kind_of_space_is_a_tag(space):
    text = f"format: 1\nmachine: {{kind: induction_3ph, tag: 'P{space}104'}}\ncomplaint: runs_hot\n"
    assert sheet_from_text(text, file="pasted").machine.tag == f"P{space}104"


@settings(max_examples=60, deadline=None)
@given(sheets())
def test_any_sheet_that_is_written_is_read_as_the_same(data):
    sheet = sheet_from_plain(data)
    assert same(sheet_from_text(sheet_to_yaml(sheet), file="again"), sheet)


JUNK = st.recursive(
    st.none()
    | st.booleans()
    | st.integers()
    | st.floats()
    | st.text(max_size=20)
    | st.sampled_from(["14.9 V", "open", "yes", "loaded"]),
    lambda inner: (
        st.lists(inner, max_size=4)
        | st.dictionaries(
            st.sampled_from(["kind", "value", "measure", "state", "type", "power", "ratings", "x"]),
            inner,
            max_size=4,
        )
    ),
    max_leaves=8,
)
FIELDS = ["format", "machine", "complaint", "readings", "observations", "kit"]


@settings(max_examples=150, deadline=None)
@given(st.dictionaries(st.sampled_from(FIELDS), JUNK))
def test_any_junk_in_any_field_is_a_sheet_or_a_list_of_problems(data):
    try:
        sheet_from_plain(data)
    except InputError as refused:
        assert refused.problems
        assert all(problem.allowed for problem in refused.problems)
        assert all(str(problem).isprintable() for problem in refused.problems)


BASE = (Path(__file__).parents[1] / "sheets" / "pump_overload.yaml").read_text(encoding="utf-8")


@settings(max_examples=150, deadline=None)
@given(
    st.integers(0, len(BASE) - 1), st.integers(0, 12), st.text("0123456789,.- :[]{}'\"\n#&*!VAmM", max_size=4)
)
def test_a_sheet_with_any_typing_error_is_a_sheet_or_a_list_of_problems(place, length, typed):
    try:
        sheet = sheet_from_text(BASE[:place] + typed + BASE[place + length :], file="p.yaml")
    except InputError as refused:
        assert refused.problems
    else:
        assert same(sheet_from_text(sheet_to_yaml(sheet), file="again"), sheet)


def test_a_rating_that_no_plate_has_is_refused():
    ratings = [{"voltage": "230 V", "current": "0 A"}, {"voltage": "400 V", "current": "16.2 A"}]
    with pytest.raises(InputError, match=r"ratings\[0\]\.current: 0 A; 10 mA to 20 kA is possible here"):
        sheet_from_plain(minimal(nameplate={"ratings": ratings, "in_use": "400 V"}))
