"""Torque and current of a single-phase induction motor over its speed, as bands of likely machines."""

from __future__ import annotations

from dataclasses import replace
from typing import Final

import numpy as np

from calc.curve_bands import ROWS, SpeedCurves, band
from calc.induction_1ph import priors
from calc.induction_1ph.machine import connect, run_at
from calc.induction_1ph.model import SinglePhaseTwin
from calc.induction_1ph.states import Attributes, Site, auxiliary_path, settle
from calc.twin import Floats

POINTS: Final = 61
SWITCH_OPENS: Final = 0.75
"""Share of the synchronous speed at which a start switch opens; 0.70 to 0.80 is usual (common practice)."""
_ROUNDS: Final = 3


def speed_curves(twin: SinglePhaseTwin, *, seed: int = 1) -> SpeedCurves:
    r"""Return torque and current from standstill to synchronous speed, run up as the motor is.

    Parameters
    ----------
    twin : SinglePhaseTwin
        The machine as its nameplate describes it, of every design that the plate allows.
    seed : int
        Of the draw of machines; the same seed gives the same curves. [1]

    Returns
    -------
    SpeedCurves
        Torque [N m] and current [A] over speed [r/min], at rated volts and frequency.

    Notes
    -----
    Double revolving field [1]_. Below ``SWITCH_OPENS`` the start winding or capacitor is in
    circuit, above it is not; a motor without a switch keeps its run capacitor throughout.
    Between rated slip and standstill rotor resistance and leakage go from their running to
    their locked-rotor values with :math:`\sqrt{s}` (judgement). The torque pulsates at twice
    line frequency; drawn is its mean.

    References
    ----------
    .. [1] A. E. Fitzgerald, C. Kingsley Jr. and S. D. Umans, "Electric Machinery",
       6th ed. New York, NY, USA: McGraw-Hill, 2003, ch. 9.

    """
    rng = np.random.default_rng(seed)
    z = rng.standard_normal((ROWS, twin.dim))
    attributes = {name: np.full(ROWS, value) for name, value in twin.defaults.items()}
    share = np.maximum(twin.weights, 0.0) / np.maximum(twin.weights, 0.0).sum()
    attributes["design"] = rng.choice(len(share), size=ROWS, p=share).astype(np.float64)
    site = twin.site(z, attributes)
    slips = np.concatenate([np.linspace(1.0, 0.2, POINTS // 2), np.linspace(0.19, 0.0, POINTS - POINTS // 2)])
    columns = [_at(site, attributes, slip=float(slip)) for slip in slips]
    torque_w, current_a = (np.stack(part, axis=1) for part in zip(*columns, strict=True))
    plate = twin.plate
    synchronous_rpm = plate.synchronous_rpm
    omega = synchronous_rpm * 2.0 * np.pi / 60.0
    rated_rpm = synchronous_rpm * (1.0 - float(np.median(site.machine.slip)))
    return SpeedCurves(
        speed_rpm=synchronous_rpm * (1.0 - slips),
        torque_nm=band(torque_w / omega),
        current_a=band(current_a),
        rated_speed_rpm=rated_rpm,
        rated_torque_nm=plate.power_w / (rated_rpm * 2.0 * np.pi / 60.0),
        switch_rpm=SWITCH_OPENS * synchronous_rpm if float(np.mean(site.has_switch)) > 0.5 else None,
    )


def _at(site: Site, attributes: Attributes, *, slip: float) -> tuple[Floats, Floats]:
    """Return shaft torque in synchronous watts, and line current [A], at one slip; each (rows,)."""
    at_start = 1.0 - slip < SWITCH_OPENS
    path, _ = auxiliary_path(site, attributes, at_start=at_start)
    machine = site.machine
    rated = np.sqrt(np.minimum(machine.slip, 0.5))
    locked = np.clip((np.sqrt(slip) - rated) / (1.0 - rated), 0.0, 1.0)
    warm = site.ambient_c + site.rise_k
    setting = replace(
        settle(site, attributes, warm_c=warm, path=path),
        supply_v=machine.voltage_v,
        source_ohm=np.zeros_like(machine.voltage_v),
        leakage=1.0 + (site.lock - 1.0) * locked,
        rotor_rise=1.0 + (priors.LOCKED_ROTOR_RESISTANCE - 1.0) * locked,
    )
    connected = connect(machine, setting)
    everywhere = np.full_like(machine.voltage_v, slip)
    emf = priors.RATED_EMF * machine.voltage_v
    for _ in range(_ROUNDS):
        currents, _volt = run_at(connected, everywhere, emf)
        emf = np.abs(currents.forward_emf)
    return currents.torque_w - machine.friction_w, np.abs(currents.main + currents.auxiliary)
