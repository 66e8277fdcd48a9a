"""Torque and current over speed, held against the plate and against what catalogues give."""

from __future__ import annotations

import numpy as np
import pytest

from calc.curve_bands import SpeedCurves
from calc.induction_3ph.curves import speed_curves
from calc.kinds import twin_of
from calc.sheet_io import sheet_from_plain


def curves_of(**plate: object) -> SpeedCurves:
    sheet = sheet_from_plain(
        {"format": 1, "machine": {"kind": "induction_3ph", "nameplate": plate}, "complaint": "routine_check"}
    )
    return speed_curves(twin_of(sheet.machine))


@pytest.fixture(scope="module")
def curves() -> SpeedCurves:
    """A four-pole motor of 7.5 kW; the same plate as in the case sheet's description."""
    return curves_of(
        power="7.5 kW", voltage="400 V", current="14.9 A", frequency="50 Hz", speed="1455 rpm",
        power_factor=0.84, efficiency="88.7 %", connection="delta", locked_rotor_current_ratio=6.5,
    )  # fmt: skip


def at(curves: SpeedCurves, values: np.ndarray, speed: float) -> float:
    """A value of a curve at one speed."""
    return float(np.interp(speed, curves.speed_rpm, values))


def test_the_torque_at_rated_speed_is_the_plates_output_over_its_speed(curves: SpeedCurves):
    # 7500 W / (1455 r/min * 2 pi / 60) = 49.2 N m; IEC 60034-1 allows slip to be off by a fifth
    assert curves.rated_torque_nm == pytest.approx(49.2, abs=0.1)
    assert at(curves, curves.torque_nm[1], 1455) == pytest.approx(49.2, rel=0.08)


def test_the_current_at_rated_speed_is_the_plates(curves: SpeedCurves):
    assert at(curves, curves.current_a[1], 1455) == pytest.approx(14.9, rel=0.08)


def test_the_current_at_standstill_is_the_plates_locked_rotor_ratio(curves: SpeedCurves):
    assert curves.current_a[1][0] == pytest.approx(6.5 * 14.9, rel=0.1)


def test_the_torque_vanishes_at_synchronous_speed(curves: SpeedCurves):
    assert abs(curves.torque_nm[1][-1]) < 0.05 * curves.rated_torque_nm


def test_the_breakdown_torque_is_what_the_standard_asks_for(curves: SpeedCurves):
    # IEC 60034-1: at least 1.6 times rated torque; catalogues give 2 to 3.5 (from memory)
    assert 1.6 < curves.torque_nm[1].max() / curves.rated_torque_nm < 4.0


def test_the_band_holds_its_middle_and_the_same_plate_gives_the_same_curves(curves: SpeedCurves):
    for low, middle, high in (curves.torque_nm, curves.current_a):
        assert np.all(low <= middle) and np.all(middle <= high)
