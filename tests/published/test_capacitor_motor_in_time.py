"""A capacitor motor as a differential equation of both windings, against its phasors and its run.

Flux linkages of main and auxiliary winding and of two rotor circuits, in stator coordinates, with the
capacitor's voltage; the shaft held, or free. The iron is linear and the rotor's resistance is the same
for both fields, so Plateside's motor is set up with its saturation and its backward rise out of play.
"""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from calc.induction_1ph.circuit import Rotor, Windings, solve_currents
from calc.induction_1ph.machine import Motor, Setting, capacitor_ohm
from calc.induction_1ph.priors import SATURATION_SHARE
from calc.induction_1ph.slip import run_loaded
from tests.published.sources import published

pytestmark = published(
    "own differential equations", "both windings, capacitor and cage, integrated with scipy",
    known="another road", checks=["calc.induction_1ph.circuit.solve_currents"],
    says="currents and capacitor voltage within 0.2 %, torque within 0.5 %, at four slips",
)  # fmt: skip

OMEGA = 2.0 * math.pi * 50.0
MAIN_OHM, MAIN_X = 4.6, 8.3
AUXILIARY_OHM, AUXILIARY_X = 6.5, 7.6
ROTOR_OHM, ROTOR_X, MAGNETISING = 5.9, 8.3, 200.0
RATIO, RUN_F, START_F, VOLT = 1.05, 20e-6, 120e-6, 230.0
CYCLE = 1.0 / 50.0
SWITCH_OPENS = 0.75  # of synchronous speed, as start switches do (from memory)
PUSH_S = 0.5  # kinetic energy of the shaft over its load: the twice-line torque hardly shows in the speed
MANY = 1e4


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


TO_CURRENT = np.linalg.inv(inductances())


def rates(t, y, speed, farad):
    """Rates of the four flux linkages and of the capacitor's voltage; and the torque in synchronous watts."""
    flux, capacitor_v = y[:4], y[4]
    main, auxiliary, d, q = TO_CURRENT @ flux
    volt = math.sqrt(2.0) * VOLT * math.cos(OMEGA * t)
    moved = [
        volt - MAIN_OHM * main,
        volt - AUXILIARY_OHM * auxiliary - capacitor_v,
        -ROTOR_OHM * d + speed * OMEGA * flux[3],
        -ROTOR_OHM * q - speed * OMEGA * flux[2],
        auxiliary / farad,
    ]
    return moved, OMEGA * (flux[2] * q - flux[3] * d)


def held(slip, farad=RUN_F):
    """Run at a held speed until settled; currents, capacitor voltage and torque of the last cycle."""
    times = np.linspace(79.0 * CYCLE, 80.0 * CYCLE, 400, endpoint=False)
    done = solve_ivp(
        lambda t, y: rates(t, y, 1.0 - slip, farad)[0],
        (0.0, 80.0 * CYCLE), np.zeros(5), t_eval=times, rtol=1e-7, atol=1e-7,
    )  # fmt: skip
    torque = [rates(t, y, 1.0 - slip, farad)[1] for t, y in zip(times, done.y.T, strict=True)]
    return TO_CURRENT @ done.y[:4], done.y[4], np.array(torque)


def free(load_w, *, starting):
    """Run up from rest with a start capacitor that the switch takes off; states of the last 20 cycles.

    Both capacitors lie side by side, so the run capacitor keeps the common voltage.
    Without ``starting`` there is only the run capacitor.
    """

    def slope(farad):
        def rate(t, y):
            moved, torque = rates(t, y, y[5], farad)
            pull = load_w if y[5] > 0.0 else min(load_w, max(torque, 0.0))
            return [*moved, (torque - pull) / (2.0 * PUSH_S * load_w)]

        return rate

    def opens(_, y):
        return y[5] - SWITCH_OPENS

    opens.terminal = True
    state, at = np.zeros(6), 0.0
    if starting:
        first = solve_ivp(slope(RUN_F + START_F), (0.0, 20.0), state, events=opens, rtol=1e-6, atol=1e-6)
        state, at = first.y[:, -1], first.t[-1]
    last = math.ceil(at / CYCLE + (300 if starting else 100)) * CYCLE
    times = np.linspace(last - 20 * CYCLE, last, 4000, endpoint=False)
    return solve_ivp(slope(RUN_F), (at, last), state, t_eval=times, rtol=1e-6, atol=1e-6).y


def column(x):
    return np.array([x], dtype=np.float64)


def rms(x):
    return float(np.sqrt(np.mean(np.square(x))))


@pytest.mark.parametrize("slip", [1.0, 0.3, 0.05, 0.01])
@pytest.mark.parametrize("farad", [RUN_F, RUN_F + START_F])
def test_phasors_are_the_settled_state_of_the_differential_equation(slip, farad):
    capacitor = capacitor_ohm(column(farad), column(OMEGA), loss_factor=0.0)
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
    currents, capacitor_v, torque = held(slip, farad)
    assert abs(found.main[0]) == pytest.approx(rms(currents[0]), rel=2e-3)
    assert abs(found.auxiliary[0]) == pytest.approx(rms(currents[1]), rel=2e-3)
    assert abs(found.auxiliary[0] * capacitor[0]) == pytest.approx(rms(capacitor_v), rel=2e-3)
    assert found.torque_w[0] == pytest.approx(np.mean(torque), rel=5e-3)


def plateside_run(load_w):
    """The same motor as Plateside runs it: the slip at which its torque meets the load."""
    one, nothing = column(1.0), column(0.0)
    cold = 20.0  # resistances as given
    machine = Motor(
        # Rated for many times the voltage: the iron stays at the foot of its curve.
        voltage_v=column(MANY * VOLT), angular_frequency=column(OMEGA), main_ohm=column(MAIN_OHM),
        main_reactance_ohm=column(MAIN_X), auxiliary_ohm=column(AUXILIARY_OHM),
        auxiliary_reactance_ohm=column(AUXILIARY_X), rotor_ohm=column(ROTOR_OHM / MANY),
        magnetising_ohm=column(MAGNETISING / (1.0 + SATURATION_SHARE)), core_ohm=column(np.inf),
        turns_ratio=column(RATIO), power_w=column(load_w), friction_w=nothing, slip=column(0.05),
        run_f=column(RUN_F),
    )  # fmt: skip
    setting = Setting(
        temperature_c=column(cold), main_extra_ohm=nothing, supply_v=column(VOLT), source_ohm=nothing,
        auxiliary_extra_ohm=capacitor_ohm(column(RUN_F), column(OMEGA), loss_factor=0.0),
        turn_share=nothing, loop_leakage=one, leakage=one, rotor_rise=column(MANY), winding_ohm=one,
    )  # fmt: skip
    return run_loaded(machine, setting, column(load_w), np.zeros(1, dtype=np.bool_))


@published(
    "own differential equations", "both windings, capacitor, cage and a free shaft from rest",
    known="another road", checks=["calc.induction_1ph.slip.run_loaded", "calc.induction_1ph.machine.run_at"],
    says="started with 140 µF, the switch opens at 75 %: slip within 2 %, currents within 1 % at three loads",
)  # fmt: skip
@pytest.mark.parametrize("load_w", [300.0, 600.0, 900.0])
def test_a_motor_that_runs_up_settles_at_the_slip_and_currents_of_its_load(load_w):
    ours = plateside_run(load_w)
    settled = free(load_w, starting=True)
    currents = TO_CURRENT @ settled[:4]
    assert not ours.stalled[0]
    assert 1.0 - settled[5].mean() == pytest.approx(ours.slip[0], rel=0.02)
    assert rms(currents[0]) == pytest.approx(abs(ours.currents.main[0]), rel=0.01)
    assert rms(currents[1]) == pytest.approx(abs(ours.currents.auxiliary[0]), rel=0.01)


@published(
    "own differential equations", "both windings, capacitor, cage and a free shaft from rest",
    known="another road", checks="calc.induction_1ph.circuit.solve_currents",
    says="without its start capacitor a load above the torque at standstill keeps it standing",
)  # fmt: skip
def test_without_its_start_capacitor_it_does_not_start_against_the_load_that_it_can_run_with():
    assert held(1.0)[2].mean() < 600.0 < held(1.0, RUN_F + START_F)[2].mean()
    assert free(600.0, starting=False)[5].mean() < 0.05
    assert plateside_run(600.0).slip[0] < 0.1
