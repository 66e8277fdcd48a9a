"""What single-phase motors usually are, where the plate does not say it.

Impedances in per unit of rated voltage over rated current at 20 °C, each with its
median and its spread in the logarithm. Judged from small motors of 0.18 to 3 kW; the textbook
machines with a start winding (Fitzgerald 9.5, Guru 10.3, Hubert 6.1) stand at the edges, which
the spreads take in as rare.
"""

from __future__ import annotations

from calc.induction_1ph.designs import CAPACITOR_RUN, CAPACITOR_START, CAPACITOR_START_RUN, SPLIT_PHASE

# name -> (median, spread) at REFERENCE. magnetising: at rated flux. auxiliary_*: ratio to the main
# winding's own. friction: of rated output. Main and rotor leakage are taken to be alike.
Spread = tuple[float, float]

MEDIAN_AND_SPREAD: dict[str, dict[str, Spread]] = {
    SPLIT_PHASE: {
        "main_resistance": (0.0455, 0.20),
        "leakage": (0.110, 0.21),
        "rotor_resistance": (0.060, 0.19),
        "magnetising": (2.00, 0.16),
        "core": (24.5, 0.20),
        "friction": (0.056, 0.36),
        "turns_ratio": (0.71, 0.14),
        "auxiliary_resistance": (5.2, 0.33),
        "auxiliary_leakage": (0.50, 0.29),
    },
    CAPACITOR_START: {
        "main_resistance": (0.049, 0.20),
        "leakage": (0.125, 0.21),
        "rotor_resistance": (0.062, 0.20),
        "magnetising": (2.17, 0.16),
        "core": (21.5, 0.22),
        "friction": (0.050, 0.34),
        "turns_ratio": (1.20, 0.11),
        "auxiliary_resistance": (4.2, 0.33),
        "auxiliary_leakage": (1.32, 0.23),
    },
    CAPACITOR_RUN: {
        "main_resistance": (0.0580, 0.17),
        "leakage": (0.100, 0.15),
        "rotor_resistance": (0.074, 0.16),
        "magnetising": (2.85, 0.16),
        "core": (11.8, 0.18),
        "friction": (0.044, 0.30),
        "turns_ratio": (1.27, 0.16),
        "auxiliary_resistance": (1.80, 0.26),
        "auxiliary_leakage": (1.40, 0.24),
    },
    CAPACITOR_START_RUN: {
        "main_resistance": (0.0560, 0.17),
        "leakage": (0.108, 0.15),
        "rotor_resistance": (0.071, 0.16),
        "magnetising": (2.55, 0.13),
        "core": (13.2, 0.19),
        "friction": (0.044, 0.30),
        "turns_ratio": (1.21, 0.15),
        "auxiliary_resistance": (2.15, 0.26),
        "auxiliary_leakage": (1.30, 0.21),
    },
}

REFERENCE = (500.0, 4.0)
"""Rated output [W] and poles that the medians hold for."""

# How medians go with size: exponents of output and of poles. Larger motors have less resistance, friction
# and core loss per unit; more poles need more magnetising current. Common practice; the sizes judged.
Trend = tuple[float, float]
_SIZE: dict[str, Trend] = {
    "main_resistance": (-0.21, 0.1),
    "rotor_resistance": (-0.27, 0.1),
    "core": (0.22, 0.1),
    "friction": (-0.42, -0.2),
}
_ONE_WINDING_RUNS: dict[str, Trend] = {**_SIZE, "magnetising": (0.06, -0.12), "leakage": (-0.08, 0.1)}
_TWO_WINDINGS_RUN: dict[str, Trend] = {**_SIZE, "magnetising": (0.24, -0.26), "run": (0.0, 0.3)}
SIZE_TREND: dict[str, dict[str, Trend]] = {
    SPLIT_PHASE: _ONE_WINDING_RUNS,
    CAPACITOR_START: _ONE_WINDING_RUNS,
    CAPACITOR_RUN: _TWO_WINDINGS_RUN,
    CAPACITOR_START_RUN: _TWO_WINDINGS_RUN,
}


def size_factor(design: str, name: str, *, power_w: float, poles: int) -> float:
    """Median of a quantity at a size over that at REFERENCE; 1 for a quantity without a trend."""
    by_power, by_poles = SIZE_TREND[design].get(name, (0.0, 0.0))
    return float((power_w / REFERENCE[0]) ** by_power * (poles / REFERENCE[1]) ** by_poles)


# Reactive power of a capacitor at rated voltage over rated output; textbook examples give 0.6 to 1.7 (run).
RUN_VAR_PER_WATT: Spread = (0.54, 0.27)
START_VAR_PER_WATT: dict[str, Spread] = {
    CAPACITOR_START: (5.4, 0.30),
    CAPACITOR_START_RUN: (3.2, 0.30),
}
RUN_TOLERANCE = 0.035
"""Film run capacitors: ±5, ±6 or ±10 %."""

# Series resistance over reactance: electrolytic start capacitors, film run capacitors. From memory.
START_LOSS_FACTOR = 0.04
RUN_LOSS_FACTOR = 0.004

# Magnetising reactance against induced voltage e per unit: (1 + g) / (1 + g e^m).
SATURATION_SHARE = 0.22
SATURATION_POWER = 6.5

# Leakage at locked-rotor current over leakage in running: the teeth saturate.
LOCKED_LEAKAGE: dict[str, Spread] = {
    SPLIT_PHASE: (0.82, 0.07),
    CAPACITOR_START: (0.88, 0.06),
    CAPACITOR_RUN: (0.90, 0.06),
    CAPACITOR_START_RUN: (0.83, 0.06),
}
RATED_EMF = 0.92
"""Forward induced voltage at rated load over rated voltage, for the saturation there."""

LOCKED_ROTOR_RESISTANCE = 1.16
BACKWARD_RESISTANCE = 1.25
"""Rotor resistance at line frequency, and against the backward field, over that in running: deep bars."""

SUPPLY: Spread = (1.0, 0.022)
SOURCE_PER_UNIT: Spread = (0.0125, 0.45)
"""Impedance of supply and cable at the motor, per unit of rated voltage over rated current."""
LOAD: Spread = (0.69, 0.30)
RISE_SPREAD = 0.22
AMBIENT_SPREAD_K = 10.0

RESTART_HEAT = 0.7
"""Share of the rise in service that is left in the winding of a motor that is started again. From memory."""
LIGHT_LOAD = 0.35
"""Load torque of an idling process over that of its work. Common practice."""
IDLE_HEAT = 0.55
"""Share of the rated rise that a motor reaches without load. From memory."""
SETTLED_HEAT = (1.7, 0.6, 0.9)
"""Losses over rated losses up to which the rise follows them; how it falls beyond; least. From memory."""
FRAME_RISE = 0.60
"""Rise of the frame over that of the winding, small enclosed motors. From memory."""
BEARING_RISE = (0.36, 18.5)
"""Bearing rise: share of the frame's, and what its own friction adds, K. From memory."""
INERTIA_S = 0.085
"""Stored energy of motor and load at synchronous speed over rated output, s. From memory."""
PULL_OUT = 1.9
"""Pull-out torque over rated torque, for the time of a start. From memory."""
