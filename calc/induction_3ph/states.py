"""Currents, voltages, speed and power of the three-phase motor in one state, for many rows."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from calc.induction_3ph.equivalent import Circuit
from calc.induction_3ph.network import (
    DELTA,
    FORTESCUE,
    Phasors,
    WindingFault,
    line_to_line,
    line_unit,
    solve_two,
    to_lines,
    winding_admittance,
    with_line_resistance,
)
from calc.induction_3ph.plate import INDEX, Base
from calc.twin import Floats

ROOT3 = np.sqrt(3.0)
_FLUX_STEPS = 3
# Cable and transformer together: about as much resistance as reactance (judgement).
_SOURCE_ANGLE = np.exp(1j * np.pi / 4.0)


@dataclass(frozen=True)
class Supply:
    """What arrives at the motor before any fault in a line; arrays of shape (rows,). [pu]"""

    positive: Floats
    negative: Phasors
    frequency: Floats
    regulation: Floats


@dataclass(frozen=True)
class StateResult:
    """One state of every row, per unit; ``slip`` is 1 where the shaft stands."""

    current: Floats
    voltage: Floats
    power: Floats
    apparent: Floats
    slip: Floats
    stalled: Floats
    copper: Floats


def supply(base: Base, z: Floats, rows: Mapping[str, Floats], nominal: float, inverter: bool) -> Supply:
    """Build the supply of each row: level, unbalance, frequency, regulation."""
    level = nominal * (
        1.0 + rows["level"] + np.hypot(rows["level_sd"], base.level_spread) * z[:, INDEX["level"]]
    )
    sway = 0.0008 * z[:, INDEX["frequency"]]
    frequency = 1.0 + rows["frequency_change"] + sway
    if inverter:
        frequency = np.clip(0.85 + 0.22 * z[:, INDEX["frequency"]], 0.15, 2.0)
        level = level * np.minimum(frequency, 1.0)
    level = np.maximum(level, 0.05)
    angle = z[:, INDEX["unbalance_a"]] + 1j * z[:, INDEX["unbalance_b"]]
    negative: Phasors = np.asarray(level * rows["unbalance_sd"] * angle, dtype=np.complex128)
    regulation = 0.0135 * np.exp(0.6 * z[:, INDEX["sag"]])
    return Supply(positive=level, negative=negative, frequency=frequency, regulation=regulation)


def rated_torque(circuit: Circuit) -> Floats:
    """Air-gap power at rated load, which stands for rated torque. [pu]"""
    return np.asarray((circuit.p_out + circuit.p_friction + circuit.p_stray) / (1.0 - circuit.slip))


def solve(
    circuit: Circuit,
    rows: Mapping[str, Floats],
    feed: Supply,
    torque: Floats,
    *,
    standing: Floats,
    r1: Floats,
) -> StateResult:
    """Solve one state.

    Parameters
    ----------
    circuit : Circuit
        Equivalent circuits. [pu]
    rows : mapping
        Attributes of the modes.
    feed : Supply
        Voltages and frequency.
    torque : ndarray
        Total torque demanded, over the rated air-gap torque. [pu of p_gap rated]
    standing : ndarray
        1.0 where the shaft stands in this state whatever the mode (start, stall).
    r1 : ndarray
        Stator resistance at the temperature of the state. [pu]

    Returns
    -------
    StateResult
        Arrays with one entry, or three, per row.

    Notes
    -----
    With x = R2/s and the Thevenin circuit of stator and magnetising branch, the air-gap power p
    demanded gives p x^2 + (2 p Rth - Vth^2) x + p (Rth^2 + X^2) + Vth^2 rho = 0, where rho is the
    braking of the negative sequence that a fault in series forces; no root means a stall.

    """
    scale = rows["impedance"] * np.where(rows["running_star"] > 0.5, 3.0, 1.0)
    standing_rows = np.maximum(rows["stall"], standing)
    f = feed.frequency
    # Share of rated current that the source's impedance drops in phase with the voltage: idle and per torque.
    pull = 0.28 + 0.6 * np.clip(torque / rated_torque(circuit), 0.0, 2.0)
    drop = feed.regulation * np.where(standing_rows > 0.5, 5.5, pull)
    live = 1.0 - rows["no_supply"]
    v1 = np.maximum(feed.positive * (1.0 - drop), 0.02) * live + 1e-6
    v2: Phasors = np.asarray(feed.negative * live, dtype=np.complex128)
    bars = (1.0 + rows["bars"]) / (1.0 - np.minimum(rows["bars"], 0.8))
    r1 = r1 * scale
    x1, x2 = circuit.x1 * f * scale, circuit.x2 * f * scale
    r2 = circuit.r2 * bars * scale
    xm = _magnetising(circuit, v1, f, scale) * f * scale
    gc = circuit.gc / scale
    r2_back = 0.5 * (circuit.r2 + circuit.r2_locked) * bars * scale
    x_back = 0.5 * circuit.x_locked * f * scale
    y2 = _admittance(r1, x_back, r2_back / 1.9, x_back, xm, gc)
    y0: Phasors = np.asarray(1.0 / (r1 + 1j * 0.6 * x1), dtype=np.complex128)
    slip, pulls = _slip(rows, r1, x1, r2, x2, xm, v1, v2, y0, y2, torque * f, r2_back)
    stalled = np.maximum(standing_rows, 0.0)
    slip = np.where(stalled > 0.5, 1.0, slip)
    # At standstill the leakage saturates and the bars are deep.
    r2_used = np.where(stalled > 0.5, circuit.r2_locked * bars * scale, r2)
    x_half = 0.5 * circuit.x_locked * f * scale
    x1_used = np.where(stalled > 0.5, x_half, x1)
    x2_used = np.where(stalled > 0.5, x_half, x2)
    y1 = _admittance(r1, x1_used, r2_used / slip, x2_used, xm, gc)
    y2 = np.asarray(np.where(stalled > 0.5, y1, y2), dtype=np.complex128)
    open_v1 = np.maximum(feed.positive, 0.02) * live + 1e-6
    fault = _inside(rows, r1, x1_used)
    current, voltage = _network(rows, y0, y1, y2, open_v1, v2, fault, feed.regulation)
    power = np.real((voltage * current.conj()).sum(axis=1)) / 3.0
    apparent = np.abs(voltage * current).sum(axis=1) / 3.0
    amps = _earth(rows, current, voltage)
    return StateResult(
        current=amps,
        voltage=line_to_line(_seen_voltage(rows, voltage, current)),
        power=power,
        apparent=apparent,
        slip=slip,
        stalled=np.maximum(stalled, 1.0 - pulls),
        copper=(np.abs(current) ** 2).sum(axis=1) / 3.0 * r1 + _heat(fault, v1),
    )


def _magnetising(circuit: Circuit, v1: Floats, f: Floats, scale: Floats) -> Floats:
    """Magnetising reactance at the flux of this voltage; the current grows with h = 1 - g + g phi^6.

    The flux phi, over the rated one, is what the drop of the magnetising current in the stator leakage
    leaves of the voltage: phi (1 + d h(phi)) = applied, with d = x1 / xm, by Newton's method.
    """
    g = np.minimum(circuit.saturation, 0.8)
    drop = circuit.x1 / circuit.xm
    applied = v1 / (np.sqrt(scale) * f * np.maximum(circuit.flux, 0.5))
    phi = applied / (1.0 + drop)
    for _ in range(_FLUX_STEPS):
        bent = g * np.minimum(phi, 2.0) ** 6
        gap = phi * (1.0 + drop * (1.0 - g + bent)) - applied
        phi = phi - gap / (1.0 + drop * (1.0 - g + 7.0 * bent))
    phi = np.clip(phi, 0.0, 2.0)
    return np.asarray(circuit.xm / (1.0 - g + g * phi**6))


def _admittance(r1: Floats, x1: Floats, r2: Floats, x2: Floats, xm: Floats, gc: Floats) -> Phasors:
    """Input admittance of the T circuit."""
    inner = gc - 1j / xm + 1.0 / (r2 + 1j * x2)
    return np.asarray(1.0 / (r1 + 1j * x1 + 1.0 / inner))


def _slip(
    rows: Mapping[str, Floats],
    r1: Floats,
    x1: Floats,
    r2: Floats,
    x2: Floats,
    xm: Floats,
    v1: Floats,
    v2: Phasors,
    y0: Phasors,
    y2: Phasors,
    p: Floats,
    r2_back: Floats,
) -> tuple[Floats, Floats]:
    """Slip at the demanded air-gap power, and 1.0 where the motor can pull it."""
    inside = rows["phase_r"] > 0.0
    series = np.maximum(rows["line_r"], rows["phase_r"])
    y_zero = np.where(inside & (rows["delta"] > 0.5), y0, 0.0)
    z_series = (series / 3.0) / (1.0 + (series / 3.0) * (y_zero + y2))
    rho = np.abs(z_series * y2) ** 2 * 0.5 * r2_back
    unit = line_unit(np.where(inside, rows["phase"], rows["line"]).astype(np.int64), rows["upstream"])
    unit = np.where((inside & (rows["delta"] > 0.5))[:, None], unit * DELTA.conj(), unit)
    across = 3.0 * unit[:, 0] * unit[:, 1].conj()
    v_eff = np.abs(v1 - z_series * y2 * v2 * across)
    z_a = r1 + 1j * x1 + z_series
    v_th = v_eff * xm / np.abs(z_a + 1j * xm)
    z_th = z_a * 1j * xm / (z_a + 1j * xm)
    back = np.abs(v2 * y2) ** 2 * 0.5 * r2_back
    p = p + back
    x = np.imag(z_th) + x2
    r_th = np.real(z_th)
    b = v_th**2 - 2.0 * p * r_th
    c = p * (r_th**2 + x**2) + v_th**2 * rho
    disc = b * b - 4.0 * p * c
    pulls = np.where((disc > 0.0) & (b > 0.0), 1.0, 0.0)
    root = (np.maximum(b, 1e-9) + np.sqrt(np.maximum(disc, 0.0))) / (2.0 * p)
    root = np.maximum(root, np.sqrt(r_th**2 + x**2))
    return np.minimum(r2 / root, 1.0), pulls


def _inside(rows: Mapping[str, Floats], r1: Floats, x1: Floats) -> WindingFault:
    """What is wrong inside the winding, as the network takes it."""
    turns, path = rows["turns"], rows["path_r"]
    ends = np.stack(
        [np.where(path > 0.0, rows["path_a"], 1.0), np.where(path > 0.0, rows["path_b"], 0.0)], axis=1
    )
    # Shorted turns are an ideal transformer's secondary behind their own resistance and leakage, both in
    # proportion to their number: coils in slots of their own share no leakage flux with the rest;
    # a path between phases lies behind the resistance and leakage of the turns that it spans.
    loop = (1.0 - turns) * (r1 + 0.7j * x1) + r1 * (rows["loop"] - 1.0)
    span = path + 0.5 * (rows["path_a"] ** 2 + rows["path_b"] ** 2) * (r1 + 1j * x1)
    shunt = np.where(turns > 0.0, turns / loop, np.where(path > 0.0, 1.0 / span, 0.0))
    return WindingFault(
        phase=rows["phase"].astype(np.int64),
        series=rows["phase_r"],
        shunt=np.asarray(shunt, dtype=np.complex128),
        reversed_=rows["reversed"],
        ends=ends,
    )


def _heat(fault: WindingFault, v1: Floats) -> Floats:
    """Loss in shorted turns or in a path between phases. [pu]"""
    a, b = fault.ends[:, 0], fault.ends[:, 1]
    span = a**2 + b**2 + a * b  # square of the voltage between two phases 120 degrees apart
    return np.asarray(np.real(fault.shunt) * span * v1**2 / 3.0)


def _network(
    rows: Mapping[str, Floats],
    y0: Phasors,
    y1: Phasors,
    y2: Phasors,
    v1: Floats,
    v2: Phasors,
    fault: WindingFault,
    regulation: Floats,
) -> tuple[Phasors, Phasors]:
    """Line currents and phase voltages behind the source's impedance, before any resistance in a line."""
    admittance = winding_admittance(y0, y1, y2, fault, rows["delta"])
    line = rows["line"].astype(np.int64)
    if np.any(rows["line_r"] > 0.0):
        admittance = with_line_resistance(admittance, line_unit(line, rows["upstream"]), rows["line_r"])
    volts = np.stack([v1 * ROOT3, v2 * ROOT3], axis=1)
    source = regulation * _SOURCE_ANGLE
    behind = np.eye(2) + admittance * source[:, None, None]
    amps = solve_two(behind, np.einsum("rij,rj->ri", admittance, volts))
    return to_lines(amps), to_lines(volts - source[:, None] * amps)


def _earth(rows: Mapping[str, Floats], current: Phasors, voltage: Phasors) -> Floats:
    """Line current magnitudes with what flows to earth from one phase."""
    if np.any(rows["earth_pu"] > 0.0):
        line = rows["phase"].astype(np.int64)
        leak = np.where(rows["earth_pu"] > 0.0, 0.5 / np.maximum(rows["earth_pu"], 1e-3), 0.0)
        index = np.arange(len(line))
        current = current.copy()
        current[index, line] += leak * voltage[index, line]
    return np.abs(current)


def _seen_voltage(rows: Mapping[str, Floats], voltage: Phasors, current: Phasors) -> Phasors:
    """Phase voltages where the volt meter sits: behind a resistance that lies before it."""
    place = rows["line_place"]
    before = (rows["line_r"] > 0.0) & ((place < 0.5) | (place > 2.5))
    if not np.any(before):
        return voltage
    line = rows["line"].astype(np.int64)
    unit = line_unit(line, rows["upstream"])
    through = np.einsum("ri,ri->r", unit.conj(), current @ FORTESCUE[1:].T)
    drop = np.where(before, rows["line_r"], 0.0) * through
    return np.asarray(voltage - to_lines(drop[:, None] * unit))
