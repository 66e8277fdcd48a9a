"""Ripple of the armature volts by what feeds them, firing angle and missing pulses.

Closed forms for continuous conduction (Mohan, Undeland, Robbins, Power Electronics, ch. 6):
six pulses ``V = 1.35 V_LL cos a``, single-phase bridge ``V = 0.9 V cos a``.
"""

from __future__ import annotations

import math

import numpy as np

from calc.twin import Floats

# Rms ripple over mean volts with pulses missing: about 57 % on six pulses, half-wave on a bridge.
MISSING_SIX_PULSE = 0.57
MISSING_BRIDGE = 1.25
PLAIN_DC = 0.0065  # generator, battery or bus; below 2 %


def six_pulse_ripple(output: Floats) -> Floats:
    """Rms ripple over mean volts of a six-pulse bridge at ``output`` of its full mean volts."""
    cosine = np.clip(output, 0.15, 1.0)
    double = 2.0 * cosine * cosine - 1.0
    square = 0.5 + 3.0 * math.sqrt(3.0) / (4.0 * math.pi) * double
    return np.sqrt(np.maximum(square / ((9.0 / math.pi**2) * cosine**2) - 1.0, 1e-6))


def bridge_ripple(output: Floats) -> Floats:
    """Rms ripple over mean volts of a single-phase bridge at ``output`` of its full mean volts."""
    cosine = np.clip(output, 0.15, 1.0)
    full = 2.0 * math.sqrt(2.0) / math.pi
    return np.sqrt(1.0 / (full * cosine) ** 2 - 1.0)


def ripple_share(
    *,
    source: Floats,
    ripple: Floats,
    smoothing: Floats,
    volts: Floats,
    current: Floats,
    lost: Floats,
    commutator: Floats,
) -> Floats:
    """Rms ripple over mean armature volts.

    Parameters
    ----------
    source : ndarray
        0 plain DC, 1 six pulses, 2 single-phase bridge; between them it changes evenly in the logarithm.
    ripple, smoothing : ndarray
        Standard normal latents: how much the converter has in reserve, and how early conduction breaks up.
    volts, current : ndarray
        Mean armature volts and current, of rated.
    lost : ndarray
        1 where pulses are missing, else 0.
    commutator : ndarray
        Ripple that the commutator itself adds, of rated volts.

    """
    volts = np.maximum(volts, 0.02)
    reserve = 0.5 + 0.5 * np.tanh(0.8 * ripple)
    six = six_pulse_ripple((0.73 + 0.21 * reserve) * volts) * _broken(current, 0.03 * np.exp(0.5 * smoothing))
    bridge = bridge_ripple((0.86 + 0.14 * reserve) * volts) * _broken(
        current, 0.13 * np.exp(0.35 * smoothing)
    )
    six = np.where(lost > 0.5, MISSING_SIX_PULSE * np.exp(0.15 * ripple), six)
    bridge = np.where(lost > 0.5, MISSING_BRIDGE * np.exp(0.1 * ripple), bridge)
    plain = PLAIN_DC * np.exp(0.55 * ripple)
    first, second = np.clip(source, 0.0, 1.0), np.clip(source - 1.0, 0.0, 1.0)
    level = np.log(plain) + first * np.log(six / plain) + second * np.log(bridge / six)
    return np.hypot(np.exp(level), commutator / volts)


def _broken(current: Floats, border: Floats) -> Floats:
    """Share of the ripple that is left when little current makes conduction break up."""
    return np.asarray(1.0 - np.exp(-np.maximum(current, 0.01) / border))


def ripple_frequency(*, source: Floats, mains_hz: float, lost: Floats, bars_per_second: Floats) -> Floats:
    """Main ripple frequency, Hz: six or two per mains period, one with pulses missing; bars on plain DC."""
    pulses = np.where(lost > 0.5, 1.0, np.where(source > 1.5, 2.0, 6.0))
    return np.where(source < 0.5, np.maximum(bars_per_second, 1.0), pulses * mains_hz)
