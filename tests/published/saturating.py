"""A saturating three-phase motor as differential equations, written for the checks without calc/.

Space vectors in a frame that turns with the supply, per winding of the stator. The main flux ``psi``
needs the current ``psi / L (1 - g + g (psi / psi0)^6)``: a share ``g`` grows with the sixth power beyond
the flux ``psi0`` at rated load. The shaft is free: ``J dw/dt = T - T_load``.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from tests.published.circuits import Published

INERTIA_S = 0.4  # kinetic energy of the shaft over rated gap power: enough that it does not hunt
SECONDS = 20.0


@dataclass(frozen=True)
class Settled:
    """Winding current, r.m.s. A; slip; air-gap power at synchronous speed, W; induced voltage, V r.m.s."""

    winding_a: float
    slip: float
    gap_w: float
    induced_v: float


def run_up(
    machine: Published,
    *,
    winding_v: float,
    load_w: float,
    share: float,
    scale: float = 3.0,
    seconds: float = SECONDS,
) -> Settled:
    """Run from near synchronous speed to where it settles.

    Every winding has ``scale`` times the star phase's ohms of the published circuit (3: a delta's own
    winding) and gets ``winding_v``; ``load_w`` is the load torque times synchronous speed, ``share``
    the saturating share of the magnetising current at rated flux.
    """
    w = 2.0 * math.pi * machine.frequency_hz
    r1, r2 = scale * machine.r1, scale * machine.r2
    l1, l2, lm = (scale * x / w for x in (machine.x1, machine.x2, machine.xm))
    rated_flux = math.sqrt(2.0) * math.sqrt(scale) * machine.induced_v(machine.slip) / w
    volts = math.sqrt(2.0) * winding_v
    energy = 2.0 * INERTIA_S * machine.gap_w(machine.slip)

    def growth(flux: float) -> float:
        return 1.0 - share + share * (flux / rated_flux) ** 6

    def main_flux(drive: complex) -> complex:
        """Main flux from psi1/l1 + psi2/l2 = psi (1/l1 + 1/l2 + growth/lm)."""
        push = abs(drive)
        if push == 0.0:
            return 0j
        leak = 1.0 / l1 + 1.0 / l2
        size = brentq(lambda f: f * (leak + growth(f) / lm) - push, 0.0, push / leak, xtol=1e-12)
        return size * drive / push

    def parts(y: np.ndarray) -> tuple[complex, complex, complex, float]:
        psi1, psi2 = complex(y[0], y[1]), complex(y[2], y[3])
        main = main_flux(psi1 / l1 + psi2 / l2)
        i1, i2 = (psi1 - main) / l1, (psi2 - main) / l2
        return main, i1, i2, 1.5 * w * (psi1.conjugate() * i1).imag

    def slope(_: float, y: np.ndarray) -> list[float]:
        psi1, psi2, speed = complex(y[0], y[1]), complex(y[2], y[3]), y[4]
        _, i1, i2, gap_w = parts(y)
        d1 = volts - r1 * i1 - 1j * w * psi1
        d2 = -r2 * i2 - 1j * w * (1.0 - speed) * psi2
        return [d1.real, d1.imag, d2.real, d2.imag, (gap_w - load_w) / energy]

    start = [0.0, -volts / w, 0.0, -volts / w, 0.99]
    end = solve_ivp(slope, (0.0, seconds), start, method="LSODA", rtol=1e-8, atol=1e-9).y[:, -1]
    main, i1, _, gap_w = parts(end)
    return Settled(abs(i1) / math.sqrt(2.0), 1.0 - float(end[4]), gap_w, w * abs(main) / math.sqrt(2.0))
