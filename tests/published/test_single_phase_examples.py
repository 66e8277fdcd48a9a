"""Worked examples of single-phase motors, at intermediate steps.

Fitzgerald, Kingsley and Umans, "Electric Machinery", examples 9.2, 9.3 and 9.5; Hubert, "Electric
Machines", examples 6.1 and 6.2; Guru and Hiziroglu, "Electric Machinery and Transformers", example
10.3. Data and answers looked up in open solution notebooks; the field impedances of 9.2, the
inductances of 9.5 and the reactances of 10.3 are from memory, and reproduce the printed answers.
"""

import cmath
import math

import numpy as np
import pytest

from calc.induction_1ph.circuit import Rotor, Windings, half_field_ohm, solve_currents
from calc.induction_1ph.machine import capacitor_ohm
from calc.induction_1ph.plate import VOLT_AMPERES_PER_WATT
from tests.published.sources import published

SOLVER = ["calc.induction_1ph.circuit.solve_currents", "calc.induction_1ph.circuit.half_field_ohm"]
FITZGERALD, HUBERT = "Fitzgerald, Electric Machinery", "Hubert, Electric Machines"


def example(book, number, says, *, known="looked up", checks=SOLVER):
    return published(book, number, says=says, known=known, checks=checks)


def real(x):
    return np.array([x], dtype=np.float64)


def phasor(x):
    return np.array([x], dtype=np.complex128)


def rotor(*, magnetising, resistance, reactance):
    return Rotor(
        magnetising_ohm=real(magnetising),
        core_ohm=real(np.inf),
        rotor_ohm=real(resistance),
        rotor_reactance_ohm=real(reactance),
        backward_ratio=real(1.0),
    )


def windings(*, main, auxiliary, main_volt, auxiliary_volt, ratio=1.0):
    return Windings(
        main_ohm=phasor(main),
        auxiliary_ohm=phasor(auxiliary),
        turns_ratio=real(ratio),
        main_volt=phasor(main_volt),
        auxiliary_volt=phasor(auxiliary_volt),
        turn_share=real(0.0),
        loop_siemens=phasor(0.0),
    )


def capacitor(*, microfarad, frequency_hz):
    omega = 2.0 * math.pi * frequency_hz
    return complex(capacitor_ohm(real(microfarad * 1e-6), real(omega), loss_factor=0.0)[0])


def degrees(x):
    return math.degrees(cmath.phase(complex(x[0])))


FITZGERALD_9_2 = rotor(magnetising=66.8, resistance=4.12, reactance=2.12)


@example(
    FITZGERALD,
    "example 9.2",
    "15.9 + j20.1 and 0.99 + j1.06 ohm",
    known="from memory",
    checks="calc.induction_1ph.circuit.half_field_ohm",
)
def test_the_two_field_impedances_of_fitzgerald_9_2():
    forward, _ = half_field_ohm(FITZGERALD_9_2, real(0.05), backward=False)
    backward, _ = half_field_ohm(FITZGERALD_9_2, real(0.05), backward=True)
    assert forward[0] == pytest.approx(15.9 + 20.1j, abs=0.06)
    assert backward[0] == pytest.approx(0.99 + 1.06j, abs=0.006)


@example(FITZGERALD, "example 9.2", "3.6 A, 0.62, 147 W, 0.823 N·m, 60 %")
def test_current_power_and_efficiency_of_fitzgerald_9_2():
    fed = windings(main=2.02 + 2.79j, auxiliary=1e12, main_volt=110.0, auxiliary_volt=0.0)
    found = solve_currents(fed, FITZGERALD_9_2, real(0.05))
    shaft_w = found.torque_w[0] * 0.95 - 24.0 - 13.0
    speed_rad_s = 0.95 * 2.0 * math.pi * 60.0 / 2.0
    assert abs(found.main[0]) == pytest.approx(3.605, abs=0.0006)
    assert math.cos(cmath.phase(found.main[0])) == pytest.approx(0.6208, abs=1e-4)
    assert shaft_w == pytest.approx(147.4, abs=0.06)
    assert shaft_w / speed_rad_s == pytest.approx(0.8233, abs=1e-4)
    assert shaft_w / (110.0 * found.main[0].real) == pytest.approx(0.599, abs=6e-4)


@example(FITZGERALD, "example 9.3", "forward 9.3 - j6.3 A, backward 3.7 - j1.5 A; 4149, 15, 3928 W")
def test_two_phase_motor_on_unbalanced_voltages_of_fitzgerald_9_3():
    fed = windings(
        main=0.534 + 2.45j,
        auxiliary=0.534 + 2.45j,
        main_volt=230.0,
        auxiliary_volt=cmath.rect(210.0, math.radians(80.0)),
    )
    machine = rotor(magnetising=70.1, resistance=0.956, reactance=2.96)
    found = solve_currents(fed, machine, real(0.05))
    forward = (found.main - 1j * found.auxiliary)[0] / 2.0
    backward = (found.main + 1j * found.auxiliary)[0] / 2.0
    assert forward == pytest.approx(9.279 - 6.310j, abs=6e-4)
    assert backward == pytest.approx(3.723 - 1.497j, abs=1e-3)
    _, forward_siemens = half_field_ohm(machine, real(0.05), backward=False)
    _, backward_siemens = half_field_ohm(machine, real(0.05), backward=True)
    ahead_w = 2.0 * abs(found.forward_emf[0]) ** 2 * forward_siemens[0].real
    against_w = 2.0 * abs(found.backward_emf[0]) ** 2 * backward_siemens[0].real
    assert ahead_w == pytest.approx(4148.8, abs=0.06)
    assert against_w == pytest.approx(14.54, abs=6e-3)
    assert found.torque_w[0] * 0.95 == pytest.approx(3927.6, abs=0.06)


def capacitor_run_motor_of_fitzgerald_9_5():
    """The example gives inductances between windings and rotor; this refers the rotor to the main winding."""
    omega = 2.0 * math.pi * 60.0
    main_h, auxiliary_h, rotor_h = 0.0806, 0.196, 4.7e-6
    main_rotor_h, auxiliary_rotor_h = 0.588e-3, 0.909e-3
    in_series = capacitor(microfarad=35.0, frequency_hz=60.0)
    fed = windings(
        main=0.58 + 1j * omega * (main_h - main_rotor_h**2 / rotor_h),
        auxiliary=3.37 + 1j * omega * (auxiliary_h - auxiliary_rotor_h**2 / rotor_h) + in_series,
        main_volt=230.0,
        auxiliary_volt=230.0,
        ratio=auxiliary_rotor_h / main_rotor_h,
    )
    machine = rotor(
        magnetising=omega * main_rotor_h**2 / rotor_h,
        resistance=37.6e-6 * (main_rotor_h / rotor_h) ** 2,
        reactance=0.0,
    )
    return solve_currents(fed, machine, real(1.0 - 3500.0 / 3600.0)), abs(in_series)


@example(FITZGERALD, "example 9.5", "15.9, 5.2, 18.5 A, 394 V on the capacitor (inductances from memory)")
def test_winding_currents_of_the_capacitor_run_motor_of_fitzgerald_9_5():
    found, in_series = capacitor_run_motor_of_fitzgerald_9_5()
    assert abs(found.main[0]) == pytest.approx(15.88, abs=6e-3)
    assert degrees(found.main) == pytest.approx(-37.6, abs=0.06)
    # The book counts the auxiliary current the other way round.
    assert abs(found.auxiliary[0]) == pytest.approx(5.196, abs=6e-4)
    assert degrees(-found.auxiliary) == pytest.approx(-150.8, abs=0.06)
    assert abs(found.main[0] + found.auxiliary[0]) == pytest.approx(18.55, abs=6e-3)
    assert degrees(found.main + found.auxiliary) == pytest.approx(-22.7, abs=0.06)
    assert abs(found.auxiliary[0]) * in_series == pytest.approx(393.8, abs=0.06)


@example(FITZGERALD, "example 9.5", "9.75 N·m, 3532 of 4041 W, 87.4 % (inductances from memory)")
def test_torque_power_and_efficiency_of_fitzgerald_9_5():
    found, _ = capacitor_run_motor_of_fitzgerald_9_5()
    shaft_w = found.torque_w[0] * 3500.0 / 3600.0 - 40.0
    given_w = 230.0 * (found.main + found.auxiliary)[0].real + 105.0
    assert found.torque_w[0] / (2.0 * math.pi * 60.0) == pytest.approx(9.746, abs=6e-4)
    assert shaft_w == pytest.approx(3532.1, abs=0.1)
    assert given_w == pytest.approx(4040.8, abs=0.1)
    assert shaft_w / given_w == pytest.approx(0.8741, abs=1e-4)


def at_standstill(*, main, auxiliary):
    """Locked rotor with all impedance outside the fields, as the examples take it."""
    fed = windings(main=main, auxiliary=auxiliary, main_volt=120.0, auxiliary_volt=120.0)
    return solve_currents(fed, rotor(magnetising=1e6, resistance=1e-6, reactance=0.0), real(1.0))


@example(HUBERT, "example 6.1", "29.8 and 9.66 A, 17.7° apart")
def test_split_phase_currents_of_hubert_6_1():
    found = at_standstill(main=2.0 + 3.5j, auxiliary=9.15 + 8.40j)
    assert abs(found.main[0]) == pytest.approx(29.77, abs=6e-3)
    assert abs(found.auxiliary[0]) == pytest.approx(9.661, abs=6e-4)
    assert degrees(found.auxiliary) - degrees(found.main) == pytest.approx(17.70, abs=0.01)


@example(HUBERT, "example 6.2", "194.6 µF: 90°, 11.39 A, torque 339 over 87.4")
def test_a_start_capacitor_for_ninety_degrees_raises_torque_as_in_hubert_6_2():
    in_series = capacitor(microfarad=194.6, frequency_hz=60.0)
    assert abs(in_series) == pytest.approx(13.63, abs=6e-3)
    before = at_standstill(main=2.0 + 3.5j, auxiliary=9.15 + 8.40j)
    after = at_standstill(main=2.0 + 3.5j, auxiliary=9.15 + 8.40j + in_series)
    assert degrees(after.auxiliary) - degrees(after.main) == pytest.approx(90.0, abs=0.02)
    assert abs(after.auxiliary[0]) == pytest.approx(11.39, abs=6e-3)
    assert abs(before.main[0] + before.auxiliary[0]) == pytest.approx(39.1, abs=0.06)
    assert abs(after.main[0] + after.auxiliary[0]) == pytest.approx(31.9, abs=0.06)
    assert after.torque_w[0] / before.torque_w[0] == pytest.approx(338.98 / 87.45, rel=1e-3)


@example(FITZGERALD, "example 9.1", "4.5 + j3.7 and 9.5 + j3.5 ohm at 120 V, 60 Hz: 176 µF for 90°")
def test_the_start_capacitor_of_fitzgerald_9_1_turns_the_currents_by_ninety_degrees():
    in_series = capacitor(microfarad=176.2, frequency_hz=60.0)
    found = at_standstill(main=4.5 + 3.7j, auxiliary=9.5 + 3.5j + in_series)
    assert degrees(found.auxiliary) - degrees(found.main) == pytest.approx(90.0, abs=0.05)


@example(
    "Sen, Principles of Electric Machines", "example 7.4",
    "1.5 + j4 and 3 + j6 ohm at 120 V, 60 Hz: 405 µF for most torque, 314 µF for most torque an ampere",
)  # fmt: skip
def test_the_start_capacitors_of_sen_7_4_give_most_torque_and_most_torque_an_ampere():
    sizes = np.linspace(250.0, 500.0, 251)
    found = [
        at_standstill(main=1.5 + 4j, auxiliary=3 + 6j + capacitor(microfarad=c, frequency_hz=60.0))
        for c in sizes
    ]
    torque = np.array([f.torque_w[0] for f in found])
    amps = np.array([abs(f.main[0] + f.auxiliary[0]) for f in found])
    assert sizes[torque.argmax()] == pytest.approx(405.0, abs=2.0)
    assert sizes[(torque / amps).argmax()] == pytest.approx(314.0, abs=2.0)


@example(
    "Guru, Electric Machinery and Transformers",
    "example 10.3",
    "4 µF: 1.207 A, 0.917, 444.7 V; 3, 2, 1 µF computed (reactances from memory)",
)
@pytest.mark.parametrize(
    ("microfarad", "line", "factor", "main", "auxiliary", "volt"),
    [
        (4.0, 1.207, 0.917, 0.904, 0.559, 445.0),
        (3.0, 1.148, 0.817, 1.046, 0.389, 412.0),
        (2.0, 1.194, 0.704, 1.185, 0.238, 378.0),
        (1.0, 1.292, 0.616, 1.306, 0.109, 346.0),
    ],
)
def test_a_weakening_run_capacitor_on_the_motor_of_guru_10_3(microfarad, line, factor, main, auxiliary, volt):
    in_series = capacitor(microfarad=microfarad, frequency_hz=50.0)
    fed = windings(
        main=34.14 + 35.9j,
        auxiliary=149.78 + 1.73**2 * 35.9j + in_series,
        main_volt=230.0,
        auxiliary_volt=230.0,
        ratio=1.73,
    )
    found = solve_currents(fed, rotor(magnetising=248.59, resistance=23.25, reactance=29.32), real(0.06))
    total = (found.main + found.auxiliary)[0]
    assert abs(total) == pytest.approx(line, abs=6e-4)
    assert math.cos(cmath.phase(total)) == pytest.approx(factor, abs=6e-4)
    assert abs(found.main[0]) == pytest.approx(main, abs=6e-4)
    assert abs(found.auxiliary[0]) == pytest.approx(auxiliary, abs=6e-4)
    assert abs(found.auxiliary[0]) * abs(in_series) == pytest.approx(volt, abs=0.6)


@example(
    "C = I/(2πfV)",
    "trade tables",
    "2652.6 I/V at 60 Hz, 3183.1 I/V at 50 Hz",
    known="computed",
    checks="calc.induction_1ph.machine.capacitor_ohm",
)
@pytest.mark.parametrize(("frequency_hz", "factor"), [(60.0, 2652.6), (50.0, 3183.1)])
def test_capacitance_from_volts_and_amps_by_the_usual_factor(frequency_hz, factor):
    """C in µF is 2652.6 I/V at 60 Hz and 3183.1 I/V at 50 Hz (trade tables)."""
    reactance = abs(capacitor(microfarad=factor * 5.0 / 230.0, frequency_hz=frequency_hz))
    assert 230.0 / reactance == pytest.approx(5.0, rel=1e-4)


@example(
    "NEC",
    "Table 430.248 at 230 V",
    "a ceiling for sizing: 10 % below to 50 % above",
    checks="calc.induction_1ph.plate.VOLT_AMPERES_PER_WATT",
)
@pytest.mark.parametrize(("hp", "amps"), [(1 / 4, 2.9), (1 / 2, 4.9), (1.0, 8.0), (2.0, 12.0), (3.0, 17.0)])
def test_usual_volt_amperes_lie_around_the_code_table(hp, amps):
    """NEC Table 430.248 at 230 V, looked up: a ceiling for sizing, so only plausibility."""
    listed = 230.0 * amps / (hp * 745.7)
    usual = [entry[0] for entry in VOLT_AMPERES_PER_WATT.values()]
    assert min(usual) * 0.9 < listed < max(usual) * 1.5
