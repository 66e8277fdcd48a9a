"""Units: the table of factors against pint, and the spellings that plates use."""

import pytest

from calc.lookup import rows
from calc.quantities import INNER_UNIT
from calc.units import dimension_of, find_unit, registry, usual_units

BARE = {"percent", "ratio", "rate", "count"}
ROWS = [row for row in rows("units") if row["dimension"] not in BARE]


@pytest.mark.parametrize("row", ROWS, ids=lambda row: f"{row['dimension']}-{row['unit']}")
def test_every_factor_is_the_one_that_pint_computes_from_the_definitions(row):
    pint_name = {"g": "g_n"}.get(row["unit"], row["unit"])
    unit = find_unit(row["unit"], dimension=row["dimension"])
    inner = INNER_UNIT[row["dimension"]]
    quantity = registry().Quantity(37.5, registry().parse_units(pint_name))
    expected = quantity.to(registry().parse_units(inner)).magnitude
    assert float(unit.factor) * 37.5 + float(unit.offset) == pytest.approx(expected, rel=1e-13, abs=1e-12)


def test_fractions_and_rates_are_worth_what_they_say():
    assert float(find_unit("%", dimension="ratio").factor) == 0.01
    assert float(find_unit("%", dimension="percent").factor) == 1.0
    assert float(find_unit("1/min", dimension="rate").factor) == 60.0


def test_a_horsepower_is_the_published_number_of_watts():
    # NIST SP 811 (2008), appendix B.8: 7.456999 E+02 W for 550 ft lbf/s; metric horsepower 7.354988 E+02 W
    assert float(find_unit("hp", dimension="power").factor) == pytest.approx(745.6999, abs=5e-5)
    assert float(find_unit("PS", dimension="power").factor) == pytest.approx(735.4988, abs=5e-5)


@pytest.mark.parametrize(
    ("word", "dimension", "name"),
    [
        ("KW", "power", "kW"),
        ("HP", "power", "hp"),
        ("RPM", "speed", "rpm"),
        ("r/min", "speed", "rpm"),
        ("min-1", "speed", "rpm"),
        ("MΩ", "resistance", "Mohm"),
        ("mΩ", "resistance", "mohm"),
        ("MOHM", "resistance", "Mohm"),
        ("kOhm", "resistance", "kohm"),
        ("µF", "capacitance", "uF"),
        ("MFD", "capacitance", "uF"),
        ("°C", "temperature", "degC"),
        ("VAC", "voltage", "V"),
        ("MM/S", "velocity", "mm/s"),
        ("m/s2", "acceleration", "m/s**2"),
    ],
)
def test_what_plates_and_people_write_is_understood(word, dimension, name):
    assert find_unit(word, dimension=dimension).name == name


@pytest.mark.parametrize("dimension", INNER_UNIT)
def test_no_spelling_of_a_dimension_means_two_units(dimension):
    seen = {}
    for row in rows("units"):
        if row["dimension"] == dimension:
            for word in (row["unit"], *row["also"].split()):
                key = word[:1] + word[1:].casefold() if word[:1] in "mM" else word.casefold()
                assert seen.setdefault(key, row["unit"]) == row["unit"], word


@pytest.mark.parametrize("dimension", INNER_UNIT)
def test_the_inner_unit_of_every_dimension_is_in_the_table_with_factor_one(dimension):
    unit = find_unit(INNER_UNIT[dimension], dimension=dimension)
    assert (unit.factor, unit.offset) == (1, 0)
    assert INNER_UNIT[dimension] in usual_units(dimension)


def test_a_capital_m_is_never_read_as_milli_where_mega_is_possible():
    assert [
        find_unit(word, dimension=d)
        for word, d in (("MA", "current"), ("MV", "voltage"), ("MF", "capacitance"))
    ] == [None] * 3


def test_a_rarer_unit_goes_through_pint():
    assert float(find_unit("rev/s", dimension="speed").factor) == pytest.approx(60.0)
    assert float(find_unit("ft/min", dimension="velocity").factor) == pytest.approx(5.08)


@pytest.mark.parametrize(
    ("word", "dimension"), [("V", "voltage"), ("kVA", "apparent_power"), ("rpm", "speed"), ("rev/s", "speed")]
)
def test_the_dimension_of_a_unit_is_named(word, dimension):
    assert dimension_of(word) == dimension


@pytest.mark.parametrize("word", ["furlong", "", "V**9**9", "__import__('os')", "9" * 30, "kW;rm"])
def test_what_is_no_unit_is_none(word):
    assert dimension_of(word) is None
