"""Torque and current of a three-phase induction motor over its whole speed, as bands of likely machines."""

from __future__ import annotations

import math

import numpy as np

from calc.curve_bands import ROWS, SpeedCurves, band
from calc.induction_3ph.equivalent import Circuit, circuit
from calc.induction_3ph.model import InductionTwin
from calc.induction_3ph.plate import LATENTS
from calc.twin import Floats

POINTS = 61


def speed_curves(twin: InductionTwin, *, seed: int = 1) -> SpeedCurves:
    r"""Return torque and current from standstill to synchronous speed.

    Parameters
    ----------
    twin : InductionTwin
        The machine as its nameplate describes it.
    seed : int
        Of the draw of machines; the same seed gives the same curves. [1]

    Returns
    -------
    SpeedCurves
        Torque [N m] and current [A] over speed [r/min], at rated volts and frequency.

    Notes
    -----
    T circuit with the stator's Thevenin source:

    .. math:: T = \frac{3 V_{th}^2 R_2/s}{\omega_s\,[(R_{th} + R_2/s)^2 + (X_{th} + X_2)^2]}

    less friction and stray loss [1]_. Between rated slip and standstill rotor resistance and
    leakage go from their running to their locked-rotor values with :math:`\sqrt{s}`, as the
    depth of current in a bar does (judgement: a real cage may bend the curve, with a saddle
    near a third of the speed). The ends are those of the model: rated point and locked rotor.

    References
    ----------
    .. [1] A. E. Fitzgerald, C. Kingsley Jr. and S. D. Umans, "Electric Machinery",
       6th ed. New York, NY, USA: McGraw-Hill, 2003, ch. 6.

    """
    base = twin.base
    z = np.random.default_rng(seed).standard_normal((ROWS, len(LATENTS)))
    machine = circuit(base, z)
    slip = np.concatenate([np.linspace(1.0, 0.2, POINTS // 2), np.geomspace(0.2, 1e-4, POINTS - POINTS // 2)])
    power, current = _over_slip(machine, slip)
    omega = 2.0 * math.pi * base.synchronous_rpm / 60.0
    lost = (machine.p_friction + machine.p_stray)[:, None] * (1.0 - slip)
    torque = (power - lost) * base.apparent_va / omega
    rated_rpm = base.synchronous_rpm * (1.0 - base.slip)
    return SpeedCurves(
        speed_rpm=base.synchronous_rpm * (1.0 - slip),
        torque_nm=band(torque),
        current_a=band(current * base.current_a),
        rated_speed_rpm=rated_rpm,
        rated_torque_nm=base.power_w / (rated_rpm * 2.0 * math.pi / 60.0),
    )


def _over_slip(machine: Circuit, slip: Floats) -> tuple[Floats, Floats]:
    """Return air-gap power and current per unit, shape (rows, slips)."""
    column = {
        name: np.asarray(getattr(machine, name))[:, None] for name in ("r1", "x1", "x2", "xm", "gc", "r2")
    }
    locked = np.clip(
        (np.sqrt(slip) - np.sqrt(machine.slip)[:, None]) / (1.0 - np.sqrt(machine.slip)[:, None]), 0.0, 1.0
    )
    r2 = column["r2"] + (machine.r2_locked[:, None] - column["r2"]) * locked
    run = column["x1"] + column["x2"]
    leak = run + (machine.x_locked[:, None] - run) * locked
    x1, x2 = leak * column["x1"] / run, leak * column["x2"] / run
    rotor = r2 / slip + 1j * x2
    inner = column["gc"] - 1j / column["xm"] + 1.0 / rotor
    current = 1.0 / (column["r1"] + 1j * x1 + 1.0 / inner)
    rotor_current = current / inner / rotor
    return np.abs(rotor_current) ** 2 * r2 / slip, np.abs(current)
