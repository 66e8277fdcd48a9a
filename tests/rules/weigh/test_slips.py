"""Readings that fit no fault and no sound machine are named, with what may have happened."""

import math
from pathlib import Path

import msgspec
import pytest

from calc.quantities import MEASURES
from calc.sheet_io import read_sheet
from rules.weigh.posterior import OTHER
from tests.rules.makers import case, reading

from .cases import answer, simulated


def with_readings(sheet, readings):
    return msgspec.structs.replace(sheet, readings=tuple(readings))


def wrong(sheet, key, factor, *, only=None):
    """The sheet with one reading, or one of its three values, off by a factor."""

    def off(value, place):
        if only is not None and place != only:
            return value
        number, step = value.number * factor, value.resolution * factor
        return msgspec.structs.replace(value, text=f"{number:g} {value.unit}", number=number, resolution=step)

    return with_readings(
        sheet,
        [
            msgspec.structs.replace(r, values=tuple(off(v, i) for i, v in enumerate(r.values)))
            if r.key == key
            else r
            for r in sheet.readings
        ],
    )


WHOLE = ("supply_voltage@loaded", "line_current@loaded", "line_current@no_load", "speed@loaded",
         "winding_resistance@isolated", "input_power@loaded")  # fmt: skip
THREE = [key for key in WHOLE if MEASURES[key.split("@")[0]].arity == 3]
SLIPPED = [(key, factor) for key in WHOLE for factor in (10.0, 0.1)]


@pytest.mark.parametrize(("key", "factor"), SLIPPED)
def test_one_gross_slip_among_eight_readings_convicts_nobody_and_is_to_be_repeated(key, factor):
    found = answer(wrong(simulated(WHOLE.index(key)), key, factor))
    assert all(f.probability < 0.8 for f in found.faults if f.id not in {"healthy", OTHER})
    assert "Repeat it" in next(slip.text for slip in found.slips if slip.about == key)


@pytest.mark.parametrize(("key", "factor"), SLIPPED)
def test_a_misplaced_decimal_point_is_named(key, factor):
    found = answer(wrong(simulated(4), key, factor))
    text = next(slip.text for slip in found.slips if slip.about == key)
    side = "left" if factor > 1.0 else "right"
    assert f"decimal point one place to the {side}" in text


@pytest.mark.parametrize("key", THREE)
@pytest.mark.parametrize(("factor", "place"), [(10.0, 0), (0.1, 2)])
def test_one_of_three_values_with_its_point_misplaced_convicts_nobody(key, factor, place):
    found = answer(wrong(simulated(10 + THREE.index(key)), key, factor, only=place))
    assert all(f.probability < 0.8 for f in found.faults if f.id not in {"healthy", OTHER})
    assert key in {slip.about for slip in found.slips}


@pytest.mark.parametrize("seed", range(4))
def test_honest_readings_of_a_sound_motor_are_called_no_slip_and_no_fault(seed):
    found = answer(simulated(20 + seed))
    assert not found.slips
    assert found.faults[0].id == "healthy"


def test_a_slip_by_root_three_is_not_called_a_decimal_point():
    found = answer(wrong(simulated(3), "line_current@loaded", math.sqrt(3.0)))
    text = next(slip.text for slip in found.slips if slip.about == "line_current@loaded")
    assert "decimal point" not in text


def test_a_hot_frame_is_not_explained_by_a_factor():
    found = answer(read_sheet(Path(__file__).parents[2] / "sheets" / "fan_supply_unbalance.yaml"))
    assert not any("factor" in slip.text for slip in found.slips if "temperature" in slip.about)


def test_a_single_reading_that_no_fault_explains_is_named_though_nothing_else_was_read():
    found = answer(case("runs_hot", reading("speed", "loaded", "2900 rpm")))
    assert found.faults[0].id == OTHER
    assert [slip.about for slip in found.slips] == ["speed@loaded"]
