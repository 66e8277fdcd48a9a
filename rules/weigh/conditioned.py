"""A twin that already knows this very machine: what its windings read before, when they were sound.

The latents are re-centred and re-scaled to what earlier readings left of their spread, so that new
latents are standard normal again and the fit needs no change (a linear change of variables).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from calc.observe import make_seen
from calc.sheet import Reading, Value
from calc.twin import Ask, Floats, ModelError, Twin
from rules.knowledge import Knowledge
from rules.weigh.fitting import fit_modes
from rules.weigh.frame import frame
from rules.weigh.instruments import instrument_errors
from rules.weigh.view import TwinView

OWN_C = 25.0  # earlier windings are given at this temperature
_DRIFT = 0.02  # what a sound winding and two meters may differ between two visits, one sigma (judgement)


class ConditionedTwin(TwinView):
    """A twin whose latents are narrowed by what this machine read before."""

    def __init__(self, twin: Twin, mean: Floats, root: Floats) -> None:
        super().__init__(twin)
        self._mean = mean
        self._root = root

    def inner(self, z: Floats) -> Floats:
        """Latents of the plate's twin, from the narrowed ones."""
        return np.asarray(np.clip(self._mean + z @ self._root.T, -5.0, 5.0))

    def plate_misfit(self, z: Floats) -> Floats:
        """Return none: the plate's misfit went into the narrowing."""
        return np.zeros((len(z), 0))

    def model_error(self, ask: Ask) -> ModelError:
        """How far the model may be off; a winding only differs from its own past by drift."""
        error = super().model_error(ask)
        if ask.state == "isolated" and ask.measure.endswith("resistance"):
            return ModelError(min(error.level, _DRIFT), error.contrast, error.contrast_share)
        return error


def conditioned(twin: Twin, own: Mapping[str, Sequence[float]], knowledge: Knowledge) -> Twin:
    """Narrow a twin by its windings' own earlier resistances.

    Parameters
    ----------
    twin : Twin
        The twin of the plate.
    own : mapping
        Per measure the earlier values of the sound winding at 25 degC. [ohm]

    """
    meters = instrument_errors(knowledge)
    seen = []
    for measure, numbers in sorted(own.items()):
        values = tuple(Value(text=f"{x:g} ohm", number=float(x), resolution=abs(x) * 1e-3) for x in numbers)
        warm = Value(text="25 degC", number=OWN_C)
        reading = Reading(measure=measure, state="isolated", values=values, temperature=warm)
        if measure in meters and twin.covers(Ask(measure, "isolated")):
            made = make_seen(reading, twin, meters[measure])
            if made is not None:
                seen.append(made)
    if not seen:
        return twin
    fit = fit_modes(twin, twin.modes("none")[:1], frame(seen))
    covariance = fit.covariance[0].copy()
    covariance[-2:] = 0.0
    covariance[:, -2:] = 0.0
    covariance[-2:, -2:] = np.eye(2)
    mean = fit.z[0].copy()
    mean[-2:] = 0.0
    return ConditionedTwin(twin, mean, np.linalg.cholesky(covariance))
