"""Predictions for readings that are not in the frame: transformed mean and slope at given latents."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from calc.formatting import in_unit
from calc.observe import InstrumentError, Seen
from calc.quantities import MEASURES, arity
from calc.twin import Ask, Floats, Mode, ModelError, Transform, Twin
from rules.weigh.frame import frame
from rules.weigh.laplace import Fitter


@dataclass(frozen=True)
class Outlook:
    """What modes say about one reading: means (modes, m), slopes (modes, m, dim), own error (m,)."""

    ask: Ask
    mean: Floats
    slope: Floats
    error: Floats
    transform: Transform
    blank: Seen


def own_error(
    error: ModelError, transform: Transform, meter: InstrumentError, typical: float, count: int
) -> Floats:
    """One sigma of model and meter for a reading of a typical size, level and contrasts."""
    if transform.kind == "linear":
        worth = 1.0 / transform.scale
        meter_level = math.hypot(meter.share * abs(typical), meter.floor) * worth
        gain = meter.contrast if meter.contrast is not None else meter.share
        meter_contrast = math.hypot(gain * abs(typical), meter.floor) * worth
    else:
        floor = meter.floor / max(abs(typical), 1e-12)
        meter_level = math.hypot(meter.share, min(floor, 2.0))
        gain = meter.contrast if meter.contrast is not None else meter.share
        meter_contrast = math.hypot(gain, min(floor, 2.0))
    level = math.hypot(error.level, meter_level)
    contrast = math.hypot(error.contrast, meter_contrast)
    return np.array([level] + [contrast] * (count - 1))


def outlooks(
    twin: Twin,
    modes: Sequence[Mode],
    z: Floats,
    asks: Sequence[Ask],
    meters: dict[str, InstrumentError],
) -> list[Outlook]:
    """Predict readings at the latents of each mode, with slopes by every latent.

    Parameters
    ----------
    modes, z : sequence of Mode, ndarray
        One row of latents per mode, (modes, dim).
    asks : sequence of Ask
        Readings the twin covers.

    """
    if not asks:
        return []
    blank = [_blank(twin, ask) for ask in asks]
    fitter = Fitter(twin, frame(blank))
    y, dy, _, _ = fitter.slopes(modes, z, np.arange(twin.dim), 0.12)
    found = []
    for one, group in zip(blank, fitter.data.groups, strict=True):
        meter = meters.get(one.ask.measure, InstrumentError(share=0.03))
        typical = untransform(y[:1, group.start], one.transform)[0]
        error = own_error(twin.model_error(one.ask), one.transform, meter, typical, len(one.y))
        found.append(Outlook(one.ask, y[:, group], dy[:, group], error, one.transform, one))
    return found


def _blank(twin: Twin, ask: Ask) -> Seen:
    count = arity(ask.measure, twin.kind)
    return Seen(
        ask=ask,
        y=np.zeros(count),
        sigma=np.ones(count),
        transform=twin.transform(ask.measure),
        present=tuple(range(count)),
    )


def untransform(level: Floats, transform: Transform) -> Floats:
    """From a transformed level back to the inner unit."""
    if transform.kind == "linear":
        return np.asarray(level * transform.scale)
    return np.asarray(np.maximum(np.exp(np.clip(level, -60.0, 60.0)) - transform.floor, 0.0))


def in_usual_unit(measure: str, number: float) -> float:
    """From the inner unit to the usual unit of a measure."""
    entry = MEASURES[measure]
    return in_unit(number, dimension=entry.dimension, unit=entry.usual_unit)
