from __future__ import annotations

import warnings

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from calc.dc import KINDS, fit
from calc.dc.circuit import Armature, operate
from calc.dc.latents import rows
from calc.dc.readings import TABLE
from calc.dc.states import Bench
from calc.twin import Ask, attribute_rows
from tests.calc.dc.builders import PLATE, machine, rows_of

EVERY_ASK = [Ask(measure, state) for measure, (states, _) in TABLE.items() for state in sorted(states)]
GROWING = [
    "low_voltage",
    "high_voltage",
    "weak_magnets",
    "weak_field",
    "shorted_coil",
    "brush_resistance",
    "off_neutral",
    "friction",
    "excess_load",
]
SLOW = settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])


def covered(twin):
    return [ask for ask in EVERY_ASK if twin.covers(ask)]


@pytest.mark.parametrize("kind", KINDS)
@SLOW
@given(data=st.data())
def test_every_reading_of_every_fault_is_finite_however_far_the_latents_go(kind, data):
    fields = data.draw(st.sets(st.sampled_from(sorted(PLATE))))
    source = data.draw(st.sampled_from([None, "dc_bus", "rectifier_1ph", "rectifier_3ph", "mains"]))
    twin = fit(machine(kind, {k: PLATE[k] for k in fields}, source))
    modes = [m for effect in twin.effects for m in twin.modes(effect)]
    z = data.draw(arrays(np.float64, (len(modes), 2, twin.dim), elements=st.floats(-5.0, 5.0)))
    attributes = attribute_rows(modes, z, twin.defaults)
    flat = z.reshape(-1, twin.dim)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        answers = twin.predict(flat, attributes, covered(twin))
        possible = twin.possible(flat, attributes)
    assert all(a.shape == (len(flat), 1) and np.isfinite(a).all() for a in answers)
    assert all(np.isin(flags, [0.0, 1.0]).all() for flags in possible.values())
    assert twin.plate_misfit(flat).shape == (len(flat), 0)


@pytest.mark.parametrize("kind", KINDS)
def test_every_row_of_latents_is_a_machine_that_fits_its_plate(kind):
    """At rated load the model gives the plate's output, and about its amperes."""
    twin = fit(machine(kind))
    z = np.random.default_rng(5).standard_normal((400, twin.dim))
    made = rows(twin.plate, z)
    shaft = (1.0 - made.rotating) * made.emf * made.volt * made.ampere
    np.testing.assert_allclose(shaft, 7500.0, rtol=1e-9)
    taken = made.ampere + (1.2 if kind in {"dc_shunt", "dc_compound"} else 0.0)
    assert np.quantile(np.abs(taken / 37.0 - 1.0), 0.9) < 0.06


@pytest.mark.parametrize("kind", [k for k in KINDS if k != "dc_series"])
def test_motor_and_generator_agree_where_no_torque_is_made(kind):
    """Volts less brush drop that turn the machine without torque are the volts it gives when spun so fast."""
    twin = fit(machine(kind))
    z = np.random.default_rng(6).standard_normal((200, twin.dim))
    made = rows(twin.plate, z)
    bench = Bench(twin.plate, made, rows_of(twin, 200))
    magnet = bench.magnet(made.field_ampere)
    armature = Armature(made.level, bench.resistance(0.5), made.brush, made.emf)
    none = np.full(200, 1e-4)
    point = operate(armature, magnet, none, 0.0 * none, 0.0 * none)
    generated = made.emf * magnet.flux(np.zeros(200)) * point.speed
    np.testing.assert_allclose(generated, made.level - made.brush, rtol=2e-3)


@pytest.mark.parametrize("kind", KINDS)
def test_a_running_machine_keeps_its_power_balance(kind):
    twin = fit(machine(kind))
    z = np.random.default_rng(7).standard_normal((300, twin.dim))
    made = rows(twin.plate, z)
    bench = Bench(twin.plate, made, rows_of(twin, 300))
    now = bench.state("loaded")
    runs = now.runs > 0.5
    assert runs.mean() > 0.95
    torque = made.load * (1.0 - made.rotating) + made.rotating * (0.4 + 0.6 * now.speed)
    rise = 0.25 + 0.5 * np.minimum(made.load, 1.5)
    lost = now.current**2 * bench.resistance(rise) + made.brush * now.current
    np.testing.assert_allclose(
        (now.volts * now.current)[runs], (lost + made.emf * torque * now.speed)[runs], rtol=5e-3
    )


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("effect", GROWING)
def test_a_vanishing_fault_leaves_a_healthy_machine(kind, effect):
    twin = fit(machine(kind))
    mode = twin.modes(effect, (1e-8, 1.1e-8) if effect != "excess_load" else (0.7, 0.70001))[0]
    z = np.zeros((1, 1, twin.dim))
    asks = covered(twin)
    healthy = rows_of(twin, 1) | ({"torque": np.array([0.7])} if effect == "excess_load" else {})
    ill = twin.predict(z[0], attribute_rows([mode], z, twin.defaults), asks)
    well = twin.predict(z[0], healthy, asks)
    for ask, a, b in zip(asks, ill, well, strict=True):
        np.testing.assert_allclose(a, b, rtol=2e-4, atol=2e-4, err_msg=ask.key)


@SLOW
@given(kind=st.sampled_from(KINDS), z=arrays(np.float64, (4, 30), elements=st.floats(-3, 3)))
def test_two_faults_at_once_are_the_union_of_their_attributes(kind, z):
    twin = fit(machine(kind))
    low, friction = twin.modes("low_voltage")[0], twin.modes("friction")[0]
    both = type(low)(
        effect="both", fixed={**low.fixed, **friction.fixed}, severity=low.severity + friction.severity
    )
    attributes = attribute_rows([both], z[None, :, : twin.dim], twin.defaults)
    assert (attributes["volts_below"] > 0.05).all()
    assert (attributes["friction"] > 0.001).all()
    assert all(np.isfinite(a).all() for a in twin.predict(z[:, : twin.dim], attributes, covered(twin)))


@pytest.mark.parametrize("kind", KINDS)
def test_back_emf_is_terminal_volts_less_resistance_and_brushes(kind):
    twin = fit(machine(kind))
    z = np.random.default_rng(8).standard_normal((200, twin.dim))
    made = rows(twin.plate, z)
    bench = Bench(twin.plate, made, rows_of(twin, 200))
    now = bench.state("loaded")
    runs = now.runs > 0.5
    rise = 0.25 + 0.5 * np.minimum(made.load, 1.5)
    left = (now.volts - now.current * bench.resistance(rise) - made.brush) * made.volt
    np.testing.assert_allclose(
        twin.back_emf(z, rows_of(twin, 200), state="loaded")[runs], left[runs], rtol=1e-6
    )
    assert (twin.back_emf(z, rows_of(twin, 200), state="stalled") == 0.0).all()
