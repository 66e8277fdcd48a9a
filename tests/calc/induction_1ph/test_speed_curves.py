"""Torque and current of single-phase motors over speed, held against plates and usual catalogue values."""

from __future__ import annotations

import numpy as np
import pytest

from calc.curve_bands import SpeedCurves
from calc.induction_1ph.curves import speed_curves
from calc.induction_1ph.model import fit

from .plates import ALL, machine

# Catalogue spans of starting over rated torque (from memory): split phase 1.3 to 3, capacitor start 2.5 to 5,
# capacitor run 0.2 to 0.8, start and run capacitor 2 to 5.
STARTING = {
    "split phase": (1.2, 3.0),
    "capacitor start": (2.5, 5.0),
    "capacitor run": (0.2, 0.8),
    "both": (2.0, 5.0),
}


@pytest.fixture(scope="module", params=ALL)
def drawn(request: pytest.FixtureRequest) -> tuple[str, dict[str, float], SpeedCurves]:
    plate = ALL[request.param]
    return request.param, plate, speed_curves(fit(machine(plate)))


def at(curves: SpeedCurves, values: np.ndarray, speed: float) -> float:
    """A value of a curve at one speed."""
    return float(np.interp(speed, curves.speed_rpm, values))


def test_the_torque_at_rated_speed_is_the_plates_output_over_its_speed(drawn):
    _, plate, curves = drawn
    rated_nm = plate["power"] / (plate["speed"] * 2.0 * np.pi / 60.0)
    assert curves.rated_torque_nm == pytest.approx(rated_nm, rel=0.02)
    assert at(curves, curves.torque_nm[1], curves.rated_speed_rpm) == pytest.approx(rated_nm, rel=0.08)


def test_the_current_at_rated_speed_is_the_plates(drawn):
    _, plate, curves = drawn
    assert at(curves, curves.current_a[1], plate["speed"]) == pytest.approx(plate["current"], rel=0.08)


def test_the_starting_torque_is_what_such_a_design_gives(drawn):
    name, _, curves = drawn
    low, high = STARTING[name]
    assert low < curves.torque_nm[1][0] / curves.rated_torque_nm < high


def test_a_single_phase_motor_brakes_at_synchronous_speed_for_its_backward_field(drawn):
    _, _, curves = drawn
    assert curves.torque_nm[1][-1] < 0.0


def test_the_torque_falls_where_the_start_switch_opens(drawn):
    name, _, curves = drawn
    if curves.switch_rpm is None:
        assert name == "capacitor run"
        return
    below, above = (at(curves, curves.torque_nm[1], curves.switch_rpm + step) for step in (-40.0, 40.0))
    assert below > above


def test_the_bands_hold_their_middle_and_the_same_plate_gives_the_same_curves(drawn):
    _, plate, curves = drawn
    for low, middle, high in (curves.torque_nm, curves.current_a):
        assert np.all(low <= middle) and np.all(middle <= high)
    again = speed_curves(fit(machine(plate)))
    assert np.array_equal(again.torque_nm[1], curves.torque_nm[1])
