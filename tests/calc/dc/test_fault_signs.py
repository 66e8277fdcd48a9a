"""What each fault does to which reading: direction, and size where a book or practice gives one."""

from __future__ import annotations

import numpy as np
import pytest

from calc.dc import KINDS, fit
from calc.twin import Ask, attribute_rows
from tests.calc.dc.builders import machine, rows_of

WOUND = ["dc_shunt", "dc_separately_excited", "dc_compound"]


def read(twin, effect, measure, state, *, place=0, severity=None, z=0.3, **context):
    """One reading of a middling machine with a fault, over the same machine without it."""
    grid = np.full((1, 1, twin.dim), z)
    ask = Ask(measure, state, **context)
    ill = twin.predict(
        grid[0], attribute_rows([twin.modes(effect, severity)[place]], grid, twin.defaults), [ask]
    )
    well = twin.predict(grid[0], rows_of(twin, 1), [ask])
    return float(ill[0][0, 0]) / max(float(well[0][0, 0]), 1e-12)


@pytest.mark.parametrize("kind", WOUND)
def test_shorted_field_turns_lower_ohms_and_raise_amperes_and_speed(kind):
    twin = fit(machine(kind))
    given = {"severity": (0.3, 0.31), "z": -2.0}  # no rheostat, no regulator
    assert read(twin, "weak_field", "field_resistance", "isolated", **given) == pytest.approx(0.7, abs=0.02)
    assert read(twin, "weak_field", "field_current", "no_load", **given) > 1.2
    assert read(twin, "weak_field", "speed", "no_load", **given) > 1.03
    assert read(twin, "weak_field", "open_circuit_voltage", "spun", speed_rpm=1000.0, **given) < 0.97


def test_a_regulated_field_keeps_its_amperes_when_turns_are_shorted():
    twin = fit(machine("dc_separately_excited"))
    given = {"severity": (0.2, 0.21), "z": 1.5}
    assert read(twin, "weak_field", "field_current", "loaded", **given) == pytest.approx(1.0, abs=0.02)
    assert read(twin, "weak_field", "field_voltage", "loaded", **given) == pytest.approx(0.8, abs=0.03)


def test_weak_magnets_raise_speed_and_current_and_lower_the_volts_when_spun():
    twin = fit(machine("dc_permanent_magnet"))
    given = {"severity": (0.25, 0.2501)}
    assert read(
        twin, "weak_magnets", "open_circuit_voltage", "spun", speed_rpm=900.0, **given
    ) == pytest.approx(0.75, rel=0.01)
    assert read(twin, "weak_magnets", "speed", "no_load", **given) == pytest.approx(1 / 0.75, rel=0.03)
    assert read(twin, "weak_magnets", "armature_current", "loaded", **given) == pytest.approx(
        1 / 0.75, rel=0.06
    )


@pytest.mark.parametrize("kind", WOUND)
def test_an_open_field_leaves_only_residual_volts_and_no_field_current(kind):
    """Residual 2 to 5 % of rated (from memory)."""
    twin = fit(machine(kind))
    share = read(twin, "open_field", "open_circuit_voltage", "spun", speed_rpm=1150.0)
    assert 0.01 < share < 0.07
    assert read(twin, "open_field", "field_current", "stalled") < 1e-3
    assert read(twin, "open_field", "field_resistance", "isolated") > 1e5


def test_a_shunt_motor_without_field_cannot_stay_in_any_running_state():
    twin = fit(machine("dc_shunt"))
    z = np.random.default_rng(1).standard_normal((200, twin.dim))
    found = twin.possible(z, rows_of(twin, 200, field_open=1.0))
    assert found["loaded"].mean() < 0.02
    assert found["no_load"].mean() < 0.02
    assert found["spun"].min() == 1.0


@pytest.mark.parametrize("kind", KINDS)
def test_a_series_motor_is_never_expected_uncoupled(kind):
    twin = fit(machine(kind))
    z = np.random.default_rng(2).standard_normal((100, twin.dim))
    share = twin.possible(z, rows_of(twin, 100))["no_load"].mean()
    assert share == 0.0 if kind == "dc_series" else share > 0.95


@pytest.mark.parametrize("kind", KINDS)
def test_an_open_armature_shows_full_volts_no_current_and_infinite_ohms(kind):
    twin = fit(machine(kind))
    assert read(twin, "open_armature", "armature_voltage", "stalled") > 3.0
    assert read(twin, "open_armature", "armature_current", "stalled") == 0.0
    assert read(twin, "open_armature", "armature_resistance", "isolated") > 1e6
    if kind != "dc_series":
        assert read(twin, "open_armature", "open_circuit_voltage", "spun", speed_rpm=900.0) == 0.0


def test_an_open_coil_of_a_wave_winding_nearly_doubles_the_ohms():
    """One of two parallel paths is gone."""
    twin = fit(machine("dc_shunt"))
    assert 1.7 < read(twin, "open_coil", "armature_resistance", "isolated", place=0) < 2.0
    assert 1.2 < read(twin, "open_coil", "armature_resistance", "isolated", place=1) < 1.4
    assert read(twin, "open_coil", "bar_drop_max", "isolated") > 2.0


def test_a_shorted_coil_drops_nothing_and_brakes():
    twin = fit(machine("dc_shunt"))
    given = {"severity": (0.02, 0.021)}
    assert read(twin, "shorted_coil", "bar_drop_min", "isolated", **given) < 0.5
    assert read(twin, "shorted_coil", "bar_drop_max", "isolated", **given) == pytest.approx(1.0)
    assert read(twin, "shorted_coil", "armature_current", "no_load", **given) > 1.15
    assert 0.95 < read(twin, "shorted_coil", "armature_resistance", "isolated", **given) < 1.0


@pytest.mark.parametrize(("kind", "keeps"), [("dc_separately_excited", 1.0), ("dc_shunt", 0.8)])
def test_low_volts_slow_the_motor_and_reach_the_field_only_where_it_hangs_on_them(kind, keeps):
    twin = fit(machine(kind))
    given = {"severity": (0.2, 0.2001)}
    assert read(twin, "low_voltage", "armature_voltage", "loaded", **given) == pytest.approx(0.8, abs=1e-3)
    assert read(twin, "low_voltage", "field_voltage", "loaded", **given) == pytest.approx(keeps, abs=1e-3)
    slowed = read(twin, "low_voltage", "speed", "loaded", **given)
    assert slowed < 0.95
    assert read(
        twin, "low_voltage", "open_circuit_voltage", "spun", speed_rpm=900.0, **given
    ) == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("source", "low", "high"), [("rectifier_3ph", 1.5, 6.0), ("rectifier_1ph", 1.2, 3.5)]
)
def test_missing_pulses_raise_the_ripple_against_the_mean(source, low, high):
    """Six-pulse 12 to 36 % sound and about 57 % with pulses missing; single-phase bridge 51 to 90 % sound."""
    twin = fit(machine("dc_separately_excited", source=source))
    rise = read(twin, "missing_pulses", "ripple_voltage", "loaded") / read(
        twin, "missing_pulses", "armature_voltage", "loaded"
    )
    assert low < rise < high
    assert read(twin, "missing_pulses", "ripple_frequency", "loaded") in {1 / 6, 1 / 2}
    assert read(twin, "missing_pulses", "armature_voltage", "loaded") < 0.92


@pytest.mark.parametrize(
    ("source", "low", "high"),
    [("dc_bus", 0.0, 0.02), ("rectifier_3ph", 0.10, 0.36), ("rectifier_1ph", 0.45, 0.95)],
)
def test_ripple_of_sound_machines_lies_where_practice_finds_it(source, low, high):
    twin = fit(machine("dc_shunt", source=source))
    z = np.random.default_rng(3).standard_normal((500, twin.dim))
    ripple, volts = twin.predict(
        z, rows_of(twin, 500), [Ask("ripple_voltage", "loaded"), Ask("armature_voltage", "loaded")]
    )
    inside = (ripple / volts > low) & (ripple / volts < high)
    assert inside.mean() > 0.93


def test_plain_dc_has_no_pulses_to_lose():
    direct, rectified = fit(machine("dc_shunt")), fit(machine("dc_shunt", source="rectifier_3ph"))
    assert direct.modes("missing_pulses")[0].weight < 1e-4 < rectified.modes("missing_pulses")[0].weight


def test_a_reversed_series_field_weakens_the_flux_with_load():
    twin = fit(machine("dc_compound"))
    assert read(twin, "reversed_series", "speed", "loaded", z=-0.5) > 1.02
    assert read(twin, "reversed_series", "speed", "no_load", z=-0.5) == pytest.approx(1.0, abs=0.03)


def test_brushes_off_neutral_lower_the_volts_when_spun_in_either_sense():
    twin = fit(machine("dc_shunt"))
    for place in (0, 1):
        given = {"place": place, "severity": (0.15, 0.1501)}
        assert (
            0.88 < read(twin, "off_neutral", "open_circuit_voltage", "spun", speed_rpm=900.0, **given) < 0.96
        )
        assert read(twin, "off_neutral", "speed", "loaded", **given) > 1.03


@pytest.mark.parametrize("kind", KINDS)
def test_bad_brushes_show_in_ohms_and_starting_volts_but_not_when_spun(kind):
    twin = fit(machine(kind))
    given = {"severity": (0.1, 0.1001)}
    assert read(twin, "brush_resistance", "armature_resistance", "isolated", **given) > 2.0
    assert read(twin, "brush_resistance", "armature_voltage", "starting", **given) > 1.5
    assert read(twin, "brush_resistance", "speed", "loaded", **given) < 0.97
    if kind != "dc_series":
        assert read(
            twin, "brush_resistance", "open_circuit_voltage", "spun", speed_rpm=900.0, **given
        ) == pytest.approx(1.0)


def test_a_hot_machine_shows_it_in_frame_and_field_and_a_bad_bearing_in_the_bearing():
    twin = fit(machine("dc_shunt"))
    assert read(twin, "hot", "frame_temperature", "loaded", severity=(2.0, 2.01)) > 1.3
    assert read(twin, "hot", "field_current", "loaded", severity=(2.0, 2.01)) < 0.9
    assert read(twin, "friction", "bearing_temperature", "loaded", severity=(0.03, 0.031)) > 1.4
    assert read(twin, "friction", "frame_temperature", "loaded", severity=(0.03, 0.031)) == pytest.approx(
        1.0, abs=0.03
    )


@pytest.mark.parametrize("kind", KINDS)
def test_a_jammed_shaft_stands_and_draws_what_the_starter_lets_through(kind):
    twin = fit(machine(kind))
    assert read(twin, "stall", "speed", "loaded") == 0.0
    assert read(twin, "stall", "armature_current", "loaded") > 1.3
    z = np.zeros((1, twin.dim))
    found = twin.possible(z, rows_of(twin, 1, stalled=1.0, seized=1.0))
    assert found["loaded"][0] == 0.0
    assert found["stalled"][0] == 1.0


def test_shorted_turns_of_a_series_field_lower_its_ohms_and_raise_the_speed():
    twin = fit(machine("dc_series"))
    given = {"severity": (0.3, 0.3001)}
    assert read(twin, "weak_field", "series_field_resistance", "isolated", **given) == pytest.approx(
        0.7, abs=0.01
    )
    assert read(twin, "weak_field", "speed", "loaded", **given) > 1.03


def test_rubbing_heats_the_bearing_less_than_a_bearing_that_fails():
    twin = fit(machine("dc_shunt"))
    failing = read(twin, "friction", "bearing_temperature", "loaded", severity=(0.08, 0.0801))
    rubbing = read(twin, "friction", "bearing_temperature", "loaded", severity=(0.4, 0.4001))
    assert 1.2 < rubbing < failing


def test_a_drive_at_its_limit_holds_the_current_and_lets_the_volts_give_way():
    twin = fit(machine("dc_permanent_magnet", source="rectifier_1ph"))
    place = [m.variant for m in twin.modes("weak_magnets")].index("drive at its current limit")
    given = {"place": place, "severity": (0.4, 0.4001)}
    assert read(twin, "weak_magnets", "armature_voltage", "loaded", **given) < 0.98
    assert read(twin, "weak_magnets", "armature_current", "loaded", **given) > 1.3
