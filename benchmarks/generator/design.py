"""Machines as they are designed and built: the circuit behind a rating, and the one that left the factory."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from benchmarks.generator.circuit import MOTOR, Floats, Winding, balanced, joined_as_rated, solve
from benchmarks.generator.plates import stamp
from benchmarks.generator.rating import Random, Rated, at_size, draw_rated, near

TRIES = 30
STEPS = 25
NUDGE = 1e-3
CLOSE = 5e-3
MOST_WITHOUT_IRON = 0.93  # of all losses
LEAST_IN_STATOR = 0.15


@dataclass(frozen=True)
class Motor:
    """One machine that was built, with the plate it got."""

    rated: Rated
    winding: Winding
    friction_w: float
    stray_w: float
    inertia_kgm2: float
    bars: int
    plate: dict[str, Any]
    vibration_mms: float

    def drag_nm(self, rpm: float) -> float:
        """Torque lost in the machine: friction and windage with the speed, stray loss as rated."""
        speed = max(rpm, 0.0) / self.rated.rpm
        rated_w = self.rated.rpm * np.pi / 30
        return (self.friction_w * (0.3 + 0.7 * speed**2) + 0.6 * self.stray_w * min(speed, 1.0)) / rated_w


@dataclass(frozen=True)
class Promise:
    """A rating with its losses shared out, and the proportions of the circuit that are free."""

    rated: Rated
    friction_w: float
    stray_w: float
    stator_w: float
    rotor_w: float
    cage_ratio: float
    split: float
    """Stator's share of the leakage."""
    curve: float

    @property
    def volts(self) -> float:
        """Rated voltage of one phase winding."""
        return self.rated.volts if self.rated.is_delta else self.rated.volts / math.sqrt(3)

    @property
    def amps(self) -> float:
        """Rated current of one phase winding."""
        return self.rated.current_a / math.sqrt(3) if self.rated.is_delta else self.rated.current_a

    def winding(self, logs: Floats) -> Winding:
        """Return the circuit with leakage, magnetising, iron and rotor given as logarithms per unit."""
        leakage, magnetising, iron, rotor = (self.volts / self.amps * float(x) for x in np.exp(logs))
        inner = 1 - self.split
        return Winding(
            voltage_v=self.volts,
            current_a=self.amps,
            frequency_hz=self.rated.hertz,
            poles=self.rated.poles,
            stator_ohm=self.stator_w / (3 * self.amps**2),
            stator_leakage_ohm=self.split * leakage,
            magnetising_ohm=magnetising,
            iron_ohm=iron,
            rotor_leakage_ohm=0.55 * inner * leakage,
            outer_ohm=rotor * (1 + self.cage_ratio),
            inner_ohm=rotor * (1 + 1 / self.cage_ratio),
            inner_leakage_ohm=1.1 * inner * leakage,
            curve=self.curve,
            is_delta=self.rated.is_delta,
        )

    def misses(self, logs: Floats) -> Floats:
        """Return how far current, power factor, torque and locked-rotor current are from the rating."""
        rated, machine = self.rated, self.winding(logs)
        stiff = balanced(rated.volts, rated.hertz)
        flow = solve(machine, stiff, joined_as_rated(machine), np.array([rated.slip, 1.0]))
        running, locked = (float(x) for x in np.abs(flow.line_a[:, 0]))
        factor = flow.power_w(MOTOR)[0] / (math.sqrt(3) * rated.volts * running)
        wanted = rated.power_w + self.friction_w + 0.6 * self.stray_w + self.rotor_w
        return np.array(
            [
                math.log(running / rated.current_a),
                2 * (factor - rated.power_factor),
                math.log(max(flow.forward_w[0], 1.0) / wanted),
                math.log(locked / rated.current_a / rated.locked_ratio),
            ]
        )


def draw_motor(random: Random) -> Motor:
    """Draw a rating, design it, build it with the scatter of manufacture, and stamp its plate."""
    for _ in range(TRIES):
        promise = draw_promise(draw_rated(random), random)
        designed = None if promise is None else design(promise)
        if promise is not None and designed is not None:
            return _built(promise, designed, random)
    raise RuntimeError(f"no machine could be designed in {TRIES} tries")


def draw_promise(rated: Rated, random: Random) -> Promise | None:
    """Share the losses out; None where they do not allow the slip."""
    kw = rated.power_w / 1000
    friction = rated.losses_w * at_size("friction_share", kw) * {2: 1.5, 4: 1.0, 6: 0.8, 8: 0.7}[rated.poles]
    stray = rated.losses_w * at_size("stray_share", kw)
    stator = rated.losses_w * at_size("stator_share", kw) * math.exp(random.normal(0, 0.08))
    rotor = rated.slip / (1 - rated.slip) * (rated.power_w + friction + 0.6 * stray)
    stator = min(stator, MOST_WITHOUT_IRON * rated.losses_w - rotor - friction - stray)
    if stator < LEAST_IN_STATOR * rated.losses_w:
        return None
    return Promise(
        rated=rated,
        friction_w=friction,
        stray_w=stray,
        stator_w=stator,
        rotor_w=rotor,
        cage_ratio=at_size("cage_ratio", kw) * math.exp(random.normal(0, 0.15)),
        split=random.uniform(0.40, 0.60),
        curve=random.uniform(0.7, 1.35),
    )


def design(promise: Promise) -> Winding | None:
    """Find the circuit that keeps the promise, by damped Newton steps; None where none does."""
    rated = promise.rated
    logs = np.log([0.94 / rated.locked_ratio, 2.2, 40.0, rated.slip * 0.9])
    for _ in range(STEPS):
        missed = promise.misses(logs)
        if np.max(np.abs(missed)) < CLOSE:
            return promise.winding(logs)
        slopes = np.stack([(promise.misses(logs + d) - missed) / NUDGE for d in NUDGE * np.eye(4)], axis=1)
        step = np.linalg.solve(slopes.T @ slopes + 1e-6 * np.eye(4), -slopes.T @ missed)
        logs = logs + step * min(1.0, 0.6 / float(np.max(np.abs(step))))
    return None


def _built(promise: Promise, designed: Winding, random: Random) -> Motor:
    """Scatter the circuit as manufacture, and rewinding in one of ten, do; stamp what was designed."""
    rated, rewound = promise.rated, random.random() < 0.10

    winding = replace(
        designed,
        stator_ohm=designed.stator_ohm * near(0.10 if rewound else 0.035, random),
        stator_leakage_ohm=designed.stator_leakage_ohm * near(0.06, random),
        magnetising_ohm=designed.magnetising_ohm * near(0.12 if rewound else 0.08, random),
        iron_ohm=designed.iron_ohm * near(0.20 if rewound else 0.12, random),
        rotor_leakage_ohm=designed.rotor_leakage_ohm * near(0.06, random),
        inner_ohm=designed.inner_ohm * near(0.06, random),
        outer_ohm=designed.outer_ohm * near(0.08, random),
    )
    kw = rated.power_w / 1000
    inertia = 0.0035 * kw**1.25 * (rated.poles / 4) ** 1.8 * near(0.2, random)
    return Motor(
        rated=rated,
        winding=winding,
        friction_w=promise.friction_w * near(0.15, random),
        stray_w=promise.stray_w * near(0.2, random),
        inertia_kgm2=inertia,
        bars=int(random.choice([22, 26, 28, 34, 40, 44, 52, 58])),
        plate=stamp(rated, random),
        vibration_mms=0.75 * kw**0.13 * near(0.35, random),
    )
