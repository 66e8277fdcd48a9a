"""Temperatures, starting time and the sideband of broken bars: what hangs on losses and torque."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np

from calc.induction_3ph.equivalent import Circuit
from calc.induction_3ph.plate import INDEX, Base
from calc.twin import Floats

if TYPE_CHECKING:
    from calc.induction_3ph.states import StateResult


def ambient_c(z: Floats) -> Floats:
    """Ambient temperature of each row. [degC]"""
    return 23.0 + 9.0 * z[:, INDEX["ambient"]]


def temperature_c(
    measure: str, z: Floats, rows: Mapping[str, Floats], machine: Circuit, state: StateResult
) -> Floats:
    """Temperature of winding, frame or bearing after hours in a state. [degC]

    Notes
    -----
    Rise over ambient in proportion to copper and fixed losses; a frame shows about half of the
    winding's rise and a bearing about 0.4 (common practice; judgement).

    """
    fixed = machine.gc * machine.flux**2 + machine.p_friction
    rotor = np.minimum(state.slip, 0.5) * np.maximum(state.power, 0.0)
    now = fixed + state.copper + rotor + machine.p_stray * np.minimum(state.power / machine.p_out, 2.0) ** 2
    rise = machine.rise_k * rows["hot"] * np.clip(now / machine.losses, 0.05, 6.0)
    share = {"winding_temperature": 0.85, "frame_temperature": 0.46, "bearing_temperature": 0.50}[measure]
    extra = rows["bearing_k"] if measure == "bearing_temperature" else 0.0
    return np.asarray(ambient_c(z) + share * rise + extra)


def sideband_db(bars: Floats, state: str, poles: int) -> Floats:
    """Current sideband at (1 - 2s) f under the line component, for a broken fraction of bars. [dB]

    Notes
    -----
    From the published bar estimate n = 2 R / (10^(N/20) + p) (R bars, p pole pairs, N the dB figure),
    solved for N, over the floor that sound rotors show. Without load the lines vanish.

    """
    floor = 10.0 ** (-60.0 / 20.0)
    if state != "loaded":
        return np.full(len(bars), -60.0)
    pairs = poles / 2.0
    line = np.where(bars > 0.0, 1.0 / np.maximum(2.0 / np.maximum(bars, 1e-4) - pairs, 2.0), 0.0)
    return np.asarray(20.0 * np.log10(np.hypot(line, floor)))


def starting_time_s(machine: Circuit, rows: Mapping[str, Floats], state: StateResult, base: Base) -> Floats:
    """Rough time to run up: inertia typical of the size over the torque at standstill. [s]"""
    torque = np.maximum(state.power - state.copper, 0.02) / np.maximum(machine.p_out, 1e-3)
    return np.asarray(0.15 * (base.power_w / 1000.0) ** 0.3 * 2.0 / np.maximum(torque, 0.1))
