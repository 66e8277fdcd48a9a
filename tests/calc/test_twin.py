"""What every machine model keeps of the interface, and how a severity spreads."""

import importlib
import math
import warnings

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.kinds import MODELS, twin_of
from calc.quantities import KINDS, MEASURES, STATES, arity
from calc.sheet import Machine
from calc.twin import Ask, Mode, Severity, attribute_rows, standard_normal_cdf
from tests.calc.induction_3ph.plates import PUMP, machine

DEFAULTS = {"a": 1.0, "b": 0.0}
each_model = pytest.mark.parametrize("kind", sorted(MODELS))


@given(st.floats(-8.0, 8.0))
def test_the_normal_distribution_is_the_error_function(x):
    exact = 0.5 * math.erfc(-x / math.sqrt(2.0))
    assert float(standard_normal_cdf(np.array(x))) == pytest.approx(exact, abs=7.5e-8)


def test_a_severity_runs_evenly_in_its_logarithm_between_its_ends():
    mode = Mode(effect="e", severity=(Severity("a", 0.01, 1.0),))
    z = np.zeros((1, 3, 4))
    z[0, :, 2] = [-8.0, 0.0, 8.0]
    rows = attribute_rows([mode], z, DEFAULTS)
    assert rows["a"] == pytest.approx([0.01, 0.1, 1.0], rel=1e-5)


def test_two_severities_have_a_latent_each():
    mode = Mode(effect="e", severity=(Severity("a", 1.0, 4.0), Severity("b", 1.0, 9.0)))
    z = np.zeros((1, 1, 4))
    z[0, 0, 2:] = [8.0, -8.0]
    rows = attribute_rows([mode], z, DEFAULTS)
    assert (rows["a"][0], rows["b"][0]) == pytest.approx((4.0, 1.0))


def test_a_negative_severity_stays_negative():
    mode = Mode(effect="e", severity=(Severity("a", -0.1, -0.3),))
    assert attribute_rows([mode], np.zeros((1, 1, 2)), DEFAULTS)["a"] == pytest.approx([-math.sqrt(0.03)])


def test_rows_of_modes_follow_each_other_in_blocks():
    modes = [Mode(effect="e"), Mode(effect="e", fixed={"b": 7.0})]
    rows = attribute_rows(modes, np.zeros((2, 3, 2)), DEFAULTS)
    assert rows["b"].tolist() == [0.0] * 3 + [7.0] * 3
    assert rows["a"].tolist() == [1.0] * 6


# Every kind.


def asks_of(twin):
    every = [Ask(m.id, s) for m in MEASURES.values() if m.suits(twin.kind) for s in STATES]
    return [ask for ask in every if twin.covers(ask)]


@each_model
def test_a_machine_known_by_its_kind_alone_has_a_twin_that_keeps_the_interface(kind):
    twin = twin_of(Machine(kind=kind))
    assert twin.kind == kind
    assert "none" in twin.effects
    assert len(twin.modes("none")) >= 1
    asks = asks_of(twin)
    assert asks
    z = np.random.default_rng(2).standard_normal((9, twin.dim))
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for effect in twin.effects:
            for mode in twin.modes(effect):
                rows = attribute_rows([mode], z[None], twin.defaults)
                answers = twin.predict(z, rows, asks)
                for ask, found in zip(asks, answers, strict=True):
                    assert found.shape == (9, arity(ask.measure, kind)), (mode, ask)
                    assert np.isfinite(found).all(), (mode, ask)
                states = twin.possible(z, rows)
                assert set(states) <= set(STATES)
                assert all(((flags >= 0.0) & (flags <= 1.0)).all() for flags in states.values()), mode
    assert twin.plate_misfit(z).shape[0] == 9


@each_model
def test_uncertainty_and_transform_of_every_reading_are_usable(kind):
    twin = twin_of(Machine(kind=kind))
    for ask in asks_of(twin):
        error, transform = twin.model_error(ask), twin.transform(ask.measure)
        assert error.level > 0.0, ask
        assert error.contrast >= 0.0, ask
        assert transform.kind in {"log", "log_mean", "linear"}, ask
        assert transform.scale > 0.0, ask
        assert arity(ask.measure, kind) == 1 or error.contrast > 0.0, ask


@each_model
def test_the_ways_of_an_effect_weigh_no_more_than_all_of_it(kind):
    twin = twin_of(Machine(kind=kind))
    for effect in twin.effects:
        modes = twin.modes(effect)
        assert not modes or 0.0 < sum(m.weight for m in modes) <= 1.0 + 1e-9, effect


@each_model
def test_a_row_does_not_know_its_neighbours(kind):
    twin = twin_of(Machine(kind=kind))
    asks = asks_of(twin)
    z = np.random.default_rng(4).standard_normal((6, twin.dim))
    mode = twin.modes("none")[0]

    def answers(rows_z):
        return twin.predict(rows_z, attribute_rows([mode], rows_z[None], twin.defaults), asks)

    together = answers(z)
    for place in range(len(z)):
        alone = answers(z[place : place + 1])
        for a, b in zip(alone, together, strict=True):
            assert a[0] == pytest.approx(b[place], rel=1e-9)


def test_kinds_without_a_model_have_no_twin():
    without = set(KINDS) - set(MODELS)
    assert without
    assert all(twin_of(Machine(kind=kind)) is None for kind in without)
    assert twin_of(Machine(kind="steam_engine")) is None


def test_a_machine_is_fitted_once():
    assert twin_of(machine(**PUMP)) is twin_of(machine(**PUMP))


@each_model
def test_the_module_named_for_a_kind_can_fit(kind):
    assert callable(importlib.import_module(MODELS[kind]).fit)
