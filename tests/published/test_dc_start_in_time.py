"""DC motors started from rest: an independent library's electrical equations, and a free shaft.

The library is gym-electric-motor (no saturation there); the equation of motion stands here. The machine
is a 240 V, 40 A motor with 0.4 ohm, started through a resistance that is cut out once the current has
fallen to its rated value, as a starter does. Its inertia is large against the winding's time constant
(some seconds against under a millisecond), so the first peak reaches V/R but for a percent or two.
"""

import numpy as np
import pytest
from gym_electric_motor.physical_systems import electric_motors as motors
from scipy.integrate import solve_ivp

from calc.dc import fit
from calc.dc.circuit import Armature, Magnet, operate
from calc.twin import Ask
from tests.calc.dc.builders import machine, rows_of
from tests.published.sources import published

pytestmark = published(
    "gym-electric-motor", "electrical equations, with an own equation of motion from rest",
    known="another road", checks="calc.dc.circuit.operate",
    says="shunt, series, magnet, separately excited: peak near V/R, end within 0.1 % of the operating point",
)  # fmt: skip

VOLT, AMPERE, SPEED_RAD, OHM, STARTER_OHM = 240.0, 40.0, 120.0, 0.4, 3.0
INERTIA = 2.0  # kg m2
LOAD = 0.6  # of the torque at rated current
KINDS = ["shunt", "series", "permanent", "separate"]


def one(number):
    return np.array([float(number)])


def motor_of(kind, ohm):
    psi = (VOLT - AMPERE * OHM) / SPEED_RAD
    base = {"r_a": ohm, "l_a": 2e-3, "j_rotor": INERTIA}
    wound = base | {"r_e": 120.0, "l_e": 5.0, "l_e_prime": psi / 2.0}
    if kind == "permanent":
        return motors.DcPermanentlyExcitedMotor(motor_parameter=base | {"psi_e": psi}), [VOLT], [0.0]
    if kind == "series":
        turned = base | {"r_e": 0.0, "l_e": 2e-3, "l_e_prime": psi / AMPERE}
        return motors.DcSeriesMotor(motor_parameter=turned), [VOLT], [0.0]
    # The field stands before the armature is switched on, as it must.
    if kind == "shunt":
        return motors.DcShuntMotor(motor_parameter=wound), [VOLT], [0.0, VOLT / 120.0]
    return motors.DcExternallyExcitedMotor(motor_parameter=wound), [VOLT, VOLT], [0.0, VOLT / 120.0]


def stage(kind, ohm, state, seconds):
    """Run with one resistance in the armature circuit; state is the currents and the speed."""
    motor, supply, _ = motor_of(kind, ohm)
    load_nm = LOAD * (VOLT - AMPERE * OHM) / SPEED_RAD * AMPERE

    def slope(_, y):
        currents, speed = y[:-1], y[-1]
        push = motor.torque(currents) - (load_nm if speed > 0.0 else 0.0)
        return [*motor.electrical_ode(currents, supply, speed), push / INERTIA]

    return solve_ivp(slope, (0.0, seconds), state, method="LSODA", rtol=1e-6, atol=1e-6).y


def operating_point(kind):
    share = {"series": 1.0, "shunt": 0.0} if kind == "series" else {"series": 0.0, "shunt": 1.0}
    rest = {"residual": 0.0, "factor": 1.0, "reaction": 0.0, "lame": 0.0, "lame_share": 1.0, "bend": 1e-4}
    field = Magnet(**{k: one(v) for k, v in (share | rest).items()}, permanent=kind == "permanent")
    drop = OHM * AMPERE / VOLT
    point = operate(
        Armature(one(1.0), one(drop), one(0.0), one(1.0 - drop)), field, one(LOAD), one(0.0), one(0.0)
    )
    return point.current[0] * AMPERE, point.speed[0] * SPEED_RAD


@pytest.mark.parametrize("kind", KINDS)
def test_a_start_through_a_resistance_peaks_at_volts_over_ohms_and_ends_at_the_operating_point(kind):
    _, _, rest = motor_of(kind, OHM)
    first = stage(kind, OHM + STARTER_OHM, [*rest, 0.0], 15.0)
    peak = first[0].max()
    assert 0.96 * VOLT / (OHM + STARTER_OHM) < peak < VOLT / (OHM + STARTER_OHM)
    end = stage(kind, OHM, first[:, -1], 60.0)[:, -1]
    ours_a, ours_rad = operating_point(kind)
    assert end[0] == pytest.approx(ours_a, rel=1e-3)
    assert end[-1] == pytest.approx(ours_rad, rel=1e-3)


@published(
    "textbook machines", "V/R_a over rated current, and Hubert 10.12: 821 over 54.5 A", known="computed",
    checks=["calc.dc.model.fit", "calc.dc.model.DcTwin"],
    says="a stalled armature on full volts takes 8 to 60 times rated current",
)  # fmt: skip
@pytest.mark.parametrize(
    ("power", "volts", "amps"),
    [("15 hp", 230, 56), ("40 hp", 240, 138), ("50 hp", 250, 165), ("100 hp", 250, 335)],
)
def test_a_stalled_armature_that_nothing_limits_takes_what_textbook_machines_take(power, volts, amps):
    plate = {"power": power, "voltage": f"{volts} V", "current": f"{amps} A", "speed": "1200 rpm"}
    twin = fit(machine("dc_shunt", plate))
    z = np.zeros((1, twin.dim))
    z[0, twin.latents.index("limit")] = 12.0  # neither starter nor drive holds it back
    (found,) = twin.predict(z, rows_of(twin, 1), [Ask("armature_current", "stalled")])
    assert 8.0 < found[0, 0] / amps < 60.0
