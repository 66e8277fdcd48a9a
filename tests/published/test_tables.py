"""Tables in calc/ and rules/ against the printed tables, cell by cell, which stand in ``data/``."""

import math
from itertools import product

import numpy as np
import pytest

from calc.induction_3ph.plate import read_base
from calc.lookup import code_letter_kva_per_hp, code_letters
from calc.overload_relay import REFERENCE_MULTIPLE
from calc.sheet import Reading, Value
from calc.typical import class_efficiency
from calc.units import find_unit
from calc.vocabulary import DESIGN_LETTERS, INSULATION_CLASSES
from rules.trips import LEG, trip_table
from tests.calc.induction_3ph.plates import machine as machine_3ph
from tests.published.sources import column_table, published

HP_W = 745.69987
EFFICIENCIES = ["calc.typical.class_efficiency", "calc/tables/efficiency_classes.csv"]
LETTERS = ["calc.lookup.code_letter_kva_per_hp", "calc/tables/code_letters.csv"]


def cells(name, mark_of):
    return [pytest.param(row, marks=mark_of(row), id=" ".join(row.values())) for row in column_table(name)]


# Efficiency classes.


def of_class(row):
    return published(
        "IEC 60034-30-1", "nominal efficiency at 50 Hz", known=row["known"], checks=EFFICIENCIES,
        says=f"{row['class']}, 2, 4 and 6 poles, 0.75 to 200 kW, in percent",
    )  # fmt: skip


@pytest.mark.parametrize("row", cells("efficiency_50_hz", of_class))
def test_the_efficiency_formula_gives_the_printed_cell(row):
    found = class_efficiency(
        efficiency_class=row["class"], power_w=1e3 * float(row["kw"]), poles=int(row["poles"])
    )
    # Tabulated to a tenth of a percent.
    assert 100.0 * found == pytest.approx(float(row["percent"]), abs=0.06)


# Code letters.

of_letters = published(
    "NEMA MG 1", "10.37.2 = NEC Table 430.7(B)", known="looked up", checks=LETTERS,
    says="kVA per hp of the letters A to V",
)  # fmt: skip


@of_letters
@pytest.mark.parametrize("row", column_table("code_letters"))
def test_a_code_letter_spans_what_is_printed(row):
    low, high = code_letter_kva_per_hp(row["letter"])
    if row["from"] != "0":  # A has no lower end
        assert low == float(row["from"])
    if row["to"]:  # V has no upper end
        assert high == pytest.approx(float(row["to"]) + 0.01, abs=1e-9)


@of_letters
def test_there_are_the_printed_letters_and_no_others():
    assert list(code_letters()) == [row["letter"] for row in column_table("code_letters")]


@published(
    "Hubert, Electric Machines", "example 5.13", known="looked up",
    says="150 hp, letter G, 460 V: 1054 to 1186 A",
    checks=["calc.induction_3ph.plate.read_base", *LETTERS],
)  # fmt: skip
def test_the_code_letter_of_hubert_5_13_gives_its_locked_rotor_current():
    plate = {"power": 150 * HP_W, "voltage": 460.0, "current": 172.0, "frequency": 60.0, "speed": 1780.0}
    base = read_base(machine_3ph(**plate, code_letter="G"))
    amps = base.locked_ratio * base.current_a
    assert amps == pytest.approx(math.sqrt(1054.3 * 1186.1), rel=1e-3)
    assert amps * math.exp(-base.locked_spread) < 1054.3 < 1186.1 < amps * math.exp(base.locked_spread)


# Overload relays.


@pytest.mark.parametrize(
    ("row", "columns"),
    [
        pytest.param(
            row,
            columns,
            marks=published(
                "IEC 60947-4-1", clause, says=f"class {row['class']}: {', '.join(row[c] for c in columns)} s",
                known=known, checks="rules/tables/trip_classes.yaml",
            ),
            id=f"{row['class']} {clause}",
        )
        for row in column_table("trip_classes")
        for columns, clause, known in (
            (["cold_from_s", "cold_to_s"], "trip classes, 7.2 times the setting from cold", "looked up"),
            (["warm_to_s"], "trip classes, 1.5 times the setting from warm", "from memory"),
        )
    ],
)  # fmt: skip
def test_a_trip_class_has_the_printed_times(row, columns):
    held = trip_table().classes[row["class"]]
    assert [getattr(held, column) for column in columns] == [float(row[column]) for column in columns]


@published(
    "IEC 60947-4-1", "1.05 and 1.2 times the setting", known="from memory",
    says="no trip at 1.05 times, a trip within 2 h at 1.2 times", checks="rules/tables/trip_classes.yaml",
)  # fmt: skip
def test_a_relay_holds_and_trips_at_the_printed_multiples():
    table = trip_table()
    assert (table.holds_at, table.trips_at, table.within_s) == (1.05, 1.2, 7200.0)
    assert set(table.classes) == {row["class"] for row in column_table("trip_classes")}


@published(
    "IEC 60947-4-1", "points at which times are fixed; a relay in the phase leg of a star-delta starter",
    known="from memory", says="1.5 times from warm, 7.2 times from cold; 0.58 of the line current",
    checks=["rules.trips.LEG", "rules/tables/trip_classes.yaml", "calc.overload_relay.REFERENCE_MULTIPLE"],
)  # fmt: skip
def test_the_multiples_of_the_trip_arithmetic_are_the_printed_ones():
    assert (trip_table().warm_at, REFERENCE_MULTIPLE) == (1.5, 7.2)
    assert pytest.approx(0.58, abs=0.003) == LEG


# Words and units.


@published(
    "IEC 60085", "thermal classes", known="looked up",
    says="A 105, E 120, B 130, F 155, H 180 °C", checks="calc.vocabulary.INSULATION_CLASSES",
)  # fmt: skip
def test_the_usual_thermal_classes_have_their_temperatures():
    printed = {"A": "105", "E": "120", "B": "130", "F": "155", "H": "180"}
    assert {letter: INSULATION_CLASSES[letter] for letter in printed} == printed


@published(
    "IEC 60085", "thermal classes", known="from memory",
    says="Y 90, N 200, R 220 °C", checks="calc.vocabulary.INSULATION_CLASSES",
)  # fmt: skip
def test_the_rare_thermal_classes_have_their_temperatures():
    assert {letter: INSULATION_CLASSES[letter] for letter in "YNR"} == {"Y": "90", "N": "200", "R": "220"}


@published(
    "IEC 60034-12 and NEMA MG 1", "designs", known="looked up",
    says="N and H, with Y for star-delta and E for extended current: eight; A to D, and E withdrawn",
    checks="calc.vocabulary.DESIGN_LETTERS",
)  # fmt: skip
def test_the_design_letters_are_those_of_both_standards():
    iec = {f"{design}{more}" for design, more in product("NH", ("", "Y", "E", "EY"))}
    assert set(DESIGN_LETTERS) == iec | set("ABCDE")


@published(
    "IEC 60038 and ANSI C84.1", "nominal voltages", known="from memory",
    says="230, 400, 690 V, 3.3, 6.6, 11 kV; 208, 240, 480, 600, 4160 V",
    checks="calc.induction_3ph.context.filled",
)  # fmt: skip
@pytest.mark.parametrize("volts", [230, 400, 690, 3300, 6600, 11000, 208, 240, 480, 600, 4160])
def test_a_plate_that_cannot_be_read_takes_the_nominal_voltage_that_was_read(volts):
    values = tuple(Value(text=f"{v:g} V", number=v, unit="V") for v in np.array([0.992, 1.0, 1.004]) * volts)
    readings = (Reading(measure="supply_voltage", state="no_load", values=values),)
    assert read_base(machine_3ph(), readings).voltage_v == volts


@published(
    "definition", "550 ft·lbf/s and 75 kgf·m/s", known="looked up",
    says="a horsepower is 745.6999 W, a metric one 735.4988 W", checks="calc/tables/units.csv",
)  # fmt: skip
def test_both_horsepowers_are_as_defined():
    for name, watts in (("hp", 550 * 0.3048 * 4.4482216152605), ("PS", 75 * 9.80665)):
        assert find_unit(name, dimension="power").factor == pytest.approx(watts, rel=1e-12)
