"""The slip at which a motor carries its load, or that it stalls."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from calc.induction_1ph.circuit import Currents
from calc.induction_1ph.machine import Motor, Setting, run_at
from calc.twin import Flags, Floats

# Slips looked at first, in multiples of the rated slip: the torque is nearly straight below the third.
_STEPS = np.array([0.12, 0.5, 1.0, 1.7, 2.8, 4.5, 7.5])
_LARGEST = 0.6
_SMALLEST = 2e-5
_REFINEMENTS = 3


@dataclass(frozen=True)
class Running:
    """A motor in one state, each of shape (rows,). A stalled one has slip 1."""

    slip: Floats
    currents: Currents
    voltage_v: Floats
    stalled: Flags


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
        Rows whose load is above the pull-out torque, or that stand, at slip 1.

    Notes
    -----
    The first crossing on a grid of slips, then regula falsi with the Illinois weight; the
    magnetising reactance follows the induced voltage from step to step.

    """
    low, high, low_gap, high_gap, carried = _bracket(machine, setting, load_w)
    stalled = standing | ~carried
    emf = 0.93 * setting.supply_v
    slip = high
    for _ in range(_REFINEMENTS):
        slip = high - high_gap * (high - low) / np.where(high_gap == low_gap, 1.0, high_gap - low_gap)
        currents, _ = run_at(machine, setting, slip, emf)
        emf = np.abs(currents.forward_emf)
        gap = currents.torque_w - load_w
        above = gap >= 0.0
        low_gap = np.where(above, 0.5 * low_gap, gap)
        high_gap = np.where(above, gap, 0.5 * high_gap)
        low, high = np.where(above, low, slip), np.where(above, slip, high)
    slip = np.where(stalled, 1.0, slip)
    currents, voltage = run_at(machine, setting, slip, emf)
    return Running(slip=slip, currents=currents, voltage_v=voltage, stalled=stalled)


def _bracket(
    machine: Motor, setting: Setting, load_w: Floats
) -> tuple[Floats, Floats, Floats, Floats, Flags]:
    """Two slips around the load with their torque gaps, and whether there is a crossing at all."""
    slips = np.minimum(machine.slip[:, None] * _STEPS, _LARGEST)
    emf = 0.93 * setting.supply_v[:, None]
    currents, _ = run_at(machine.column(), setting.column(), slips, emf)
    gaps = currents.torque_w - load_w[:, None]
    carried = np.asarray((gaps >= 0.0).any(axis=1), dtype=np.bool_)
    index = np.argmax(gaps >= 0.0, axis=1)
    rows = np.arange(len(index))
    before = np.maximum(index - 1, 0)
    high, high_gap = slips[rows, index], gaps[rows, index]
    start = currents.torque_w[:, 0] - load_w
    low = np.where(index > 0, slips[rows, before], _SMALLEST)
    low_gap = np.where(index > 0, gaps[rows, before], np.minimum(start, 0.0) - load_w - 1e-9)
    return low, high, low_gap, high_gap, carried
