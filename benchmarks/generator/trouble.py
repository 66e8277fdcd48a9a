"""A site, and what is wrong with the machine that stands on it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

Random = np.random.Generator
Triple = tuple[float, float, float]
NONE: Triple = (0.0, 0.0, 0.0)


@dataclass(frozen=True)
class Site:
    """What the machine stands in, fault or not."""

    law: str
    load: float
    """Torque of the process over rated torque, as far as nothing is wrong."""
    breakaway: float
    """Torque of the standing load over its running torque."""
    level: float
    """Supply over the site's nominal voltage."""
    unbalance: complex
    """Negative over positive sequence of the supply."""
    hertz_drift: float
    source_drop: float
    """Voltage drop of supply and feeder at rated current, over rated voltage."""
    cable_drop: float
    ambient_c: float
    can_uncouple: bool
    insulation_ohm: float
    polarisation: float
    inertia_times: float
    neutral_earthed: bool
    earth_leakage_trip: bool


@dataclass(frozen=True)
class Trouble:
    """One fault as changes to a sound machine on its site."""

    fault: str
    severity: float
    detail: dict[str, Any]
    level: float | None = None
    """Supply over the rated voltage, in place of the site's."""
    pattern: tuple[complex, complex, complex] = (1, 1, 1)
    hertz_times: float = 1.0
    before_ohm: Triple = NONE
    after_ohm: Triple = NONE
    joint_ohm: Triple = NONE
    extra_ohm: Triple = NONE
    sense: Triple = (1.0, 1.0, 1.0)
    tap: Triple = (0.5, 0.5, 0.5)
    shorts: tuple[tuple[int, int, float], ...] = ()
    other_connection: bool = False
    rotor_times: float = 1.0
    bars: float = 0.0
    load: float | None = None
    drag: float = 0.0
    """Rubbing torque over rated torque."""
    drag_in_motor: bool = True
    seized: str = ""
    cooling: float = 1.0
    vibration: float = 1.0
    vibration_uncoupled: float = 1.0
    bearing_k: float = 0.0
    insulation_ohm: float | None = None
    polarisation: float | None = None
    runs_on: bool = False
    dead: bool = False
    relay_setting: float | None = None


def draw_site(random: Random) -> Site:
    """Draw an ordinary site."""
    law = str(random.choice(["pump", "fan", "constant"], p=[0.42, 0.23, 0.35]))
    return Site(
        law=law,
        load=float(0.3 + 0.7 * random.beta(2.2, 1.9)),
        breakaway=float(random.uniform(0.5, 1.0) if law == "constant" else random.uniform(0.08, 0.3)),
        level=float(np.exp(random.normal(0, 0.02))),
        unbalance=abs(random.normal(0, 0.004)) * np.exp(2j * np.pi * random.random()),
        hertz_drift=float(np.exp(random.normal(0, 0.0006))),
        source_drop=float(random.uniform(0.005, 0.02)),
        cable_drop=float(random.uniform(0.002, 0.02)),
        ambient_c=float(random.normal(23, 8)),
        can_uncouple=bool(random.random() < 0.8),
        insulation_ohm=float(1e6 * np.exp(random.normal(np.log(900), 1.3))),
        polarisation=float(np.clip(np.exp(random.normal(np.log(2.2), 0.28)), 1.1, 6)),
        inertia_times=float(np.exp(random.normal(np.log(9 if law == "fan" else 2.5), 0.6))),
        neutral_earthed=bool(random.random() < 0.85),
        earth_leakage_trip=bool(random.random() < 0.45),
    )
