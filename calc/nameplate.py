"""What a nameplate says about itself: speeds, poles, usual values, and fields that contradict each other."""

from __future__ import annotations

from calc.typical import (
    class_efficiency,
    poles_from_speed,
    synchronous_speed_rpm,
    typical_efficiency,
    typical_locked_rotor_ratio,
    typical_power_factor,
)

__all__ = [
    "class_efficiency",
    "poles_from_speed",
    "synchronous_speed_rpm",
    "typical_efficiency",
    "typical_locked_rotor_ratio",
    "typical_power_factor",
]
