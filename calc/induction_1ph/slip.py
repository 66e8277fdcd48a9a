"""The slip at which a motor carries its load, or that it stalls."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from calc.induction_1ph.circuit import Currents
from calc.induction_1ph.machine import Connected, Motor, Setting, connect, run_at
from calc.twin import Flags, Floats

# Slips looked at first, in multiples of the rated slip: the torque is nearly straight below the third.
_STEPS = np.array([0.2, 0.9, 2.0, 3.8, 6.8])
_BEYOND = 8.0  # how fast the slip goes up past the pull-out point
_LARGEST = 0.6
_STANDSTILL = 0.85
_SMALLEST = 2e-5
_REFINEMENTS = 2


@dataclass(frozen=True)
class Running:
    """A motor in one state, each of shape (rows,).

    ``carries``: the load is not above the pull-out torque. A stalled motor has slip 1.
    """

    slip: Floats
    currents: Currents
    voltage_v: Floats
    stalled: Flags
    carries: Flags


def run_loaded(machine: Motor, setting: Setting, load_w: Floats, standing: Flags) -> Running:
    """Find the slip at which the torque meets the load.

    Parameters
    ----------
    machine, setting : Motor, Setting
        Rows.
    load_w : ndarray
        Load and friction torque times synchronous speed. [W]
    standing : ndarray of bool
        Rows that do not turn whatever the torque.

    Returns
    -------
    Running
        Rows that stand at slip 1. Rows with a load above the pull-out torque slip past the
        pull-out point as the load does, up to standstill: they do not last, but somebody
        may read them.

    Notes
    -----
    A parabola through three torques of a grid of slips around the first crossing, then
    secant steps; the magnetising reactance follows the induced voltage from step to step.

    """
    connected = connect(machine, setting)
    guess = _cross(machine, connected, load_w)
    slip, slope, emf = guess.slip, guess.slope, guess.emf_v
    last_slip, last_gap = slip, np.zeros_like(slip)
    for turn in range(_REFINEMENTS):
        currents, _ = run_at(connected, slip, emf)
        emf = np.abs(currents.forward_emf)
        gap = currents.torque_w - load_w
        if turn:
            slope = _secant(slip - last_slip, gap - last_gap, slope)
        last_slip, last_gap = slip, gap
        slip = np.clip(slip - gap / slope, 0.3 * slip, np.minimum(2.0 * slip, 0.95))
    slip = np.where(guess.carried, slip, guess.past)
    stalled = standing | (slip > _STANDSTILL)
    slip = np.where(stalled, 1.0, slip)
    currents, voltage = run_at(connected, slip, emf)
    return Running(slip, currents, voltage, stalled=stalled, carries=guess.carried & ~standing)


def _secant(moved: Floats, gained: Floats, slope: Floats) -> Floats:
    """Slope of the torque between two steps where it is a sensible one, else the slope before."""
    found = gained / np.where(moved == 0.0, 1.0, moved)
    sensible = (moved != 0.0) & (found > 0.3 * slope) & (found < 3.0 * slope)
    return np.where(sensible, found, slope)


@dataclass(frozen=True)
class _Crossing:
    """First guess at the crossing: slip, slope of the torque [W], induced voltage; whether there is one.

    ``past`` is the slip beyond the pull-out point where there is none.
    """

    slip: Floats
    slope: Floats
    emf_v: Floats
    carried: Flags
    past: Floats


def _cross(machine: Motor, connected: Connected, load_w: Floats) -> _Crossing:
    """Look for the first slip of a grid at which the torque is above the load."""
    slips = np.minimum(machine.slip[:, None] * _STEPS, _LARGEST)
    currents, _ = run_at(connected.column(), slips, 0.93 * connected.supply_v[:, None])
    gaps = currents.torque_w - load_w[:, None]
    above = gaps >= 0.0
    carried = np.asarray(above.any(axis=1), dtype=np.bool_)
    index = np.argmax(above, axis=1)
    rows = np.arange(len(index))
    first = np.clip(index - 1, 0, len(_STEPS) - 3)
    a, b, c = (slips[rows, first + k] for k in range(3))
    fa, fb, fc = (gaps[rows, first + k] for k in range(3))
    # Newton's divided differences; the root of the parabola on its rising branch.
    ab = (fb - fa) / np.maximum(b - a, _SMALLEST)
    bc = (fc - fb) / np.maximum(c - b, _SMALLEST)
    bend = (bc - ab) / np.maximum(c - a, _SMALLEST)
    rise = ab + bend * (a - b)
    inside = np.maximum(rise * rise - 4.0 * bend * fa, 0.0)
    root = -2.0 * fa / np.where(rise + np.sqrt(inside) == 0.0, 1.0, rise + np.sqrt(inside))
    low = np.where(index > 0, slips[rows, np.maximum(index - 1, 0)], _SMALLEST)
    high = slips[rows, index]
    slip = np.clip(a + root, low, high)
    slope = rise + 2.0 * bend * (slip - a)
    least = 0.1 * np.maximum(np.abs(ab), load_w)
    emf = np.abs(currents.forward_emf[rows, index])
    peak = np.argmax(gaps, axis=1)
    short = -gaps[rows, peak] / np.maximum(load_w, 1e-9)
    past = np.clip(slips[rows, peak] * (1.0 + _BEYOND * short), 0.0, 1.0)
    return _Crossing(slip, np.maximum(slope, least), emf, carried, past)
