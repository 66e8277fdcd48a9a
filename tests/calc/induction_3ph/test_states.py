"""What must hold of the solved states: power closes, symmetry stays, phases are but names."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc.induction_3ph import fit
from calc.induction_3ph.equivalent import circuit
from calc.induction_3ph.plate import INDEX
from calc.induction_3ph.states import Supply, solve
from tests.calc.induction_3ph.plates import ALL, PUMP, machine, predict
from tests.published.circuits import MACHINES, run

EASY = settings(max_examples=40, deadline=None)
VALUES = (
    "line_current@loaded", "line_current@no_load", "line_current@stalled", "supply_voltage@loaded",
    "supply_voltage@stalled", "winding_resistance@isolated", "phase_resistance@isolated",
    "speed@loaded", "input_power@loaded",
)  # fmt: skip
each_plate = pytest.mark.parametrize("fields", ALL.values(), ids=ALL)
loads = st.floats(0.02, 1.3)
seeds = st.integers(0, 2**32 - 1)


def latents(twin, count=4, seed=0, **fixed):
    z = np.random.default_rng(seed).standard_normal((count, twin.dim))
    for name, number in fixed.items():
        z[:, INDEX[name]] = number
    return z


def even(twin, count=4, seed=0, **fixed):
    """Latents on a supply without any unbalance."""
    return latents(twin, count, seed, unbalance_a=0.0, unbalance_b=0.0, **fixed)


# Power.


@EASY
@given(st.sampled_from(MACHINES), loads)
def test_input_less_stator_copper_crosses_the_gap_and_nothing_is_lost_on_the_way(motor, load):
    demand = load * motor.gap_w(motor.slip)
    found = run(motor, gap_w=demand)
    assert found.stalls or found.gap_w == pytest.approx(demand, rel=1e-4)


@EASY
@given(st.sampled_from(MACHINES), st.floats(0.0, 0.05), loads)
def test_unbalance_costs_power_and_never_makes_any(motor, negative, load):
    demand = load * motor.gap_w(motor.slip)
    found = run(motor, gap_w=demand, negative=negative)
    assert found.stalls or found.gap_w >= demand * (1.0 - 1e-4)


@EASY
@given(st.sampled_from(MACHINES), st.floats(0.01, 1.0), st.floats(0.05, 0.6))
def test_a_bad_joint_in_a_line_takes_its_own_share_of_the_power(motor, ohm_pu, load):
    demand = load * motor.gap_w(motor.slip)
    found = run(motor, gap_w=demand, line_r=ohm_pu)
    joint_w = found.current_a[0] ** 2 * ohm_pu * motor.base_ohm
    assert found.stalls or found.gap_w - joint_w >= demand * (1.0 - 2e-3)


@each_plate
@pytest.mark.parametrize("share", [0.1, 0.5, 1.0])
def test_input_is_output_and_all_losses_on_a_stiff_supply(fields, share):
    twin = fit(machine(**fields))
    found = circuit(twin.base, 0.7 * latents(twin, 200))
    rows = {name: np.full(200, number) for name, number in twin.defaults.items()}
    rows["earth_pu"] = rows["earth_ohm"]
    one, none = np.ones(200), np.zeros(200)
    gap = (share * found.p_out + found.p_friction + share**2 * found.p_stray) / (1.0 - found.slip)
    feed = Supply(positive=one, negative=none.astype(complex), frequency=one, regulation=none)
    state = solve(found, rows, feed, gap, standing=False, r1=found.r1)
    rotor = state.slip * gap
    shaft = gap - rotor - found.p_friction - share**2 * found.p_stray
    # The core's loss goes with the square of the flux, which a load lowers a little.
    core = found.gc * found.flux**2
    lost = state.copper + core + rotor + found.p_friction + share**2 * found.p_stray
    open_ = (state.power - shaft - lost) / found.losses
    assert np.abs(open_).max() < 0.12
    assert np.abs(np.median(open_)) < 0.03


@pytest.mark.parametrize("fields", [f for f in ALL.values() if f], ids=[n for n, f in ALL.items() if f])
def test_input_is_never_less_than_output(fields):
    twin = fit(machine(**fields))
    z = latents(twin, 300)
    healthy = twin.modes("none")[0]
    got = predict(twin, healthy, ["input_power@loaded", "speed@loaded"], z, load=1.0)
    share = got["speed@loaded"][:, 0] / twin.base.synchronous_rpm
    assert (got["input_power@loaded"][:, 0] > 0.9 * twin.base.power_w * share).all()


# Symmetry.


@EASY
@given(st.sampled_from(list(ALL.values())), seeds)
def test_an_even_supply_on_a_sound_motor_reads_the_same_in_all_three(fields, seed):
    twin = fit(machine(**fields))
    for key, found in predict(twin, twin.modes("none")[0], VALUES, even(twin, seed=seed)).items():
        assert found == pytest.approx(np.repeat(found[:, :1], found.shape[1], axis=1), rel=1e-9), key


def renamed(mode, steps):
    """The same fault one phase further, and one line further."""
    moved = {name: (mode.fixed.get(name, 0.0) + steps) % 3 for name in ("line", "phase")}
    return replace(mode, fixed={**mode.fixed, **moved})


def turned(z, steps):
    """The same unbalance of the supply, its phases renamed."""
    z = z.copy()
    place = [INDEX["unbalance_a"], INDEX["unbalance_b"]]
    phasor = (z[:, place[0]] + 1j * z[:, place[1]]) * np.exp(2j * np.pi / 3.0 * steps)
    z[:, place[0]], z[:, place[1]] = phasor.real, phasor.imag
    return z


def assert_renamed(twin, mode, z, other, z_other, steps, keys=VALUES):
    before, after = predict(twin, mode, keys, z), predict(twin, other, keys, z_other)
    for key, found in before.items():
        shifted = np.roll(found, steps, axis=1) if found.shape[1] == 3 else found
        scale = 1e-12 + np.abs(found).max()
        assert after[key] == pytest.approx(shifted, rel=1e-5, abs=1e-6 * scale), (mode, key)


EFFECTS = fit(machine(**PUMP, starter="star_delta")).effects


@pytest.mark.parametrize("effect", EFFECTS)
@pytest.mark.parametrize("connection", ["star", "delta"])
def test_renaming_the_phases_of_a_fault_renames_every_reading(effect, connection):
    twin = fit(machine(**{**PUMP, "connection": connection}, starter="star_delta"))
    for mode in twin.modes(effect):
        for steps in (1, 2):
            z = even(twin, seed=steps)
            assert_renamed(twin, mode, z, renamed(mode, steps), z, steps)


@pytest.mark.parametrize("fields", ALL.values(), ids=ALL)
def test_renaming_the_phases_of_an_uneven_supply_renames_every_reading(fields):
    twin = fit(machine(**fields))
    z = latents(twin, 20)
    for effect in ("none", "voltage_unbalance", "broken_bars", "low_voltage"):
        mode = twin.modes(effect)[0]
        assert_renamed(twin, mode, z, mode, turned(z, 1), 1)


@pytest.mark.parametrize("effect", ["open_line", "series_resistance", "open_phase"])
def test_renaming_the_phases_of_a_fault_on_an_uneven_supply_renames_standstill_and_no_load(effect):
    twin = fit(machine(**PUMP))
    z = latents(twin, 20)
    for mode in twin.modes(effect):
        keys = ("line_current@stalled", "supply_voltage@stalled", "winding_resistance@isolated")
        assert_renamed(twin, mode, z, renamed(mode, 1), turned(z, 1), 1, keys)


@pytest.mark.parametrize("effect", ["open_line", "series_resistance", "open_phase"])
def test_renaming_the_phases_of_a_fault_on_an_uneven_supply_renames_the_loaded_motor(effect):
    twin = fit(machine(**PUMP))
    z = latents(twin, 20)
    mode = twin.modes(effect)[0]
    assert_renamed(twin, mode, z, renamed(mode, 1), turned(z, 1), 1, ("line_current@loaded", "speed@loaded"))


# Order of things.


@EASY
@given(st.sampled_from(MACHINES), st.floats(0.05, 0.9), st.floats(0.02, 0.2))
def test_more_load_takes_more_slip_current_and_power(motor, load, more):
    light, heavy = (run(motor, gap_w=x * motor.gap_w(motor.slip)) for x in (load, load + more))
    assert heavy.slip > light.slip
    assert heavy.current_a[0] > light.current_a[0]
    assert heavy.input_w > light.input_w


@EASY
@given(st.sampled_from(list(ALL.values())), seeds)
def test_without_load_a_motor_takes_less_and_turns_faster(fields, seed):
    twin = fit(machine(**fields))
    keys = [
        "line_current@loaded",
        "line_current@no_load",
        "speed@loaded",
        "speed@no_load",
        "line_current@stalled",
    ]
    got = predict(twin, twin.modes("none")[0], keys, even(twin, 20, seed))
    assert (got["line_current@no_load"] < got["line_current@loaded"] * 1.0001).all()
    assert (got["line_current@loaded"] < got["line_current@stalled"]).all()
    assert (got["speed@no_load"] > got["speed@loaded"]).all()
    assert (got["speed@no_load"] < 1.01 * twin.base.synchronous_rpm).all()


@pytest.mark.parametrize("line", [0, 1, 2])
def test_an_open_line_carries_nothing_in_any_state(line):
    twin = fit(machine(**PUMP))
    for mode in twin.modes("open_line"):
        if mode.fixed["line"] != line or mode.fixed.get("upstream", 0.0):
            continue
        for key, found in predict(twin, mode, VALUES[:3], latents(twin, 10)).items():
            assert (found[:, line] < 0.01 * found.max(axis=1)).all(), key


def test_an_open_line_behind_the_ohm_meter_leaves_the_windings_reading_even():
    twin = fit(machine(**PUMP))
    for mode in twin.modes("open_line"):
        if mode.fixed["line_place"] < 1.5:
            read = predict(twin, mode, ["winding_resistance@isolated"])["winding_resistance@isolated"]
            assert read == pytest.approx(np.full((1, 3), read[0, 0]))


def test_a_line_open_in_its_cable_reads_open_at_the_starter_and_single_phased_at_the_motor():
    twin = fit(machine(**PUMP))
    sound = predict(twin, twin.modes("none")[0], VALUES)["winding_resistance@isolated"][0, 0]
    in_cable = [m for m in twin.modes("open_line") if m.fixed["line_place"] > 2.5]
    assert {m.fixed["line"] for m in in_cable} == {0.0, 1.0, 2.0}
    for mode in in_cable:
        read = predict(twin, mode, ["winding_resistance@isolated", "supply_voltage@loaded"])
        line = int(mode.fixed["line"])
        ohms = read["winding_resistance@isolated"][0]
        through = [line, (line + 2) % 3]  # U-V and W-U share L1, and so on
        assert (ohms[through] > 1e3 * sound).all()
        assert np.delete(ohms, through) == pytest.approx([sound])
        volts = read["supply_voltage@loaded"][0]
        assert volts[through].max() < 0.995 * np.delete(volts, through)[0]


@pytest.mark.parametrize("connection", ["star", "delta"])
def test_an_open_phase_reads_open_in_its_own_coil_and_as_its_linkage_between_terminals(connection):
    twin = fit(machine(**{**PUMP, "connection": connection}))
    sound = predict(twin, twin.modes("none")[0], VALUES)
    for place, mode in enumerate(m for m in twin.modes("open_phase") if not m.fixed.get("stall")):
        read = predict(twin, mode, VALUES)
        coils = read["phase_resistance@isolated"][0]
        assert coils[place] > 1e6
        assert np.delete(coils, place) == pytest.approx(
            np.delete(sound["phase_resistance@isolated"][0], place)
        )
        ratio = read["winding_resistance@isolated"][0] / sound["winding_resistance@isolated"][0]
        if connection == "delta":
            assert sorted(ratio) == pytest.approx([1.5, 1.5, 3.0], rel=1e-3)
            assert ratio[place] == max(ratio)
        else:
            assert sorted(ratio)[0] == pytest.approx(1.0)
            assert sorted(ratio)[1] > 1e5


def test_windings_read_more_when_warm_by_the_law_of_copper():
    # IEC 60034-2-1: 235 degC below zero; from memory.
    from calc.twin import Ask  # noqa: PLC0415

    twin = fit(machine(**PUMP))
    z = np.zeros((1, twin.dim))
    rows = {name: np.full(1, number) for name, number in twin.defaults.items()}
    asks = [Ask("winding_resistance", "isolated", temperature_c=t) for t in (20.0, 75.0)]
    cold, warm = twin.predict(z, rows, asks)
    assert warm / cold == pytest.approx(np.full((1, 3), 1.2157), rel=1e-4)
