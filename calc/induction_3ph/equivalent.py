"""From the plate as numbers to equivalent circuits: closed form, one circuit per row of latents."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from calc.induction_3ph.plate import INDEX, Base
from calc.twin import Floats


@dataclass(frozen=True)
class Circuit:
    """Equivalent circuits, one per row, per unit of the plate; resistances hot at rated load."""

    r1: Floats
    x1: Floats
    r2: Floats
    x2: Floats
    xm: Floats
    gc: Floats
    saturation: Floats
    r2_locked: Floats
    x_locked: Floats
    p_out: Floats
    p_friction: Floats
    p_stray: Floats
    losses: Floats
    slip: Floats
    flux: Floats
    rise_k: Floats


def circuit(base: Base, z: Floats) -> Circuit:
    """Invert the plate for each row of latents.

    Parameters
    ----------
    base : Base
        The plate as numbers.
    z : ndarray
        Latents, shape (rows, len(LATENTS)).

    Returns
    -------
    Circuit
        Arrays of shape (rows,), per unit.

    Notes
    -----
    Power balance at rated load: P_in = P_out / eta; P_gap = (P_out + P_fw + P_stray) / (1 - s);
    rotor copper s P_gap; stator copper and core share the rest. R2/s follows from the air-gap
    power by the quadratic of the series rotor branch, X_m from the reactive power left over.
    The iterative nameplate methods reach the same circuit; this one needs no iteration.

    """
    column = {name: z[:, place] for name, place in INDEX.items()}
    size = np.exp(base.size_spread * column["size"])
    current = size * np.exp(base.current_spread * column["current"])
    p_out = size * np.exp(base.output_spread * column["size"]) * base.power_w / base.apparent_va
    losses = p_out * base.loss_share * np.exp(base.loss_spread * column["losses"])
    p_in = p_out + losses
    current = np.maximum(current, p_in / 0.955)
    slip = np.minimum(base.slip * np.exp(base.slip_spread * column["slip"]), 0.35)
    friction = losses * 0.11 * np.exp(0.30 * column["friction_share"])
    stray = losses * 0.09
    p_gap = (p_out + friction + stray) / (1.0 - slip)
    # What is left for stator copper and core; a plate whose slip eats all the losses keeps a tenth of them.
    rest = losses - slip * p_gap - friction - stray
    rest = 0.5 * (rest + np.sqrt(rest * rest + (0.14 * losses) ** 2))
    # Small machines have the larger share in copper, large ones in the core (judgement).
    lean = 0.18 - 0.16 * np.log(base.power_w / 6000.0)
    core_share = 1.0 / (1.0 + np.exp(lean - 0.42 * column["core_share"]))
    r1 = rest * (1.0 - core_share) / current**2 * np.exp(0.06 * column["resistance"])
    core = rest * core_share
    x_locked, r2_locked, x_run = _leakage(base, column, slip, p_gap, current, r1, size)
    x1 = 0.5 * x_run
    x2 = x_run - x1
    angle = np.arccos(np.clip(p_in / current, 0.2, 0.999))
    phasor = current * np.exp(-1j * angle)
    e_gap = 1.0 - phasor * (r1 + 1j * x1)
    flux = np.abs(e_gap)
    r2 = slip * _rotor_ratio(flux, p_gap, x2)
    rotor = e_gap / (r2 / slip + 1j * x2)
    reactive = np.imag(e_gap * np.conj(phasor - rotor))
    xm = flux**2 / np.maximum(reactive, 0.12 * size)
    return Circuit(
        r1=r1,
        x1=x1,
        r2=r2,
        x2=x2,
        xm=xm,
        gc=core / flux**2,
        saturation=0.10 * np.exp(0.7 * column["saturation"]),
        r2_locked=r2_locked,
        x_locked=x_locked,
        p_out=p_out,
        p_friction=friction,
        p_stray=stray,
        losses=losses,
        slip=slip,
        flux=flux,
        rise_k=base.rise_k * np.exp(0.22 * column["rise"]),
    )


def _leakage(
    base: Base,
    column: dict[str, Floats],
    slip: Floats,
    p_gap: Floats,
    current: Floats,
    r1: Floats,
    size: Floats,
) -> tuple[Floats, Floats, Floats]:
    """Locked leakage reactance and rotor resistance, and the unsaturated leakage when running."""
    ratio = base.locked_ratio * np.exp(base.locked_spread * column["locked"])
    impedance = 1.0 / (ratio * size)
    r2_hot = slip * p_gap / current**2
    r2_locked = r2_hot * (1.0 + 0.6 * np.exp(0.6 * column["deep_bar"]))
    resistive = np.minimum(0.85 * r1 + r2_locked, 0.85 * impedance)
    r2_locked = np.maximum(resistive - 0.85 * r1, 0.1 * resistive)
    x_locked = np.sqrt(impedance**2 - resistive**2)
    x_run = x_locked * (1.0 + 0.25 * np.exp(0.6 * column["leakage"]))
    return x_locked, r2_locked, np.minimum(x_run, 0.45 / size)


def _rotor_ratio(flux: Floats, p_gap: Floats, x2: Floats) -> Floats:
    """R2/s that takes the air-gap power at this flux: the larger root of the series branch."""
    half = flux**2 / (2.0 * p_gap)
    return np.asarray(half * (1.0 + np.sqrt(np.maximum(1.0 - (x2 / half) ** 2, 0.0))))
