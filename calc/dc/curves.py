"""Back-EMF of a DC machine over its speed, as a band of likely machines."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from calc.curve_bands import PERCENTILES, ROWS
from calc.dc.model import DcTwin
from calc.twin import Ask, Floats

POINTS = 31
BEYOND = 1.15
"""The highest speed that is drawn, over the speed in the state."""


@dataclass(frozen=True)
class EmfCurve:
    """Volts induced in the armature over speed, at the flux of one state; one entry per speed."""

    speed_rpm: Floats
    emf_v: tuple[Floats, Floats, Floats]
    """Low, middle and high."""
    at_speed_rpm: float
    at_emf_v: float
    """Speed and back-EMF in the state itself, of the middle machine."""


def emf_curve(twin: DcTwin, *, state: str = "loaded", seed: int = 1) -> EmfCurve | None:
    r"""Return the back-EMF from standstill to a little over the speed of a state.

    Parameters
    ----------
    twin : DcTwin
        The machine as its nameplate describes it.
    state : str
        Of ``calc.dc.states.STATES``; its flux holds for the whole line.
    seed : int
        Of the draw of machines; the same seed gives the same curve. [1]

    Returns
    -------
    EmfCurve or None
        Back-EMF [V] over speed [r/min]; None where the machine does not turn in that state.

    Notes
    -----
    At constant flux :math:`E = k\,\Phi\,n`: a straight line through zero [1]_. A field that has
    weakened lies below it, and a series machine has another line for each current.

    References
    ----------
    .. [1] A. E. Fitzgerald, C. Kingsley Jr. and S. D. Umans, "Electric Machinery",
       6th ed. New York, NY, USA: McGraw-Hill, 2003, ch. 7.

    """
    z = np.random.default_rng(seed).standard_normal((ROWS, twin.dim))
    attributes = {name: np.full(ROWS, value) for name, value in twin.defaults.items()}
    emf = twin.back_emf(z, attributes, state=state)
    speed = twin.predict(z, attributes, [Ask("speed", state)])[0][:, 0]
    turns = np.isfinite(emf) & np.isfinite(speed) & (speed > 0.0)
    if not turns.any():
        return None
    slope = emf[turns] / speed[turns]
    middle = float(np.median(speed[turns]))
    grid = np.linspace(0.0, BEYOND * middle, POINTS)
    low, mid, high = (np.percentile(slope, share) * grid for share in PERCENTILES)
    return EmfCurve(grid, (low, mid, high), middle, float(np.median(slope)) * middle)
