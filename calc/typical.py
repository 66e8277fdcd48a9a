"""What a plate usually says where it is silent: typical values by size and poles. Judgement, with its sources."""

from __future__ import annotations

import math


def typical_efficiency(*, power_w: float, poles: int, frequency_hz: float) -> float:
    """Efficiency of an ordinary three-phase cage motor.

    Parameters
    ----------
    power_w : float
        Rated output. [W]
    poles : int
        Poles, not pole pairs. [1]
    frequency_hz : float
        Rated frequency. [Hz]

    Returns
    -------
    float
        Efficiency as a share of one. [1]

    Notes
    -----
    Interpolation of IEC 60034-30-1 for IE2, 4 poles, 0.12 to 200 kW, lowered by the usual age of
    machines in service; six and more poles by 1.5 points, 60 Hz raised by half a point (judgement).
    """
    size = math.log10(min(max(power_w / 1000.0, 0.12), 200.0))
    percent = 0.0278 * size**3 - 1.9247 * size**2 + 10.4395 * size + 80.9761
    percent -= 1.2 + (1.5 if poles >= 6 else 0.0) - (0.5 if frequency_hz > 55.0 else 0.0)
    return percent / 100.0


def typical_power_factor(*, power_w: float, poles: int) -> float:
    """Rated power factor of an ordinary three-phase cage motor, as a share of one (common practice)."""
    pairs = poles / 2.0
    return min(max(0.84 + 0.025 * math.log(power_w / 5000.0) - 0.025 * (pairs - 2.0), 0.55), 0.92)


def typical_locked_rotor_ratio(*, power_w: float, poles: int) -> float:
    """Locked-rotor over rated current of an ordinary three-phase cage motor.

    NEMA MG 1-12.35 over NEC table currents gives 5.4 to 7 from 1 to 200 hp; smaller motors less.
    """
    pairs = poles / 2.0
    return min(max(5.7 + 0.5 * math.log(power_w / 2000.0) - 0.25 * (pairs - 2.0), 3.6), 7.0)
