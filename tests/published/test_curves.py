"""The curves that are drawn over speed, against machines of textbooks."""

import math

import numpy as np
import pytest

from calc.dc import fit as fit_dc
from calc.dc.curves import emf_curve
from calc.induction_1ph import fit as fit_1ph
from calc.induction_1ph.curves import speed_curves as speed_curves_1ph
from calc.induction_3ph import fit
from calc.induction_3ph.curves import speed_curves
from tests.calc.dc.builders import machine as dc_machine
from tests.calc.induction_1ph.plates import machine as machine_1ph
from tests.calc.induction_3ph.plates import machine
from tests.published.circuits import MACHINES
from tests.published.sources import published
from tests.published.test_textbook_machines import FULL, plate_of

RAD = math.pi / 30.0


@published(
    "six textbook machines", "parameters of their circuits", known="from memory",
    checks="calc.induction_3ph.curves.speed_curves",
    says="pull-out torque, and torque and current at standstill, in the band of a full plate",
)  # fmt: skip
@pytest.mark.parametrize("one", MACHINES, ids=lambda m: m.name)
def test_pull_out_and_standstill_of_the_true_circuit_lie_in_the_drawn_band(one):
    curves = speed_curves(fit(plate_of(one.name, FULL)))
    slips = np.geomspace(1e-3, 1.0, 2000)
    torque = np.array([one.gap_w(s) - one.rotational_w * (1.0 - s) for s in slips]) / one.synchronous_rad_s
    low, _, high = curves.torque_nm
    assert low.max() <= torque.max() <= high.max()
    assert low[0] <= torque[-1] <= high[0]
    assert curves.current_a[0][0] <= one.current_a(1.0) <= curves.current_a[2][0]


@published(
    "Fitzgerald, Electric Machinery", "examples 6.2 and 6.3", known="looked up",
    checks="calc.induction_3ph.curves.speed_curves",
    says="42.4 N·m at 1176 r/min; the torque at rated speed is that of the plate",
)  # fmt: skip
def test_the_torque_at_rated_speed_of_fitzgerald_6_2_is_that_of_its_plate():
    plate = {"power": 5221.6, "voltage": 220.0, "current": 18.8, "frequency": 60.0, "speed": 1176.0}
    curves = speed_curves(fit(machine(**plate, power_factor=0.846, efficiency=86.3)))
    assert curves.rated_torque_nm == pytest.approx(42.4, abs=0.05)
    at_rated = [float(np.interp(1176.0, curves.speed_rpm, torque)) for torque in curves.torque_nm]
    assert at_rated[0] < 42.4 < at_rated[2]
    assert at_rated[1] == pytest.approx(42.4, rel=0.05)


@published(
    "Fitzgerald, Electric Machinery", "example 7.9", known="looked up", checks="calc.dc.curves.emf_curve",
    says="magnet motor, 0.2215 V·s: 39.4 V at 1700 r/min, a straight line through zero",
)  # fmt: skip
def test_the_back_emf_of_fitzgerald_7_9_lies_in_the_drawn_band():
    amps = (48.0 - 0.22151 * 1700.0 * RAD) / 1.03
    plate = {"power": "267 W", "voltage": "48 V", "current": f"{amps:.3g} A", "speed": "1700 rpm"}
    curve = emf_curve(fit_dc(dc_machine("dc_permanent_magnet", plate)))
    truth = 0.22151 * RAD * curve.speed_rpm
    low, _, high = curve.emf_v
    assert (low[1:] < truth[1:]).all()
    assert (truth[1:] < high[1:]).all()
    for line in curve.emf_v:
        assert np.diff(line) == pytest.approx(line[1], rel=1e-6)


@published(
    "Chapman, Electric Machinery Fundamentals", "example 9-1", known="from memory",
    checks="calc.dc.curves.emf_curve", says="shunt motor, 250 V induced at 1200 r/min without load",
)  # fmt: skip
def test_the_back_emf_of_chapman_9_1_lies_in_the_drawn_band():
    # 200 A in the line is rated: 195 A in the armature, 238.3 V induced, 1143.8 r/min.
    plate = {
        "power": "60 hp", "voltage": "250 V", "current": "200 A", "speed": "1144 rpm",
        "field_voltage": "250 V", "field_current": "5 A",
    }  # fmt: skip
    curve = emf_curve(fit_dc(dc_machine("dc_shunt", plate)))
    low, high = (float(np.interp(1143.8, curve.speed_rpm, curve.emf_v[i])) for i in (0, 2))
    assert low < 238.3 < high


FITZGERALD_9_2 = {"power": 147.4, "voltage": 110, "current": 3.6, "frequency": 60, "speed": 1710,
                  "power_factor": 0.62, "efficiency": 0.60}  # fmt: skip
FITZGERALD_9_5 = {"power": 3532, "voltage": 230, "current": 18.5, "frequency": 60, "speed": 3500,
                  "power_factor": 0.92, "efficiency": 0.874, "run_capacitor": 35e-6}  # fmt: skip


@published(
    "Fitzgerald, Electric Machinery", "examples 9.2 and 9.5", known="looked up",
    checks="calc.induction_1ph.curves.speed_curves",
    says="0.823 N·m and 3.6 A at 1710 r/min; 9.64 N·m and 18.5 A at 3500 r/min",
)  # fmt: skip
@pytest.mark.parametrize(
    ("plate", "torque_nm", "amps"), [(FITZGERALD_9_2, 0.8233, 3.605), (FITZGERALD_9_5, 9.637, 18.55)]
)
def test_torque_and_current_of_a_single_phase_example_lie_in_the_drawn_band(plate, torque_nm, amps):
    curves = speed_curves_1ph(fit_1ph(machine_1ph(plate)))
    order = np.argsort(curves.speed_rpm)
    for band, truth in ((curves.torque_nm, torque_nm), (curves.current_a, amps)):
        low, high = (np.interp(plate["speed"], curves.speed_rpm[order], band[i][order]) for i in (0, 2))
        assert low < truth < high
