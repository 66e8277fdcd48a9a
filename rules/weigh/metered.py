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
from calc.twin import Ask, Floats, Mode, ModelError, Transform, Twin
from rules.weigh.settings import weighing

# One meter reads all of a dimension: the clamp, the voltmeter, the ohmmeter.
_METERS = ("current", "voltage", "resistance")


class MeteredTwin:
    """A twin whose first latents are the gain errors of the meters."""

    def __init__(self, twin: Twin, meters: Mapping[str, InstrumentError]) -> None:
        self._twin = twin
        self._last: tuple[Floats, Floats] | None = None
        share = math.sqrt(weighing().shared_gain)
        self._gain = {
            name: share * meter.share
            for name, meter in meters.items()
            if name in MEASURES and MEASURES[name].dimension in _METERS
        }

    @property
    def kind(self) -> str:
        """Machine kind."""
        return self._twin.kind

    @property
    def dim(self) -> int:
        """Number of latents: the meters', then the machine's."""
        return self._twin.dim + len(_METERS)

    @property
    def defaults(self) -> Mapping[str, float]:
        """Attributes of a healthy machine."""
        return self._twin.defaults

    @property
    def effects(self) -> tuple[str, ...]:
        """Effects that :meth:`modes` knows."""
        return self._twin.effects

    def modes(self, effect: str, severity: tuple[float, float] | None = None) -> tuple[Mode, ...]:
        """Enumerate the discrete ways of an effect on this machine."""
        return self._twin.modes(effect, severity)

    def covers(self, ask: Ask) -> bool:
        """Whether the model predicts this reading."""
        return self._twin.covers(ask)

    def _machine(self, z: Floats) -> Floats:
        """Latents of the machine alone: one array for the same rows, so that the twin knows them again."""
        last = self._last
        if last is None or last[0] is not z:
            last = self._last = (z, z[:, len(_METERS) :])
        return last[1]

    def predict(self, z: Floats, attributes: Mapping[str, Floats], asks: Sequence[Ask]) -> list[Floats]:
        """Predict what the meters show: one array of shape (rows, arity) per ask."""
        answers = self._twin.predict(self._machine(z), attributes, asks)
        return [self._shown(ask, answer, z) for ask, answer in zip(asks, answers, strict=True)]

    def _shown(self, ask: Ask, answer: Floats, z: Floats) -> Floats:
        gain = self._gain.get(ask.measure, 0.0)
        if gain == 0.0:
            return answer
        place = _METERS.index(MEASURES[ask.measure].dimension)
        return np.asarray(answer * np.exp(gain * z[:, place])[:, None])

    def plate_misfit(self, z: Floats) -> Floats:
        """Plate fields that the latents do not meet by construction, in sigmas: (rows, n)."""
        return self._twin.plate_misfit(self._machine(z))

    def possible(self, z: Floats, attributes: Mapping[str, Floats]) -> Mapping[str, Floats]:
        """For each state the chance that such a machine can be in it."""
        return self._twin.possible(self._machine(z), attributes)

    def transform(self, measure: str) -> Transform:
        """How a measure enters the comparison on this machine."""
        return self._twin.transform(measure)

    def model_error(self, ask: Ask) -> ModelError:
        """How far the model may be off for this reading."""
        return self._twin.model_error(ask)


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
