"""Worked examples of DC machines from textbooks, checked at intermediate steps.

Inputs and answers were looked up in open sets of worked solutions, except Chapman's, which are from memory.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from calc.dc.circuit import Armature, Magnet, operate, saturation
from calc.dc.converter import bridge_ripple, six_pulse_ripple
from tests.published.sources import published

OPERATE = ["calc.dc.circuit.operate", "calc.dc.circuit.Magnet", "calc.dc.circuit.Armature"]
FITZGERALD, CHAPMAN = "Fitzgerald, Electric Machinery", "Chapman, Electric Machinery Fundamentals"
SEN, HUBERT = "Sen, Principles of Electric Machines", "Hubert, Electric Machines"


def example(book, number, says, *, known="looked up", checks=OPERATE):
    return published(book, number, says=says, known=known, checks=checks)


RAD = math.pi / 30.0


def one(number: float) -> np.ndarray:
    return np.array([float(number)])


def circuit(*, volts: float = 1.0, resistance: float, brush: float = 0.0, emf: float) -> Armature:
    return Armature(one(volts), one(resistance), one(brush), one(emf))


def poles(
    *, flux: float = 1.0, permanent: bool = True, shunt: float = 1.0, series: float = 0.0, bend: float = 1.1
):
    rest = {"residual": 0.0, "reaction": 0.0, "lame": 0.0, "lame_share": 1.0}
    numbers = {"shunt": shunt, "series": series, "bend": bend, "factor": flux} | rest
    return Magnet(**{k: one(v) for k, v in numbers.items()}, permanent=permanent)


def settle(armature: Armature, magnet: Magnet, torque: float, rotating: float = 0.0):
    return operate(armature, magnet, one(torque), one(rotating), one(0.0))


@example(
    CHAPMAN,
    "example 9-1",
    "250 V, 0.06 ohm: 1173, 1144, 1115 r/min and 190, 388, 587 N·m at 100, 200, 300 A",
    known="from memory",
)
@pytest.mark.parametrize(
    ("line_a", "rpm", "newton_metre"), [(100, 1172.6, 189.0), (200, 1143.8, 387.9), (300, 1115.0, 586.9)]
)
def test_chapman_9_1_shunt_motor_slows_as_printed(line_a: float, rpm: float, newton_metre: float) -> None:
    """250 V, 0.06 ohm, 50 ohm field, 1200 r/min at 250 V induced (from memory).

    The book rounds 189.0 N m to 190.
    """
    volts, ampere = 250.0, 195.0
    constant = volts / (1200 * RAD)
    armature_a = line_a - volts / 50.0
    point = settle(circuit(resistance=0.06 * ampere / volts, emf=1.0), poles(), armature_a / ampere)
    assert point.current[0] * ampere == pytest.approx(armature_a, rel=1e-6)
    assert point.speed[0] * 1200 == pytest.approx(rpm, abs=0.1)
    assert constant * point.current[0] * ampere == pytest.approx(newton_metre, abs=0.1)


@example(CHAPMAN, "example 9-2", "840 A-turns of armature reaction at 200 A: 1227 r/min", known="from memory")
def test_chapman_9_2_armature_reaction_raises_the_speed() -> None:
    """Same machine, 840 A-turns of reaction at 200 A leave 233 V at 1200 r/min: 1227 r/min (from memory)."""
    volts, ampere = 250.0, 195.0
    point = settle(circuit(resistance=0.06 * ampere / volts, emf=1.0), poles(flux=233 / 250), 233 / 250)
    assert point.current[0] == pytest.approx(1.0, rel=1e-6)
    assert point.speed[0] * 1200 == pytest.approx(1227.3, abs=0.3)


@example(CHAPMAN, "example 9-5", "series motor at 50 A: 3690 r/min, 31.8 N·m", known="from memory")
def test_chapman_9_5_series_motor_runs_fast_at_light_current() -> None:
    """250 V, 0.08 ohm, 50 A, 80 V induced at 1200 r/min: 3690 r/min and 31.8 N m (from memory)."""
    volts, ampere, base_rpm = 250.0, 50.0, 2400.0
    emf = 80.0 * base_rpm / 1200.0 / volts
    series = poles(permanent=False, shunt=0.0, series=1.0)
    point = settle(circuit(resistance=0.08 * ampere / volts, emf=emf), series, 1.0)
    speed = float(point.speed[0]) * base_rpm
    assert point.current[0] == pytest.approx(1.0, rel=1e-6)
    assert speed == pytest.approx(3690, abs=1)
    assert (volts - 4.0) * ampere / (speed * RAD) == pytest.approx(31.83, abs=0.02)


@example(
    CHAPMAN,
    "example 9-6",
    "cumulative 1108, differential 1230 r/min",
    known="from memory",
    checks=[*OPERATE, "calc.dc.circuit.saturation"],
)
def test_chapman_9_6_one_bend_serves_cumulative_and_differential_compounding() -> None:
    """262 V with and 236 V against 3 turns at 200 A on 1000 turns at 5 A: 1108 and 1230 r/min (from memory).

    The bend is set by the cumulative point alone; the differential point is then a prediction.
    """
    aid = 3 * 200 / (1000 * 5)
    knee = ((1 + aid) ** 2 - 1.048**2) / ((1 + aid) ** 2 * (1.048**2 - 1.0))
    bend = math.sqrt(knee)
    assert saturation(one(1 + aid), one(bend))[0] == pytest.approx(262 / 250, rel=1e-6)
    resistance = 0.04 * 200 / 250
    for sense, rpm in ((aid, 1108.4), (-aid, 1230.5)):
        field = poles(permanent=False, series=sense, bend=bend)
        torque = float(field.flux(one(1.0))[0])
        point = settle(circuit(resistance=resistance, emf=1.0), field, torque)
        assert point.current[0] == pytest.approx(1.0, rel=1e-4)
        assert point.speed[0] * 1200 == pytest.approx(rpm, rel=0.004)


@example(FITZGERALD, "example 7.1", "128 V on 125 V induced at 3000 r/min: 150 A, 59.7 N·m")
def test_fitzgerald_7_1_terminal_volts_above_induced_volts_motor_the_machine() -> None:
    """125 V at 3000 r/min, 0.02 ohm: 128 V gives 150 A and 59.7 N m."""
    ampere = 150.0
    armature = circuit(volts=128 / 125, resistance=0.02 * ampere / 125, emf=1.0)
    point = settle(armature, poles(), 1.0)
    assert point.speed[0] * 3000 == pytest.approx(3000, abs=0.5)
    assert 125 * ampere / (3000 * RAD) == pytest.approx(59.68, abs=0.01)


@example(FITZGERALD, "example 7.2", "21.9 kW at 123 V: 119.4 V induced, 2867 r/min")
def test_fitzgerald_7_2_less_volts_and_more_current_slow_the_motor() -> None:
    """125 V at 3000 r/min, 0.02 ohm; 21.9 kW in at 123 V is 178 A."""
    ampere = 21900 / 123
    armature = circuit(volts=123 / 125, resistance=0.02 * ampere / 125, emf=1.0)
    point = settle(armature, poles(), 1.0)
    assert point.current[0] == pytest.approx(1.0, rel=1e-6)
    assert point.speed[0] * 125 == pytest.approx(119.4, abs=0.05)
    assert point.speed[0] * 3000 == pytest.approx(2866.5, abs=0.5)


@example(HUBERT, "example 10.4", "850 to 1650 r/min at 50.4 A: flux 47.4 % less")
def test_hubert_10_4_nearly_half_the_flux_gives_nearly_twice_the_speed() -> None:
    """240 V, field 95.2 ohm, armature 0.242 ohm, 72 A in the line at 850 r/min."""
    full_a, weak_a, share = 72 - 240 / 95.2, 50.4, 1 - 0.4742
    emf = (240 - full_a * 0.242) / 240
    armature = circuit(resistance=0.242 * full_a / 240, emf=emf)
    point = settle(armature, poles(flux=share), share * weak_a / full_a)
    assert point.current[0] * full_a == pytest.approx(50.4, abs=1e-3)
    assert point.speed[0] * 850 == pytest.approx(1650, abs=1.0)


@example(
    FITZGERALD,
    "example 7.9",
    "magnet motor: K 0.2215 V·s, 61 W lost, 267 W at 48 V and 1700 r/min (275 printed with K rounded)",
)
def test_fitzgerald_7_9_magnet_motor_gives_267_watts() -> None:
    """50 V, 1.25 A, 2100 r/min uncoupled, 1.03 ohm; at 48 V and 1700 r/min 267.1 W.

    275 W is printed, with K rounded to 0.22.
    """
    constant = (50 - 1.25 * 1.03) / (2100 * RAD)
    lost = constant * 2100 * RAD * 1.25
    assert constant == pytest.approx(0.22151, abs=1e-5)
    assert lost == pytest.approx(60.89, abs=0.01)
    ampere = (48 - constant * 1700 * RAD) / 1.03
    emf = constant * 2100 * RAD / 50
    point = settle(circuit(volts=48 / 50, resistance=1.03 * ampere / 50, emf=emf), poles(), 1.0)
    assert point.speed[0] * 2100 == pytest.approx(1700, abs=0.5)
    assert constant * 1700 * RAD * ampere - lost == pytest.approx(267.1, abs=0.1)


@example(
    SEN,
    "example 4.6",
    "12 kW, 100 V: 885 r/min, 113.9 N·m, 82.35 %",
    checks=OPERATE,
)
def test_sen_4_6_full_load_speed_torque_and_efficiency() -> None:
    """12 kW, 100 V, 0.1 ohm, 1000 r/min at 6 A uncoupled; at 120 A 885 r/min, 113.9 N m, 82.35 %."""
    point = settle(circuit(resistance=0.1 * 120 / 100, emf=0.994), poles(), 1.0)
    rpm = float(point.speed[0]) * 1000
    assert rpm == pytest.approx(885.3, abs=0.1)
    assert 88.0 * 120 / (rpm * RAD) == pytest.approx(113.90, abs=0.02)
    copper, air_gap = 0.12 * point.current[0] ** 2, 0.994 * point.flux[0] * point.speed[0] * point.current[0]
    assert copper + air_gap == pytest.approx(point.current[0], rel=1e-6)
    field_w = 100.0 * 0.99  # A of field current at 100 V
    assert (88.0 * 120 - 99.4 * 6) / (12000 + field_w) == pytest.approx(0.8235, abs=0.001)


@example(HUBERT, "example 10.9", "flux to 75 %, torque to 50 %: 24 A, 3399 r/min")
def test_hubert_10_9_weaker_flux_and_half_torque() -> None:
    """240 V, 36 A, 0.37 ohm, 2500 r/min; flux to 75 %, torque to 50 %: 24 A, 3398.6 r/min."""
    emf = (240 - 36 * 0.37) / 240
    point = settle(circuit(resistance=0.37 * 36 / 240, emf=emf), poles(flux=0.75), 0.5)
    assert point.current[0] * 36 == pytest.approx(24.0, rel=1e-6)
    assert point.speed[0] * 2500 == pytest.approx(3398.6, abs=0.5)


@example(
    "open modelling library", "DC magnet machine with losses", "E 94.5 V, 61.30 N·m at 100 A, 1417.5 r/min"
)
def test_library_magnet_machine_at_rated_point() -> None:
    """Open modelling library: 100 V, 100 A, 1417.5 r/min, 0.05 ohm, 0.5 V, 350 W lost: 61.30 N m."""
    emf = 0.945
    point = settle(circuit(resistance=0.05, brush=0.005, emf=emf), poles(), 1.0 - 350 / 9450, 350 / 9450)
    assert point.current[0] * 100 == pytest.approx(100.0, rel=1e-6)
    assert point.speed[0] * 1417.5 == pytest.approx(1417.5, rel=1e-6)
    assert (emf * 100 * 100 - 350) / (1417.5 * RAD) == pytest.approx(61.30, abs=0.01)


@example(
    "closed form",
    "six pulses, continuous conduction",
    "4.2, 18, 53 % at 0, 30, 60°, and the waveform sampled",
    known="computed",
    checks=["calc.dc.converter.six_pulse_ripple"],
)
@pytest.mark.parametrize(("angle", "share"), [(0.0, 0.042), (30.0, 0.18), (60.0, 0.53)])
def test_six_pulse_ripple_grows_with_the_firing_angle(angle: float, share: float) -> None:
    """Closed forms against 4.2, 18 and 53 %, and against the waveform itself."""
    cosine = math.cos(math.radians(angle))
    t = np.linspace(-math.pi / 6, math.pi / 6, 20001) + math.radians(angle)
    wave = np.cos(t)
    sampled = wave.std() / wave.mean()
    assert six_pulse_ripple(one(cosine))[0] == pytest.approx(sampled, rel=2e-3)
    assert sampled == pytest.approx(share, abs=0.006)


@example(
    "closed form",
    "single-phase bridge, continuous conduction",
    "48.3 % at 0°, and the waveform sampled",
    known="computed",
    checks=["calc.dc.converter.bridge_ripple"],
)
@pytest.mark.parametrize("angle", [0.0, 20.0, 45.0])
def test_bridge_ripple_is_that_of_the_waveform(angle: float) -> None:
    """48.3 % at full opening, continuous conduction."""
    t = np.linspace(0, math.pi, 20001) + math.radians(angle)
    wave = np.sin(t)
    assert bridge_ripple(one(math.cos(math.radians(angle))))[0] == pytest.approx(
        wave.std() / wave.mean(), rel=2e-3
    )
    if angle == 0.0:
        assert wave.std() / wave.mean() == pytest.approx(0.483, abs=0.001)
