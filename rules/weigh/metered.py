"""A twin read with real meters: each meter's gain error is one latent, shared by all that it reads.

So a difference between two readings of one meter (coupled and uncoupled, hot and cold, leads rotated)
is free of its gain error, as it is for whoever takes it.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np

from calc.observe import InstrumentError
from calc.quantities import MEASURES
from calc.twin import Ask, Floats, Twin
from rules.weigh.settings import weighing
from rules.weigh.view import TwinView

# One meter reads all of a dimension: the clamp, the voltmeter, the ohmmeter.
_METERS = ("current", "voltage", "resistance")


class MeteredTwin(TwinView):
    """A twin whose first latents are the gain errors of the meters."""

    def __init__(self, twin: Twin, meters: Mapping[str, InstrumentError]) -> None:
        super().__init__(twin)
        self._last: tuple[Floats, Floats] | None = None
        share = math.sqrt(weighing().shared_gain)
        self._gain = {
            name: share * meter.share
            for name, meter in meters.items()
            if name in MEASURES and MEASURES[name].dimension in _METERS
        }

    @property
    def dim(self) -> int:
        """Number of latents: the meters', then the machine's."""
        return super().dim + len(_METERS)

    def inner(self, z: Floats) -> Floats:
        """Latents of the machine alone: one array for the same rows, so that the twin knows them again."""
        last = self._last
        if last is None or last[0] is not z:
            last = self._last = (z, z[:, len(_METERS) :])
        return last[1]

    def predict(self, z: Floats, attributes: Mapping[str, Floats], asks: Sequence[Ask]) -> list[Floats]:
        """Predict what the meters show: one array of shape (rows, arity) per ask."""
        answers = super().predict(z, attributes, asks)
        return [self._shown(ask, answer, z) for ask, answer in zip(asks, answers, strict=True)]

    def _shown(self, ask: Ask, answer: Floats, z: Floats) -> Floats:
        gain = self._gain.get(ask.measure, 0.0)
        if gain == 0.0:
            return answer
        place = _METERS.index(MEASURES[ask.measure].dimension)
        return np.asarray(answer * np.exp(gain * z[:, place])[:, None])


def repeatability(meters: Mapping[str, InstrumentError]) -> dict[str, InstrumentError]:
    """What is left of each meter's error when its gain is taken out."""
    left = math.sqrt(1.0 - weighing().shared_gain)
    return {
        name: replace(meter, share=left * meter.share, contrast=_contrast(meter))
        if name in MEASURES and MEASURES[name].dimension in _METERS
        else meter
        for name, meter in meters.items()
    }


def _contrast(meter: InstrumentError) -> float:
    return meter.share if meter.contrast is None else meter.contrast
