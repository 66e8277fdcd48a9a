"""What single-phase motors usually are, where the plate does not say it.

Impedances in per unit of rated voltage over rated current at 20 °C, each with its
median and its spread in the logarithm. Judged from small motors of 0.18 to 3 kW and from the
textbook machines (Fitzgerald 9.2 and 9.5, Guru 10.3, Hubert 6.1), which lie inside.
"""

from __future__ import annotations

from calc.induction_1ph.plate import CAPACITOR_RUN, CAPACITOR_START, CAPACITOR_START_RUN, SPLIT_PHASE

# name -> (median, spread). magnetising: at rated flux. auxiliary_*: ratio to the main winding's own.
# friction: of rated output. rotor_split: none, main and rotor leakage are alike.
Spread = tuple[float, float]

MEDIAN_AND_SPREAD: dict[str, dict[str, Spread]] = {
    SPLIT_PHASE: {
        "main_resistance": (0.048, 0.22),
        "leakage": (0.110, 0.18),
        "rotor_resistance": (0.066, 0.28),
        "magnetising": (2.0, 0.11),
        "core": (22.5, 0.25),
        "friction": (0.065, 0.42),
        "turns_ratio": (0.71, 0.14),
        "auxiliary_resistance": (5.2, 0.24),
        "auxiliary_leakage": (0.50, 0.30),
    },
    CAPACITOR_START: {
        "main_resistance": (0.043, 0.27),
        "leakage": (0.120, 0.19),
        "rotor_resistance": (0.054, 0.32),
        "magnetising": (2.27, 0.14),
        "core": (23.0, 0.27),
        "friction": (0.043, 0.45),
        "turns_ratio": (1.20, 0.12),
        "auxiliary_resistance": (4.1, 0.28),
        "auxiliary_leakage": (1.30, 0.25),
    },
    CAPACITOR_RUN: {
        "main_resistance": (0.059, 0.23),
        "leakage": (0.098, 0.15),
        "rotor_resistance": (0.078, 0.25),
        "magnetising": (2.75, 0.25),
        "core": (11.0, 0.30),
        "friction": (0.047, 0.45),
        "turns_ratio": (1.20, 0.14),
        "auxiliary_resistance": (1.85, 0.28),
        "auxiliary_leakage": (1.40, 0.25),
    },
    CAPACITOR_START_RUN: {
        "main_resistance": (0.046, 0.22),
        "leakage": (0.107, 0.15),
        "rotor_resistance": (0.060, 0.22),
        "magnetising": (3.05, 0.20),
        "core": (15.5, 0.25),
        "friction": (0.031, 0.42),
        "turns_ratio": (1.16, 0.12),
        "auxiliary_resistance": (2.15, 0.26),
        "auxiliary_leakage": (1.32, 0.23),
    },
}

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

LOOP_LEAKAGE = 0.4
"""Leakage of a shorted coil over its share of the winding's: it links its own slots only. From memory."""

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
