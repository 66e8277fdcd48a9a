"""A capacitor-run motor as a differential equation, against its phasors."""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from calc.induction_1ph.circuit import Rotor, Windings, solve_currents
from calc.induction_1ph.machine import capacitor_ohm

OMEGA = 2.0 * math.pi * 50.0
MAIN_OHM, MAIN_X = 4.6, 8.3
AUXILIARY_OHM, AUXILIARY_X = 6.5, 7.6
ROTOR_OHM, ROTOR_X, MAGNETISING = 5.9, 5.6, 200.0
RATIO, FARAD, VOLT = 1.05, 20e-6, 230.0


def inductances():
    """Currents main, auxiliary, rotor d, rotor q to flux linkages; the rotor counted in main turns."""
    m = MAGNETISING / OMEGA
    return np.array(
        [
            [MAIN_X / OMEGA + m, 0.0, m, 0.0],
            [0.0, AUXILIARY_X / OMEGA + RATIO**2 * m, 0.0, RATIO * m],
            [m, 0.0, ROTOR_X / OMEGA + m, 0.0],
            [0.0, RATIO * m, 0.0, ROTOR_X / OMEGA + m],
        ]
    )


def simulate(slip):
    """Run at a held speed until settled; currents, capacitor voltage and torque of the last cycle."""
    to_current = np.linalg.inv(inductances())
    speed = (1.0 - slip) * OMEGA

    def rate(t, y):
        flux, capacitor_v = y[:4], y[4]
        main, auxiliary, d, q = to_current @ flux
        volt = math.sqrt(2.0) * VOLT * math.cos(OMEGA * t)
        return [
            volt - MAIN_OHM * main,
            volt - AUXILIARY_OHM * auxiliary - capacitor_v,
            -ROTOR_OHM * d + speed * flux[3],
            -ROTOR_OHM * q - speed * flux[2],
            auxiliary / FARAD,
        ]

    cycle = 1.0 / 50.0
    times = np.linspace(39.0 * cycle, 40.0 * cycle, 400, endpoint=False)
    done = solve_ivp(rate, (0.0, 40.0 * cycle), np.zeros(5), t_eval=times, rtol=1e-7, atol=1e-7)
    currents = to_current @ done.y[:4]
    torque = done.y[2] * currents[3] - done.y[3] * currents[2]
    return currents, done.y[4], torque


@pytest.mark.parametrize("slip", [1.0, 0.3, 0.05, 0.01])
def test_phasors_are_the_settled_state_of_the_differential_equation(slip):
    def column(x):
        return np.array([x], dtype=np.float64)

    capacitor = capacitor_ohm(column(FARAD), column(OMEGA), loss_factor=0.0)
    fed = Windings(
        main_ohm=np.array([MAIN_OHM + 1j * MAIN_X]),
        auxiliary_ohm=AUXILIARY_OHM + 1j * AUXILIARY_X + capacitor,
        turns_ratio=column(RATIO),
        main_volt=np.array([VOLT + 0j]),
        auxiliary_volt=np.array([VOLT + 0j]),
        turn_share=column(0.0),
        loop_siemens=np.array([0j]),
    )
    rotor = Rotor(column(MAGNETISING), column(np.inf), column(ROTOR_OHM), column(ROTOR_X), column(1.0))
    found = solve_currents(fed, rotor, column(slip))
    currents, capacitor_v, torque = simulate(slip)
    assert abs(found.main[0]) == pytest.approx(np.sqrt(np.mean(currents[0] ** 2)), rel=2e-3)
    assert abs(found.auxiliary[0]) == pytest.approx(np.sqrt(np.mean(currents[1] ** 2)), rel=2e-3)
    read_v = np.sqrt(np.mean(capacitor_v**2))
    assert abs(found.auxiliary[0] * capacitor[0]) == pytest.approx(read_v, rel=2e-3)
    assert found.torque_w[0] == pytest.approx(OMEGA * np.mean(torque), rel=5e-3)
