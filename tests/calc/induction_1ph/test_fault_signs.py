"""What each fault does to the readings: common practice unless a source is named."""

import numpy as np
import pytest

from calc.induction_1ph import fit
from tests.calc.induction_1ph.plates import BOTH, RUN, SPLIT, START, machine, one


@pytest.fixture(scope="module")
def capacitor_run():
    return fit(machine(RUN))


@pytest.fixture(scope="module")
def both():
    return fit(machine(BOTH))


@pytest.fixture(scope="module")
def capacitor_start():
    return fit(machine(START))


def test_a_weak_run_capacitor_lowers_the_auxiliary_current_in_step(capacitor_run):
    """Auxiliary current falls with the capacitance, main rises, line barely moves (Guru 10.3, recomputed)."""
    asks = ["auxiliary_current@loaded", "main_current@loaded", "line_current@loaded", "speed@loaded"]
    auxiliary, main, line, speed = one(capacitor_run, asks)
    weak_auxiliary, weak_main, weak_line, weak_speed = one(capacitor_run, asks, run_lost=0.5)
    assert 0.35 < weak_auxiliary / auxiliary < 0.6
    assert weak_main > 1.15 * main
    assert 0.8 < weak_line / line < 1.4
    assert weak_speed < speed


def test_capacitor_voltage_is_well_above_line_voltage_on_a_sound_run_capacitor(capacitor_run):
    """1.3 to 2 times the line (textbook machines, recomputed)."""
    volt, supply = one(capacitor_run, ["capacitor_voltage@no_load", "supply_voltage@no_load"])
    assert 1.3 < volt / supply < 2.1


@pytest.mark.parametrize("flag", ["start_open", "switch_open", "auxiliary_open"])
def test_a_dead_start_circuit_leaves_only_the_main_winding(capacitor_start, flag):
    asks = ["main_current@stalled", "auxiliary_current@stalled", "line_current@stalled"]
    main, auxiliary, line = one(capacitor_start, asks, **{flag: 1.0})
    assert auxiliary < 1e-3
    assert line == pytest.approx(main, rel=1e-6)
    assert 3.0 * START["current"] < main < 9.0 * START["current"]


@pytest.mark.parametrize(
    ("flag", "measure"), [("main_open", "main_resistance"), ("auxiliary_open", "auxiliary_resistance")]
)
def test_an_open_winding_reads_open(capacitor_run, flag, measure):
    assert one(capacitor_run, [f"{measure}@isolated"], **{flag: 1.0})[0] >= 1e9


@pytest.mark.parametrize("flag", ["run_open", "run_shorted"])
def test_a_failed_run_capacitor_measures_nothing(capacitor_run, flag):
    assert one(capacitor_run, ["run_capacitance@isolated"], **{flag: 1.0})[0] == 0.0


def test_a_shorted_run_capacitor_has_no_volts_and_a_high_auxiliary_current(capacitor_run):
    asks = ["capacitor_voltage@stalled", "auxiliary_current@stalled"]
    _, sound = one(capacitor_run, asks)
    volt, amps = one(capacitor_run, asks, run_shorted=1.0)
    assert volt == 0.0
    assert amps > 3.0 * sound


def test_a_shorted_start_capacitor_leaves_running_as_it_was(both):
    asks = ["line_current@loaded", "capacitor_voltage@loaded"]
    np.testing.assert_allclose(one(both, asks, start_shorted=1.0), one(both, asks), rtol=1e-6)


def test_a_stuck_start_switch_draws_far_too_much_in_running(capacitor_start):
    sound, stuck = (
        one(capacitor_start, ["line_current@loaded"], switch_closed=closed)[0] for closed in (0.0, 1.0)
    )
    assert stuck > 1.5 * sound


def test_shorted_turns_lower_the_resistance_and_raise_power_at_no_load():
    twin = fit(machine(SPLIT))
    asks = ["main_resistance@isolated", "input_power@no_load", "line_current@no_load"]
    sound = one(twin, asks)
    shorted = one(twin, asks, turns_shorted=0.05)
    assert shorted[0] / sound[0] == pytest.approx(0.95)
    assert shorted[1] > 1.5 * sound[1]
    assert shorted[2] > 1.1 * sound[2]


def test_overload_slows_and_a_much_too_large_one_stalls(capacitor_run):
    at_rated, over, stalled = (
        one(capacitor_run, ["speed@loaded"], load_set=load)[0] for load in (1.0, 1.4, 8.0)
    )
    assert at_rated > over > 1000.0
    assert stalled == 0.0


def test_drag_in_the_load_is_gone_when_uncoupled(capacitor_run):
    asks = ["input_power@loaded", "input_power@no_load"]
    sound = one(capacitor_run, asks)
    in_load = one(capacitor_run, asks, friction=0.4, load_drags=1.0)
    in_motor = one(capacitor_run, asks, friction=0.4)
    assert in_load[0] == pytest.approx(in_motor[0]) and in_load[0] > 1.2 * sound[0]
    assert in_load[1] == pytest.approx(sound[1])
    assert in_motor[1] > 1.2 * sound[1]


def test_no_supply_reads_nothing_anywhere(capacitor_run):
    asks = ["supply_voltage@standby", "supply_voltage@starting", "line_current@starting", "speed@loaded"]
    assert one(capacitor_run, asks, live=0.0) == [0.0, 0.0, 0.0, 0.0]


def test_starting_current_pulls_the_supply_down(both):
    idle, starting = one(both, ["supply_voltage@standby", "supply_voltage@starting"])
    assert 0.85 < starting / idle < 0.97


def test_lost_cooling_heats_the_frame_and_changes_little_else(capacitor_run):
    asks = ["frame_temperature@loaded", "line_current@loaded"]
    sound, hot = one(capacitor_run, asks), one(capacitor_run, asks, rise=2.0)
    assert hot[0] > sound[0] + 12.0
    assert hot[1] == pytest.approx(sound[1], rel=0.08)


def test_a_path_to_earth_adds_to_the_line_but_not_to_the_main_winding(capacitor_start):
    asks = ["line_current@no_load", "main_current@no_load"]
    sound, leaking = one(capacitor_start, asks), one(capacitor_start, asks, earth_ohm=50.0)
    assert leaking[0] > sound[0] + 0.3
    assert leaking[1] == pytest.approx(sound[1], rel=0.01)


@pytest.mark.parametrize(
    ("effect", "state", "chance"),
    [
        ("none", "stalled", 0.0),
        ("none", "loaded", 1.0),
        ("stall", "loaded", 0.0),
        ("no_supply", "no_load", 0.0),
        ("stall", "stalled", 1.0),
    ],
)
def test_states_that_a_motor_can_be_found_in(capacitor_run, effect, state, chance):
    mode = capacitor_run.modes(effect)[0]
    rows = {name: np.array([mode.fixed.get(name, v)]) for name, v in capacitor_run.defaults.items()}
    assert capacitor_run.possible(np.zeros((1, capacitor_run.dim)), rows)[state][0] == chance
