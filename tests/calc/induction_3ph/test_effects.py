"""Effects of the three-phase model: they grow from nothing, and whatever they meet stays a number."""

import warnings
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc.induction_3ph import fit
from calc.induction_3ph.effects import DEFAULTS, EFFECTS
from calc.induction_3ph.plate import INDEX
from calc.quantities import arity
from calc.twin import Severity, attribute_rows
from tests.calc.induction_3ph.plates import ALL, LIFT, PUMP, asks_of, machine, predict

ASKS = (
    "line_current@loaded", "line_current@no_load", "line_current@stalled", "supply_voltage@loaded",
    "speed@loaded", "speed@no_load", "input_power@loaded", "winding_resistance@isolated",
    "phase_resistance@isolated", "frame_temperature@loaded", "bearing_temperature@loaded",
    "sideband_level@loaded", "starting_time@starting",
)  # fmt: skip

# Where each effect that has a severity vanishes; the second attribute of an effect follows its first.
VANISHES = {
    "low_voltage": {"level": -1e-9},
    "high_voltage": {"level": 1e-9},
    "voltage_unbalance": {"unbalance_sd": DEFAULTS["unbalance_sd"]},
    "series_resistance": {"line_r": 1e-9, "phase_r": 1e-9},
    "off_frequency": {"frequency_change": 1e-9},
    "turn_short": {"turns": 1e-9, "loop": 1.0},
    "phase_short": {"path_r": 1e9},
    "earth_path": {"earth_ohm": 1e12},
    "broken_bars": {"bars": 1e-9},
    "hot": {"hot": 1.0},
    "friction": {"friction": 1e-9, "bearing_k": 1e-9},
}
# These set the load itself and have no healthy end; the model solves them at any load.
SETS_THE_LOAD = {"excess_load", "light_load"}


def starter_twin(fields):
    return fit(machine(**fields, starter="star_delta"))


def at(mode, ends):
    steps = tuple(Severity(s.attribute, ends[s.attribute], ends[s.attribute]) for s in mode.severity)
    return replace(mode, severity=steps)


def test_every_effect_with_a_severity_has_an_end_where_it_vanishes():
    twin = starter_twin(PUMP)
    graded = {effect for effect in EFFECTS if any(m.severity for m in twin.modes(effect))}
    assert graded == set(VANISHES) | SETS_THE_LOAD


@pytest.mark.parametrize("fields", ALL.values(), ids=ALL)
@pytest.mark.parametrize("effect", VANISHES)
def test_an_effect_that_vanishes_leaves_the_sound_motor(effect, fields):
    twin = fit(machine(**fields))
    z = np.random.default_rng(3).standard_normal((12, twin.dim))
    z[:, INDEX["level"]] = 0.0  # some effects widen the scatter of the supply as well
    for mode in twin.modes(effect):
        if mode.fixed.get("stall"):
            continue
        linked = {"delta": mode.fixed.get("delta", 0.0)}
        sound = predict(twin, replace(twin.modes("none")[0], fixed=linked), ASKS, z)
        for key, found in predict(twin, at(mode, VANISHES[effect]), ASKS, z).items():
            assert found == pytest.approx(sound[key], rel=1e-3), (mode, key)


@pytest.mark.parametrize("effect", [e for e in VANISHES if e not in {"voltage_unbalance"}])
def test_an_effect_at_its_worst_shows_in_some_reading(effect):
    twin = fit(machine(**PUMP))
    z = np.zeros((1, twin.dim))
    for mode in twin.modes(effect):
        worst = {s.attribute: max((s.low, s.high), key=abs) for s in mode.severity}
        for name in ("path_r", "earth_ohm"):
            if name in worst:
                worst[name] = min(s.low for s in mode.severity if s.attribute == name)
        sound, found = predict(twin, twin.modes("none")[0], ASKS, z), predict(twin, at(mode, worst), ASKS, z)
        moved = max(np.abs(found[k] / sound[k] - 1.0).max() for k in ASKS)
        assert moved > 0.02, mode


@pytest.mark.parametrize("fields", [*ALL.values(), {**PUMP, "connection": "star"}], ids=[*ALL, "star pump"])
def test_the_ways_of_an_effect_share_all_of_its_weight(fields):
    twin = starter_twin(fields)
    for effect in EFFECTS:
        modes = twin.modes(effect)
        assert sum(m.weight for m in modes) == pytest.approx(1.0, abs=1e-9), effect
        assert len({(m.variant, tuple(sorted(m.fixed.items()))) for m in modes}) == len(modes), effect
        for mode in modes:
            assert set(mode.fixed) | {s.attribute for s in mode.severity} <= set(DEFAULTS), mode


def test_an_unknown_effect_is_an_error():
    with pytest.raises(KeyError):
        fit(machine(**PUMP)).modes("gremlins")


def test_only_a_star_delta_starter_can_stay_in_star():
    assert not fit(machine(**PUMP)).modes("stuck_in_star")
    assert starter_twin(PUMP).modes("stuck_in_star")


def test_a_service_factor_moves_the_threshold_of_an_overload():
    plain, lift = fit(machine(**PUMP)), fit(machine(**LIFT))
    low = {t.base.service_factor: t.modes("excess_load")[0].severity[0].low for t in (plain, lift)}
    assert low[1.15] == pytest.approx(1.15 * low[1.0])


@pytest.mark.parametrize("source", ["mains", "inverter"])
@pytest.mark.parametrize("fields", ALL.values(), ids=ALL)
def test_every_reading_of_every_way_of_every_effect_is_a_number_five_sigma_out(fields, source):
    twin = fit(machine(**fields, source=source, starter="star_delta"))
    asks = asks_of(twin)
    z = np.random.default_rng(11).uniform(-5.0, 5.0, (30, twin.dim))
    z[:10] = 5.0 * np.sign(z[:10])
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for effect in EFFECTS:
            for mode in twin.modes(effect):
                found = predict(twin, mode, asks, z)
                for ask in asks:
                    worth = found[ask.key]
                    assert worth.shape == (len(z), arity(ask.measure, twin.kind)), (mode, ask)
                    assert np.isfinite(worth).all(), (mode, ask)
                    if not ask.measure.endswith(("temperature", "level")):
                        assert (worth >= 0.0).all(), (mode, ask)
                states = twin.possible(z, attribute_rows([mode], z[None], twin.defaults))
                assert all(set(np.unique(flags)) <= {0.0, 1.0} for flags in states.values()), mode


plates = st.fixed_dictionaries(
    {},
    optional={
        "power": st.floats(30.0, 3e6),
        "voltage": st.floats(24.0, 11e3),
        "current": st.floats(0.05, 3000.0),
        "frequency": st.sampled_from([16.7, 50.0, 60.0, 400.0]),
        "speed": st.floats(50.0, 24e3),
        "power_factor": st.floats(0.05, 1.0),
        "efficiency": st.floats(5.0, 99.9),
        "locked_rotor_current_ratio": st.floats(1.0, 15.0),
        "poles": st.sampled_from([2, 4, 12]),
        "connection": st.sampled_from(["star", "delta"]),
    },
)
latents = st.lists(st.floats(-5.0, 5.0), min_size=len(INDEX), max_size=len(INDEX))


@settings(max_examples=120, deadline=None)
@given(plates, st.sampled_from(EFFECTS), st.integers(0, 20), latents, st.sampled_from([None, "inverter"]))
def test_any_plate_with_any_effect_predicts_numbers_without_a_warning(fields, effect, place, z, source):
    twin = fit(machine(**fields, source=source, starter="star_delta"))
    modes = twin.modes(effect)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        found = predict(twin, modes[place % len(modes)], asks_of(twin), np.array([z]))
    assert all(np.isfinite(worth).all() for worth in found.values())
