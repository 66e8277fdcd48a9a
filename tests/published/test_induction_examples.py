"""Worked examples of three-phase induction motors, at intermediate steps.

Fitzgerald, Kingsley and Umans, "Electric Machinery", examples 6.1 to 6.5; Sen, "Principles of Electric
Machines and Power Electronics", example 5.3; Hubert, "Electric Machines", example 5.7: data and answers
looked up in open solution notebooks. Chapman, "Electric Machinery Fundamentals", examples 7-1 to 7-8:
answers from memory. DOE-HDBK-1011/4: looked up. Every number asked for is one that Plateside's solver
or its reading of a plate gives; a book rounds its steps, hence three digits.
"""

import math
from dataclasses import replace

import numpy as np
import pytest

from calc.induction_3ph import fit
from calc.induction_3ph.equivalent import circuit
from calc.induction_3ph.network import terminal_resistance
from calc.induction_3ph.plate import read_base
from tests.calc.induction_3ph.plates import machine, predict
from tests.published.circuits import CHAPMAN_25, FITZGERALD_7, Published, run
from tests.published.sources import published

SOLVER, PLATE = "calc.induction_3ph.states.solve", "calc.induction_3ph.plate.read_base"
CHAPMAN, FITZGERALD = "Chapman, Electric Machinery Fundamentals", "Fitzgerald, Electric Machinery"


def example(book, number, says, *, known="looked up", checks=SOLVER):
    return published(book, number, says=says, known=known, checks=checks)


CHAPMAN_7_3 = replace(CHAPMAN_25, slip=0.022)
RAD_S = math.pi / 30.0


def starting_torque_nm(motor, **fault):
    return run(motor, standing=True, **fault).gap_w / motor.synchronous_rad_s


def greatest_torque(motor, **fault):
    """Greatest torque at which the motor still turns, N·m, and the slip there; by bisection."""
    low, high = 1e-3, 2e4
    for _ in range(70):
        middle = 0.5 * (low + high)
        stalls = run(motor, gap_w=middle * motor.synchronous_rad_s, **fault).stalls
        low, high = (low, middle) if stalls else (middle, high)
    return low, run(motor, gap_w=low * motor.synchronous_rad_s, **fault).slip


# Chapman 7-3 (from memory; recomputed exactly): the 25 hp motor at a slip of 2.2 %.


@example(CHAPMAN, "example 7-3", "1760 r/min, 18.88 A at -33.6°, power factor 0.833", known="from memory")
def test_slip_current_and_power_factor_of_chapman_7_3_from_its_air_gap_power():
    found = run(CHAPMAN_7_3, gap_w=11838.8)
    assert found.slip == pytest.approx(0.022, rel=1e-4)
    assert (1.0 - found.slip) * 1800.0 == pytest.approx(1760.4, abs=0.1)
    assert found.current_a == pytest.approx([18.89] * 3, abs=0.005)
    assert math.degrees(math.acos(found.power_factor)) == pytest.approx(33.68, abs=0.01)
    assert found.power_factor == pytest.approx(0.8321, abs=1e-4)


@example(CHAPMAN, "example 7-3", "input 12 530 W, copper 685 W, shaft 10 485 W, 83.7 %", known="from memory")
def test_input_and_stator_copper_loss_of_chapman_7_3():
    found = run(CHAPMAN_7_3, gap_w=11838.8)
    assert found.input_w == pytest.approx(12525.0, abs=1.0)
    assert found.copper_w == pytest.approx(686.3, abs=0.1)
    # Converted 11 578.4 W, shaft 10 478.4 W, efficiency 83.66 %.
    output_w = (1.0 - found.slip) * found.gap_w - CHAPMAN_7_3.rotational_w
    assert output_w == pytest.approx(10478.4, abs=1.0)
    assert output_w / found.input_w == pytest.approx(0.8366, abs=1e-4)


@example(
    CHAPMAN, "example 7-5", "229 N·m at slip 0.198; the exact circuit 230.8 at 0.2014", known="from memory"
)
def test_pull_out_of_chapman_7_5_with_the_exact_thevenin_circuit():
    # The book's approximations give 229 N·m at 0.198; the exact circuit 230.8 N·m at 0.2014.
    torque_nm, slip = greatest_torque(CHAPMAN_7_3)
    assert torque_nm == pytest.approx(230.8, abs=0.1)
    assert slip == pytest.approx(0.2014, abs=2e-4)
    assert torque_nm == pytest.approx(229.0, rel=0.03)


@example(CHAPMAN, "example 7-5", "twice the rotor resistance: slip 0.396, 229 N·m", known="from memory")
def test_twice_the_rotor_resistance_moves_the_pull_out_of_chapman_7_5_and_not_its_height():
    torque_nm, slip = greatest_torque(CHAPMAN_7_3, bars=1 / 3)  # (1 + b) / (1 - b) = 2
    assert torque_nm == pytest.approx(230.8, abs=0.1)
    assert slip == pytest.approx(0.4028, abs=4e-4)


@example(CHAPMAN, "example 7-5", "104 and 170 N·m; the exact circuit 106.6 and 174.1", known="from memory")
def test_starting_torques_of_chapman_7_5():
    # The model splits the leakage evenly at standstill, the book 1.106 to 0.464: hence one percent.
    assert starting_torque_nm(CHAPMAN_7_3) == pytest.approx(106.6, rel=0.01)
    assert starting_torque_nm(CHAPMAN_7_3, bars=1 / 3) == pytest.approx(174.1, rel=0.01)


# Chapman 7-8 (from memory; recomputed): tests of a 7.5 hp motor, and what its circuit then reads.

CHAPMAN_7_8 = Published("Chapman 7-8", 208.0, 60.0, 4, 0.04, 0.2429, 0.6706, 0.1511, 0.6706, 14.034)


@example(
    CHAPMAN,
    "example 7-8",
    "13.6 V at 28 A: 0.243 ohm a phase",
    known="from memory",
    checks="calc.induction_3ph.network.terminal_resistance",
)
def test_the_dc_test_of_chapman_7_8_reads_two_phases_of_a_star():
    between = terminal_resistance(np.full((1, 3), 0.2429), np.array([0.0]))
    assert between[0] == pytest.approx([13.6 / 28.0] * 3, rel=1e-3)


@example(CHAPMAN, "example 7-8", "no load 8.17 A, 420 W", known="from memory")
def test_the_circuit_of_chapman_7_8_reads_what_the_no_load_test_read():
    found = run(CHAPMAN_7_8, gap_w=371.4)  # the rotational losses
    assert found.current_a == pytest.approx([np.mean([8.12, 8.20, 8.18])] * 3, rel=0.01)
    assert found.input_w == pytest.approx(420.0, rel=0.005)
    # The stator's copper loss: 420 less 371.3 W.
    assert found.copper_w == pytest.approx(420.0 - 371.3, rel=0.02)


@example(CHAPMAN, "example 7-8", "25 V, 15 Hz: 27.9 A, 920 W, 40.4°", known="from memory")
def test_the_circuit_of_chapman_7_8_reads_what_the_locked_rotor_test_read():
    # 25 V at 15 Hz: 27.9 A, 920 W, 40.4 degrees. The book leaves out the magnetising branch, which takes 2 %.
    found = run(CHAPMAN_7_8, standing=True, share=25.0 / 208.0, frequency=0.25)
    assert found.current_a == pytest.approx([27.9] * 3, rel=0.025)
    assert found.input_w == pytest.approx(920.0, rel=0.015)
    assert math.degrees(math.acos(found.power_factor)) == pytest.approx(40.4, abs=1.0)


# Fitzgerald 6.2 and 6.3 (looked up): 7.5 hp, six poles.


@example(FITZGERALD, "example 6.2", "18.8 A, 0.846, 42.4 N·m, 86 %")
def test_current_power_factor_and_input_of_fitzgerald_6_2():
    shaft_w = 42.40 * 1176.0 * RAD_S
    found = run(FITZGERALD_7, gap_w=(shaft_w + 403.0) / 0.98)
    assert shaft_w == pytest.approx(5221.6, abs=0.5)
    assert found.slip == pytest.approx(0.02, rel=1e-4)
    assert found.current_a == pytest.approx([18.78] * 3, abs=0.005)
    assert found.power_factor == pytest.approx(0.8456, abs=1e-4)
    assert shaft_w / found.input_w == pytest.approx(0.8630, abs=1e-4)


@example(FITZGERALD, "example 6.3", "65.4 N·m at slip 0.03")
def test_load_torque_of_fitzgerald_6_3_gives_its_slip():
    found = run(FITZGERALD_7, gap_w=65.41 * FITZGERALD_7.synchronous_rad_s)
    assert found.slip == pytest.approx(0.03, rel=1e-3)


@example(FITZGERALD, "example 6.3", "175 N·m at 970 r/min")
def test_greatest_torque_and_its_speed_of_fitzgerald_6_3():
    torque_nm, slip = greatest_torque(FITZGERALD_7)
    assert torque_nm == pytest.approx(174.6, abs=0.1)
    assert (1.0 - slip) * 1200.0 == pytest.approx(969.8, abs=0.5)


@example(FITZGERALD, "example 6.3", "77.6 N·m")
def test_starting_torque_of_fitzgerald_6_3():
    assert starting_torque_nm(FITZGERALD_7) == pytest.approx(77.62, rel=0.01)


# Fitzgerald 6.5 (looked up): no-load test of a 7.5 hp motor, deep-bar rotor.

FITZGERALD_6_5 = Published("Fitzgerald 6.5", 220.0, 60.0, 4, 0.03, 0.262, 0.6329, 0.4467, 1.475, 21.20)


@example(FITZGERALD, "example 6.5", "219 V: 5.70 A, 380 W")
def test_the_circuit_of_fitzgerald_6_5_reads_what_the_no_load_test_read():
    # The book takes the no-load reactance for X1 + XM and neglects the rotor: three percent in the current.
    found = run(FITZGERALD_6_5, gap_w=354.5, share=219.0 / 220.0)
    assert found.current_a == pytest.approx([5.70] * 3, rel=0.035)
    assert found.input_w == pytest.approx(380.0, rel=0.01)


@example(FITZGERALD, "example 6.5", "26.5 V, 15 Hz: 18.57 A, 675 W with the rotor blocked")
def test_the_circuit_of_fitzgerald_6_5_reads_what_the_blocked_rotor_test_read():
    # The model splits the leakage evenly at standstill, the book 0.633 to 1.475: four percent less current,
    # and the power as its square, with two percent more resistance.
    found = run(FITZGERALD_6_5, standing=True, share=26.5 / 220.0, frequency=0.25)
    assert found.current_a == pytest.approx([18.57] * 3, rel=0.05)
    assert found.input_w == pytest.approx(675.0, rel=0.07)


# Sen 5.3 (looked up): 2200 V.

SEN_5_3 = Published("Sen 5.3", 2200.0, 60.0, 6, 0.03, 2.8, 7.96, 2.12, 7.96, 273.07)


@example(
    "Sen, Principles of Electric Machines", "example 5.3", "2200 V: 4.5 A, 1600 W; 270 V, 15 Hz: 25 A, 9 kW"
)
def test_the_circuit_of_sen_5_3_reads_what_both_tests_read():
    free = run(SEN_5_3, gap_w=1429.9)
    assert free.current_a == pytest.approx([4.5] * 3, rel=0.01)
    assert free.input_w == pytest.approx(1600.0, rel=0.005)
    blocked = run(SEN_5_3, standing=True, share=270.0 / 2200.0, frequency=0.25)
    assert blocked.current_a == pytest.approx([25.0] * 3, rel=0.005)
    assert blocked.input_w == pytest.approx(9000.0, rel=0.005)


# Hubert 5.7 (looked up): locked-rotor current of a reactive motor at another voltage and frequency.


@example("Hubert, Electric Machines", "example 5.7", "151 A at 230 V, 60 Hz is 173.3 A at 220 V, 50 Hz")
def test_locked_rotor_current_of_hubert_5_7_on_220_v_50_hz():
    reactive = Published("Hubert 5.7", 230.0, 60.0, 4, 0.03, 1e-4, 0.44, 1e-4, 0.44, 20.0)
    at_60 = run(reactive, standing=True).current_a[0]
    at_50 = run(reactive, standing=True, share=220.0 / 230.0, frequency=50.0 / 60.0).current_a[0]
    assert 151.0 * at_50 / at_60 == pytest.approx(173.3, abs=0.1)


# What Plateside reads off a plate.


@example(
    "Fitzgerald 6.1 and 6.2, DOE-HDBK-1011/4, Chapman 7-1",
    "",
    "slips of 2.7, 2.0, 1.3 and 5 % (Chapman from memory)",
    checks=PLATE,
)
@pytest.mark.parametrize(
    ("speed_rpm", "poles", "slip"),
    [
        (3502.0, 2, 0.02722),  # Fitzgerald 6.1, looked up: rotor loss 419 W of 15 394 W in the gap
        (3554.0, 2, 0.01278),  # DOE-HDBK-1011/4, looked up
        (1710.0, 4, 0.05),  # Chapman 7-1, from memory
        (1176.0, 6, 0.02),  # Fitzgerald 6.2, looked up
    ],
)
def test_poles_and_slip_of_the_books_are_read_off_the_speed(speed_rpm, poles, slip):
    base = read_base(machine(power=7500.0, voltage=220.0, current=27.0, frequency=60.0, speed=speed_rpm))
    assert base.poles == poles
    assert base.slip == pytest.approx(slip, abs=6e-6)


@example(FITZGERALD, "example 6.1", "419 W at 3502 r/min", checks=PLATE)
def test_the_rotor_loss_of_fitzgerald_6_1_follows_from_its_slip():
    base = read_base(machine(power=14000.0, voltage=440.0, current=22.6, frequency=60.0, speed=3502.0))
    assert base.slip * (15700.0 - 3.0 * 22.6**2 * 0.2) == pytest.approx(419.0, abs=0.5)


@example(
    "Fitzgerald 6.2, Chapman 7-2 and 7-3",
    "",
    "input 6050, 42 400, 12 530 W (Chapman from memory)",
    checks=["calc.induction_3ph.equivalent.circuit", "calc.induction_3ph.model.fit"],
)
@pytest.mark.parametrize(
    ("plate", "input_w"),
    [
        # Chapman 7-2, from memory: 42.4 kW in, 37.3 kW out at power factor 0.85.
        ((37300.0, 480.0, 60.0, 0.85, 87.97), 42400.0),
        # Chapman 7-3, from memory.
        ((10485.0, 460.0, 18.88, 0.833, 83.7), 12530.0),
        # Fitzgerald 6.2, looked up.
        ((5221.6, 220.0, 18.78, 0.8456, 86.3), 6050.0),
    ],
)
def test_the_input_of_the_books_follows_from_output_and_efficiency_and_meets_the_power_factor(plate, input_w):
    power, voltage, current, power_factor, efficiency = plate
    motor = machine(
        power=power, voltage=voltage, current=current, frequency=60.0, speed=1760.0,
        power_factor=power_factor, efficiency=efficiency,
    )  # fmt: skip
    twin = fit(motor)
    z = np.zeros((1, twin.dim))
    found = circuit(twin.base, z)
    assert (found.p_out + found.losses)[0] * twin.base.apparent_va == pytest.approx(input_w, rel=2e-3)
    assert abs(twin.plate_misfit(z)).max() < 0.3
    # The whole chain, loaded as rated: the loaded machine takes it from the line.
    read = predict(twin, twin.modes("none")[0], ["input_power@loaded"], load=1.0)["input_power@loaded"]
    assert read[0, 0] == pytest.approx(input_w, rel=0.02)
