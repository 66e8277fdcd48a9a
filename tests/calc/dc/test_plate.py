from __future__ import annotations

import numpy as np
import pytest

from calc.dc import DcTwin, fit
from calc.dc.plate import read_plate
from calc.twin import Ask, Twin
from tests.calc.dc.builders import PLATE, machine, rows_of


def band(twin, ask, count=800):
    z = np.random.default_rng(11).standard_normal((count, twin.dim))
    (answer,) = twin.predict(z, rows_of(twin, count), [ask])
    return np.quantile(answer[:, 0], [0.05, 0.5, 0.95])


def test_the_twin_offers_what_the_interface_asks():
    twin: Twin = fit(machine("dc_shunt"))
    assert isinstance(twin, DcTwin)
    assert twin.dim == len(twin.latents)
    assert twin.latents[-2:] == ("severity_1", "severity_2")


def test_a_kind_that_is_no_dc_motor_is_refused_by_name():
    with pytest.raises(ValueError, match="induction_3ph"):
        fit(machine("induction_3ph", {}, None))


def test_an_unknown_effect_is_refused():
    with pytest.raises(KeyError):
        fit(machine("dc_shunt")).modes("warp")


# R_a of the armature circuit in per unit of V/I, textbook machines; computed from published examples.
@pytest.mark.parametrize(
    ("power", "volts", "ampere", "per_unit"),
    [
        ("40 hp", 240, 138, 0.052),
        ("15 hp", 230, 56, 0.066),
        ("50 hp", 250, 165, 0.039),
        ("100 hp", 250, 335, 0.046),
    ],
)
def test_armature_resistance_of_textbook_machines_lies_in_the_band(power, volts, ampere, per_unit):
    plate = {"power": power, "voltage": f"{volts} V", "current": f"{ampere} A", "speed": "1200 rpm"}
    low, _, high = band(
        fit(machine("dc_shunt", plate)), Ask("armature_resistance", "isolated", temperature_c=75.0)
    )
    assert low < per_unit * volts / ampere < high
    assert high / low < 4.0


# Uncoupled armature current over rated: Sen 5 %, Guru 8.9 % (two), a small magnet motor 15 %;
# output from volts, amperes and these losses.
@pytest.mark.parametrize(
    ("kind", "plate", "share"),
    [
        ("dc_shunt", {"power": "10.5 kW", "voltage": "100 V", "current": "120 A", "speed": "885 rpm"}, 0.050),
        (
            "dc_shunt",
            {
                "power": "4.75 kW",
                "voltage": "240 V",
                "current": "24 A",
                "speed": "1500 rpm",
                "field_current": "1.5 A",
            },
            0.089,
        ),
        (
            "dc_permanent_magnet",
            {"power": "300 W", "voltage": "50 V", "current": "8.3 A", "speed": "1700 rpm"},
            0.15,
        ),
    ],
)
def test_no_load_current_of_textbook_machines_lies_in_the_band(kind, plate, share):
    low, _, high = band(fit(machine(kind, plate)), Ask("armature_current", "no_load"))
    assert low < share * float(plate["current"].split()[0]) < high


def test_a_fuller_plate_narrows_what_is_expected():
    ask = Ask("armature_current", "no_load")
    full, bare = band(fit(machine("dc_shunt")), ask), band(fit(machine("dc_shunt", {})), ask)
    assert full[2] / full[0] < 0.3 * bare[2] / bare[0]


def test_field_resistance_may_be_below_volts_over_amperes_of_the_plate_but_hardly_above():
    """A rheostat or regulator takes part of the volts; the winding was warm when the plate was stamped."""
    low, middle, high = band(
        fit(machine("dc_shunt")), Ask("field_resistance", "isolated", temperature_c=20.0)
    )
    stamped = 240.0 / 1.2
    assert low < 0.6 * stamped < middle < 0.8 * stamped
    assert high < 0.92 * stamped


def test_a_separate_field_of_unknown_supply_says_nothing_by_its_level():
    plate = {k: v for k, v in PLATE.items() if not k.startswith("field")}
    low, _, high = band(fit(machine("dc_separately_excited", plate)), Ask("field_voltage", "loaded"))
    assert high / low > 3.5


@pytest.mark.parametrize(("current_is", "armature"), [("line", 35.8), ("armature", 37.0), (None, 36.1)])
def test_plate_amperes_may_hold_the_field_current(current_is, armature):
    plate = PLATE | {"power": "7.8 kW"} | ({"current_is": current_is} if current_is else {})
    read = read_plate(machine("dc_shunt", plate))
    assert read.current_a == pytest.approx(armature, rel=0.02)


def test_the_noted_speed_of_a_spin_scales_the_volts():
    twin = fit(machine("dc_shunt"))
    slow = band(twin, Ask("open_circuit_voltage", "spun", speed_rpm=500.0))
    fast = band(twin, Ask("open_circuit_voltage", "spun", speed_rpm=1000.0))
    np.testing.assert_allclose(fast, 2.0 * slow, rtol=1e-9)
