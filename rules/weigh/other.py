"""A broad "other": the healthy machine's prediction with room for anything not modelled."""

from __future__ import annotations

import math

import numpy as np

from calc.twin import Floats, Twin
from rules.weigh.fitting import QUICK, fit_modes
from rules.weigh.frame import Frame, frame
from rules.weigh.laplace import Fitter

_NU = 3.0
# Room beyond the healthy spread, in transformed units: level and contrasts. Judgement.
_BROAD = {
    "line_current": (0.45, 0.25),
    "supply_voltage": (0.12, 0.05),
    "winding_resistance": (0.5, 0.3),
    "phase_resistance": (0.5, 0.3),
    "speed": (0.04, 0.0),
    "supply_frequency": (0.05, 0.0),
    "frame_temperature": (20.0, 0.0),
    "bearing_temperature": (20.0, 0.0),
    "winding_temperature": (25.0, 0.0),
    "ambient_temperature": (6.0, 0.0),
    "sideband_level": (12.0, 0.0),
    "power_factor": (0.2, 0.0),
}
_BROAD_DEFAULT = (0.45, 0.25)


def other_evidence(twin: Twin, data: Frame) -> float:
    """Log density of all readings under "other": one multivariate t around the healthy prediction."""
    mode = twin.modes("none")[:1]
    # A plate that contradicts itself speaks against every machine alike, so against this one too.
    silent = twin.plate_misfit(np.zeros((1, twin.dim))).shape[1] == 0
    plate = 0.0 if silent else float(fit_modes(twin, mode, frame([]), heat=QUICK).evidence[0])
    if not data.groups:
        return plate
    fitter = Fitter(twin, data)
    active = np.arange(twin.dim)
    y, dy, _, _ = fitter.slopes(mode, np.zeros((1, twin.dim)), active, 0.5)
    spread = np.diag(data.sigma**2 + _broad(data) ** 2) + dy[0] @ dy[0].T
    gap = data.y - y[0]
    size = len(gap)
    solved = np.linalg.solve(spread, gap)
    log_det = float(np.linalg.slogdet(spread)[1])
    distance = float(gap @ solved)
    constant = math.lgamma((_NU + size) / 2) - math.lgamma(_NU / 2) - 0.5 * size * math.log(_NU * math.pi)
    return constant + plate - 0.5 * log_det - 0.5 * (_NU + size) * math.log1p(distance / _NU)


def _broad(data: Frame) -> Floats:
    parts = []
    for one in data.seen:
        level, contrast = _BROAD.get(one.ask.measure, _BROAD_DEFAULT)
        parts.append(np.array([level] + [contrast] * (len(one.y) - 1)))
    return np.concatenate(parts)
