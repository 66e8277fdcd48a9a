"""Rectified waveforms, drawn here pulse by pulse, against the closed forms and figures of the model.

Form factor and ripple of two and six pulses are published closed forms; what is left with a pulse missing is
worked out from the waveform of a bridge whose one thyristor does not fire while current flows on.
"""

import math

import numpy as np
import pytest

from calc.dc.converter import (
    MISSING_BRIDGE,
    MISSING_SIX_PULSE,
    bridge_ripple,
    ripple_frequency,
    six_pulse_ripple,
)
from tests.published.sources import published

FINE = 6000


def one(number):
    return np.array([float(number)])


def pulses(count, angle_deg=0.0):
    """One period of a bridge of so many pulses, of its peak; continuous conduction."""
    half = math.pi / count
    window = np.linspace(-half, half, FINE, endpoint=False) + half / FINE + math.radians(angle_deg)
    return np.tile(np.cos(window), count)


def ripple(wave):
    return wave.std() / wave.mean()


@published(
    "closed form", "p pulses at firing angle 0: mean of the peak, form factor, ripple", known="computed",
    says="2 pulses 0.6366, 1.1107, 48.3 %; 6 pulses 0.9549, 1.0009, 4.2 %",
    checks=["calc.dc.converter.bridge_ripple", "calc.dc.converter.six_pulse_ripple"],
)  # fmt: skip
@pytest.mark.parametrize(
    ("count", "form", "mean", "factor", "share"),
    [(2, bridge_ripple, 0.6366, 1.1107, 0.483), (6, six_pulse_ripple, 0.9549, 1.0009, 0.042)],
)
def test_form_factor_and_ripple_are_the_published_ones(count, form, mean, factor, share):
    wave = pulses(count)
    assert wave.mean() == pytest.approx(mean, abs=1e-4)
    assert math.sqrt((wave**2).mean()) / wave.mean() == pytest.approx(factor, abs=1e-4)
    ours = form(one(1.0))[0]
    assert ours == pytest.approx(share, abs=5e-4)
    assert math.hypot(1.0, ours) == pytest.approx(factor, abs=1e-4)


@published(
    "circuit simulation", "400 V six pulses: mean 539.8, r.m.s. 540.3, 489.6 to 565.3 V", known="computed",
    says="4.2 %; the mean is 1.35 times the line voltage", checks="calc.dc.converter.six_pulse_ripple",
)  # fmt: skip
def test_the_simulated_six_pulse_bridge_has_the_ripple_of_the_closed_form():
    wave = pulses(6) * 400.0 * math.sqrt(2.0)
    assert wave.mean() == pytest.approx(540.2, abs=0.05)
    assert wave.mean() / 400.0 == pytest.approx(1.35, abs=1e-3)
    assert (wave.min(), wave.max()) == pytest.approx((489.9, 565.7), abs=0.1)
    assert math.sqrt(540.3**2 - 539.8**2) / 539.8 == pytest.approx(six_pulse_ripple(one(1.0))[0], abs=0.002)


@published(
    "Sen, Principles of Electric Machines", "examples 4.11 and 4.12", known="looked up",
    says="648.2 V from 480 V at 0°; 206.6 V from 265 V, single-phase, at 30°: mean as the cosine",
    checks=["calc.dc.converter.bridge_ripple", "calc.dc.converter.six_pulse_ripple"],
)  # fmt: skip
def test_the_mean_falls_as_the_cosine_of_the_firing_angle_and_the_ripple_grows():
    assert pulses(6).mean() * 480.0 * math.sqrt(2.0) == pytest.approx(648.2, abs=0.1)
    back = pulses(2, 30.0)
    assert back.mean() * 265.0 * math.sqrt(2.0) == pytest.approx(206.6, abs=0.1)
    assert bridge_ripple(one(back.mean() / pulses(2).mean()))[0] == pytest.approx(ripple(back), rel=2e-3)
    for angle in (15.0, 30.0, 45.0, 60.0):
        wave = pulses(6, angle)
        share = wave.mean() / pulses(6).mean()
        assert share == pytest.approx(math.cos(math.radians(angle)), abs=1e-6)
        assert six_pulse_ripple(one(share))[0] == pytest.approx(ripple(wave), rel=2e-3)


def one_thyristor_dead(angle_deg):
    """Six pulses, one thyristor dead: the pair before conducts on, then the load is shorted for a sixth."""
    start = math.pi / 3.0 + math.radians(angle_deg)
    pulse = np.linspace(0.0, math.pi / 3.0, FINE, endpoint=False)
    on = np.sin(start + math.pi / 3.0 + pulse)  # the last pair, past its end
    return np.concatenate([*[np.sin(start + pulse)] * 4, on, np.zeros(FINE)])


@published(
    "own waveform", "six pulses, one thyristor dead", known="computed",
    says="53 % at 0°, 66 % at 20°, 77 % at 30°; a line lost 48 % at 0°; the model takes 57 % at any angle",
    checks="calc.dc.converter.MISSING_SIX_PULSE",
)  # fmt: skip
def test_a_missing_pulse_of_six_gives_more_than_half_of_the_mean():
    for angle, share in ((0.0, 0.53), (20.0, 0.66), (30.0, 0.77)):
        assert ripple(one_thyristor_dead(angle)) == pytest.approx(share, abs=0.005)
    assert ripple(one_thyristor_dead(0.0)) < MISSING_SIX_PULSE < ripple(one_thyristor_dead(20.0))


@published(
    "closed form", "half-wave rectifier, ripple factor 1.21", known="looked up",
    says="one half of a single-phase bridge dead", checks="calc.dc.converter.MISSING_BRIDGE",
)  # fmt: skip
def test_a_bridge_that_lost_one_half_has_the_ripple_of_a_half_wave():
    half = np.concatenate([np.sin(np.linspace(0.0, math.pi, FINE)), np.zeros(FINE)])
    assert ripple(half) == pytest.approx(math.sqrt((math.pi / 2.0) ** 2 - 1.0), abs=1e-3)
    assert ripple(half) == pytest.approx(MISSING_BRIDGE, rel=0.05)


@published(
    "closed form", "pulse number times line frequency", known="computed",
    says="360/300 Hz, 120/100 Hz; line frequency with a pulse missing; bars per second on plain DC",
    checks="calc.dc.converter.ripple_frequency",
)  # fmt: skip
@pytest.mark.parametrize(
    ("source", "mains", "lost", "hertz"),
    [
        (1, 60, 0, 360),
        (1, 50, 0, 300),
        (2, 60, 0, 120),
        (2, 50, 0, 100),
        (1, 60, 1, 60),
        (2, 50, 1, 50),
        (0, 50, 0, 880),
    ],
)  # fmt: skip
def test_the_ripple_frequency_counts_the_pulses(source, mains, lost, hertz):
    found = ripple_frequency(source=one(source), mains_hz=mains, lost=one(lost), bars_per_second=one(44 * 20))
    assert found[0] == hertz
