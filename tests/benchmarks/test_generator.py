"""The invented plant: its circuit against laws and textbook ratios, and what it writes."""

import numpy as np
import pytest

from benchmarks.cases import make_case, make_cases
from benchmarks.generator.circuit import (
    MOTOR,
    OPEN_OHM,
    TURN,
    Feeder,
    Winding,
    balanced,
    joined_as_rated,
    solve,
    terminal_ohms,
)
from benchmarks.generator.noticing import habits
from benchmarks.graded import load_cases, save_case
from calc.sheet_io import read_sheet

MACHINE = Winding(
    voltage_v=400,
    current_a=9.0,
    frequency_hz=50,
    poles=4,
    stator_ohm=2.0,
    stator_leakage_ohm=4.0,
    magnetising_ohm=120,
    iron_ohm=2500,
    rotor_leakage_ohm=2.0,
    outer_ohm=6.0,
    inner_ohm=2.5,
    inner_leakage_ohm=3.0,
)
SLIPS = np.array([1.0, 0.3, 0.03, 0.001])


def flows(feeder=None, **wound):
    return solve(MACHINE, feeder or balanced(400, 50), joined_as_rated(MACHINE, **wound), SLIPS)


def test_power_in_is_copper_air_gap_and_iron():
    feeder = Feeder(230.9 * np.array([1, 0.9 * TURN**2, TURN]), 50, 0.1 + 0.1j, 0.05)
    flow = flows(feeder)
    copper = np.sum(np.abs(flow.coil_a) ** 2, axis=1) * MACHINE.stator_ohm / 2
    left = flow.power_w(MOTOR) - copper - flow.forward_w - flow.backward_w
    assert left == pytest.approx(3 * flow.gap_v**2 / MACHINE.iron_ohm, rel=0.12)
    assert np.all(left > 0)


def test_balanced_in_is_balanced_out():
    line = np.abs(flows().line_a)
    assert line == pytest.approx(np.repeat(line[:, :1], 3, axis=1), rel=1e-6)


def test_exchanging_two_lines_turns_the_field_round():
    feeder = balanced(400, 50)
    turned = Feeder(feeder.emf_v[[0, 2, 1]], 50, feeder.source_ohm, feeder.cable_ohm)
    flow = flows(turned)
    assert flow.backward_w[0] > 0.9 * flows().forward_w[0]


def test_a_standing_single_phased_motor_draws_866_of_its_locked_current_and_makes_no_torque():
    # star or delta alike: line voltage across two line impedances in series (trade knowledge, from memory)
    sound = np.abs(flows().line_a[0])
    single = flows(Feeder(*_like(after=(0.0, 0.0, OPEN_OHM))))
    assert np.abs(single.line_a[0, :2]) == pytest.approx(0.866 * sound[:2], rel=0.04)
    torque, starting = (abs(flow.torque_nm(MACHINE, 50)[0]) for flow in (single, flows()))
    assert torque < 0.01 * starting


def _like(after):
    feeder = balanced(400, 50)
    return feeder.emf_v, 50, feeder.source_ohm, feeder.cable_ohm, (0.0, 0.0, 0.0), after


def test_star_in_place_of_delta_takes_a_third_of_the_current():
    delta, star = np.abs(flows().line_a[0, 0]), np.abs(flows(is_delta=False).line_a[0, 0])
    assert star / delta == pytest.approx(1 / 3, rel=0.08)  # less leakage saturation makes it a little less


def test_terminal_ohms_of_star_and_delta_and_of_an_open_phase():
    feeder = balanced(400, 50)
    ohms = {
        name: terminal_ohms(MACHINE, joined_as_rated(MACHINE, **more), feeder, cold=0.5)
        for name, more in {
            "delta": {},
            "star": {"is_delta": False},
            "open": {"extra_ohm": (OPEN_OHM, 0.0, 0.0)},
        }.items()
    }
    assert ohms["delta"] == pytest.approx([2 / 3] * 3, rel=1e-4)
    assert ohms["star"] == pytest.approx([2.0] * 3, rel=1e-4)
    assert ohms["open"] == pytest.approx([2.0, 1.0, 1.0], rel=1e-4)


def test_the_same_seed_makes_the_same_cases():
    assert list(make_cases(4, seed=3)) == list(make_cases(4, seed=3))


@pytest.mark.parametrize("fault", sorted(habits()["faults"]))
def test_every_fault_makes_a_case_that_reads_back(fault, tmp_path):
    case = make_case("0001", np.random.default_rng([9, 9]), fault)
    save_case(case, tmp_path)
    assert load_cases([tmp_path]) == [case]
    assert read_sheet(tmp_path / "0001.yaml").machine.kind == "induction_3ph"
    assert {r["state"] for r in case.truth["readings"].values()}.isdisjoint(case.truth["infeasible_states"])
