import warnings

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc.induction_1ph import fit
from calc.induction_1ph.effects import DEFAULTS, VARIANTS
from calc.induction_1ph.readings import COVERED
from calc.induction_1ph.states import States, torque_asked
from calc.quantities import MEASURES
from calc.sheet import Reading
from calc.twin import Ask, attribute_rows
from tests.calc.induction_1ph.plates import ALL, BOTH, RUN, SPLIT, START, machine, one, value

ASKS = [Ask(measure, state) for measure, states in COVERED.items() for state in sorted(states)]


def drawn(twin, count, seed=0):
    rows = {name: np.full(count, number) for name, number in twin.defaults.items()}
    return np.random.default_rng(seed).standard_normal((count, twin.dim)), rows


@pytest.mark.parametrize("name", ALL)
@pytest.mark.parametrize("effect", VARIANTS)
def test_every_reading_is_finite_for_any_latents_under_any_effect(name, effect):
    twin = fit(machine(ALL[name]))
    modes = twin.modes(effect)
    z = np.random.default_rng(1).uniform(-5.0, 5.0, (len(modes), 40, twin.dim))
    rows = attribute_rows(modes, z, twin.defaults)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        found = twin.predict(z.reshape(-1, twin.dim), rows, ASKS)
        possible = twin.possible(z.reshape(-1, twin.dim), rows)
    assert all(np.isfinite(values).all() and values.shape == (len(modes) * 40, 1) for values in found)
    assert all(((chance >= 0.0) & (chance <= 1.0)).all() for chance in possible.values())


@settings(max_examples=25, deadline=None)
@given(st.sets(st.sampled_from(sorted({*BOTH, "power_factor", "efficiency"}))))
def test_any_subset_of_plate_fields_gives_a_motor(fields):
    plate = {**BOTH, "power_factor": 0.93, "efficiency": 0.72}
    twin = fit(machine({name: plate[name] for name in fields}))
    z, rows = drawn(twin, 30)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        found = twin.predict(z, rows, ASKS)
    assert all(np.isfinite(values).all() for values in found)
    assert twin.plate_misfit(z).shape[0] == 30


@pytest.mark.parametrize("name", ALL)
def test_rated_load_takes_rated_current_at_rated_speed(name):
    fields = ALL[name]
    twin = fit(machine(fields))
    best = float(np.argmax(twin.weights))
    amps, rpm = one(twin, ["line_current@loaded", "speed@loaded"], design=best, load_set=1.0)
    synchronous = twin.plate.synchronous_rpm
    assert amps == pytest.approx(fields["current"], rel=0.08)
    assert synchronous - rpm == pytest.approx(synchronous - fields["speed"], rel=0.25)


@pytest.mark.parametrize("name", ALL)
@pytest.mark.parametrize("state", ["loaded", "light_load", "no_load"])
def test_torque_meets_the_load_at_the_slip_found(name, state):
    twin = fit(machine(ALL[name]))
    z, rows = drawn(twin, 200)
    site = twin.site(z, rows)
    running = States(site, rows).solve(state).running
    wanted = torque_asked(site, rows, state)
    off = np.abs(running.currents.torque_w - wanted)[~running.stalled]
    assert len(off) > 190
    assert np.quantile(off / site.machine.power_w[~running.stalled], 0.95) < 0.01


SOFTEST = {
    "low_voltage": "volts_lost",
    "high_voltage": "volts_over",
    "start_capacitor_weak": "start_lost",
    "run_capacitor_weak": "run_lost",
    "main_turn_short": "turns_shorted",
    "friction": "friction",
}


@pytest.mark.parametrize(("effect", "attribute"), SOFTEST.items())
def test_a_fault_of_no_severity_is_no_fault(effect, attribute):
    twin = fit(machine(BOTH))
    (mode, *_) = twin.modes(effect)
    assert mode.severity[0].attribute == attribute
    asks = [f"{a.measure}@{a.state}" for a in ASKS]
    sound = one(twin, asks)
    faulty = one(twin, asks, **{attribute: 1e-9})
    np.testing.assert_allclose(faulty, sound, rtol=1e-5, atol=1e-5)


def test_weights_of_an_effect_are_the_chance_that_the_motor_has_the_part():
    twin = fit(machine(SPLIT))
    whole = sum(mode.weight for mode in twin.modes("none"))
    capacitor = sum(mode.weight for mode in twin.modes("start_capacitor_open"))
    assert 0.9 < whole <= 1.0 + 1e-9
    assert 0.0 < capacitor < 0.6


def test_a_part_that_the_motor_has_not_is_next_to_impossible():
    twin = fit(machine(RUN))
    likely = [m for m in twin.modes("none") if m.variant == "(capacitor run)"]
    assert likely
    split = fit(machine({**SPLIT, "power": 370, "current": 5.0}))
    assert sum(mode.weight for mode in split.modes("run_capacitor_open")) < 0.05


def test_an_unknown_effect_is_refused():
    with pytest.raises(KeyError):
        fit(machine(SPLIT)).modes("nothing_like_it")


def test_a_severity_range_replaces_the_usual_one():
    (mode, *_) = fit(machine(RUN)).modes("run_capacitor_weak", (0.3, 0.4))
    assert (mode.severity[0].low, mode.severity[0].high) == (0.3, 0.4)


def test_the_model_covers_only_readings_of_its_circuit():
    twin = fit(machine(BOTH))
    assert all(twin.covers(ask) for ask in ASKS)
    assert not twin.covers(Ask("vibration_velocity", "loaded"))
    assert not twin.covers(Ask("main_resistance", "loaded"))


def test_a_capacitor_is_asked_for_only_where_there_is_likely_one():
    twin = fit(machine(RUN))
    assert twin.covers(Ask("run_capacitance", "isolated"))
    assert twin.covers(Ask("capacitor_voltage", "starting"))
    assert not twin.covers(Ask("start_capacitance", "isolated"))
    assert not fit(machine(START)).covers(Ask("capacitor_voltage", "loaded"))


def test_a_capacitor_that_was_read_is_weighed_though_the_plate_is_silent():
    read = Reading(measure="start_capacitance", state="isolated", values=(value(250e-6, "F"),))
    assert fit(machine(RUN), readings=(read,)).covers(Ask("start_capacitance", "isolated"))


@pytest.mark.parametrize("measure", COVERED)
def test_every_covered_measure_has_a_transform_and_an_error(measure):
    twin = fit(machine(RUN))
    assert measure in MEASURES
    assert twin.transform(measure).kind in {"log", "linear"}
    assert all(twin.model_error(Ask(measure, state)).level > 0.0 for state in COVERED[measure])


def test_defaults_name_every_attribute_that_an_effect_sets():
    for variants in VARIANTS.values():
        for variant in variants:
            named = set(variant.fixed) | {severity.attribute for severity in variant.severity}
            assert named <= set(DEFAULTS)


def test_a_motor_with_a_start_capacitor_has_a_dead_auxiliary_winding_when_running():
    twin = fit(machine(START))
    running, starting = one(twin, ["auxiliary_current@loaded", "auxiliary_current@starting"])
    assert running < 1e-5 < 1.0 < starting
