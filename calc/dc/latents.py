"""Latent quantities of a DC machine, and the machine that each row of them is.

Everything inside is per unit of rated armature volts, amperes, speed and field
current, so that the torque of ``flux * current = 1`` is rated torque in the air gap.
The plate is met by construction: losses come first, the circuit follows from them.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from calc.dc.plate import (
    COILS,
    COPPER_PER_K,
    FIELD_POWER,
    LOSS_RATIO,
    PLATE_AMBIENT_C,
    RISE_K,
    Plate,
    usual,
)
from calc.twin import Floats, standard_normal_cdf

_ALWAYS = (
    "loss",
    "rotating_share",
    "speed",
    "contact",
    "level",
    "load",
    "reaction",
    "limit",
    "ripple",
    "smoothing",
    "ambient",
    "rise",
    "frame",
    "commutator",
)
_FIELD = ("margin", "setting", "coil", "field_heat", "saturation", "residual")
_SERIES = ("series_share", "series_ohm", "saturation", "residual")


def latent_names(plate: Plate) -> tuple[str, ...]:
    """Names of the latents in order, the two severities last."""
    names = list(_ALWAYS)
    if plate.kind == "dc_compound":
        names += [*_FIELD, "series_share", "series_ohm"]
    elif plate.has_field:
        names += _FIELD
    elif plate.has_series_field:
        names += _SERIES[1:]
    if plate.voltage_spread > 0.0:
        names.append("plate_voltage")
    if plate.power_spread > 0.0:
        names.append("plate_power")
    if plate.has_field and plate.field_voltage_spread > 0.1:
        names.append("field_supply")
    if plate.source == "unknown":
        names.append("source")
    return (*names, "severity_1", "severity_2")


@dataclass(frozen=True)
class Rows:
    """Many machines at once; every array has shape (rows,).

    Volts, amperes and speeds in V, A, rpm; the rest per unit of these, temperatures in degC or K.
    """

    volt: Floats
    ampere: Floats
    rpm: Floats
    resistance: Floats  # armature circuit at 20 degC, series field included
    series_share: Floats  # of that resistance
    brush: Floats  # brush drop, of rated volts
    emf: Floats  # induced volts at rated load
    rotating: Floats  # rotational loss torque at rated speed, of air-gap torque
    load: Floats  # shaft load, of rated shaft torque
    level: Floats  # supply volts, of rated
    contact: Floats  # scatter of brush contact at an ohmmeter's current: about 1
    reaction: Floats  # flux lost to armature reaction at rated current
    bend: Floats  # saturation: larger bends earlier
    residual: Floats  # flux without any excitation, of rated
    shunt_share: Floats  # of rated ampere-turns
    limit: Floats  # starting current that starter or drive lets through
    ripple: Floats  # standard normal: how far the converter is turned back
    smoothing: Floats  # current at which conduction becomes continuous
    source: Floats  # 0 plain DC, 1 six pulses, 2 single-phase bridge
    ambient: Floats
    rise: Floats  # winding rise at rated load, K
    frame: Floats  # frame rise over winding rise
    bars: Floats  # commutator bars
    evenness: Floats  # deviation of bar drops of a sound armature, %
    field_volt: Floats  # volts of whatever feeds the field, at rated
    field_ampere: Floats  # rated field current
    field_cold: Floats  # field resistance at 20 degC, ohm
    field_series: Floats  # rheostat in series with the field, ohm
    field_held: Floats  # 1 where the field current is regulated
    field_heat: Floats  # scatter of field temperature: about 1


def rows(plate: Plate, z: Floats) -> Rows:
    """Turn latents of shape (rows, dim) into machines."""
    draw = _Draw(plate, np.clip(z, -6.0, 6.0))
    base = _base(plate, draw)
    return Rows(**base, **_armature(plate, draw, base), **_duty(plate, draw), **_field(plate, draw, base))


class _Draw:
    """Latents by name; a name that this kind does not have reads zero."""

    def __init__(self, plate: Plate, z: Floats) -> None:
        self._column = {name: i for i, name in enumerate(latent_names(plate))}
        self._z = z

    def __call__(self, name: str) -> Floats:
        index = self._column.get(name)
        return np.zeros(len(self._z)) if index is None else self._z[:, index]

    def spread(self, name: str, sigma: float, centre: float = 1.0) -> Floats:
        """Return a log-normal factor around ``centre``."""
        return np.asarray(centre * np.exp(sigma * self(name)))

    def share(self, name: str, shift: float = 0.0, scale: float = 1.0) -> Floats:
        """Return a number between 0 and 1."""
        return standard_normal_cdf(scale * self(name) + shift)


def _base(plate: Plate, draw: _Draw) -> dict[str, Floats]:
    """Rated volts, amperes and speed."""
    volt = draw.spread("plate_voltage", plate.voltage_spread, plate.voltage_v)
    return {
        "volt": volt,
        "ampere": plate.power_w * _size(plate, draw) * (1.0 + _loss(plate, draw)) / volt,
        "rpm": draw.spread("speed", plate.speed_spread, plate.speed_rpm),
    }


def _size(plate: Plate, draw: _Draw) -> Floats:
    """Output over the plate's central output: 1 unless the plate leaves the size open."""
    return draw.spread("plate_power", plate.power_spread)


def _loss(plate: Plate, draw: _Draw) -> Floats:
    """Losses over output; where the size is open they follow it."""
    usual_at_size = plate.loss_ratio * _size(plate, draw) ** LOSS_RATIO[1]
    return np.minimum(draw.spread("loss", plate.loss_spread) * usual_at_size, 1.5)


def _armature(plate: Plate, draw: _Draw, base: Mapping[str, Floats]) -> dict[str, Floats]:
    """Split the losses into copper, brushes and rotation; the circuit follows."""
    loss = _loss(plate, draw)
    lost = loss / (1.0 + loss)
    rotating = lost / (1.0 + np.exp(0.2 - 0.3 * draw("rotating_share")))
    copper = lost - rotating
    drop = np.where(base["volt"] < 60.0, 0.6, 1.9) / base["volt"]
    brush = 0.5 * copper * (1.0 - np.exp(-drop / (0.5 * copper)))
    hot = 1.0 + COPPER_PER_K * (PLATE_AMBIENT_C - 20.0 + 0.6 * RISE_K)
    emf = 1.0 - copper
    return {
        "resistance": (copper - brush) / hot,
        "series_share": _series_share(plate, draw),
        "brush": brush,
        "emf": emf,
        "rotating": rotating / emf,
        "contact": draw.spread("contact", 0.7),
        "reaction": draw.spread("reaction", 0.8, 0.007 if plate.kind == "dc_permanent_magnet" else 0.018),
        "bend": draw.spread("saturation", 0.22, 1.1),
        "residual": draw.spread("residual", 0.3, 0.033),
        "shunt_share": _shunt_share(plate, draw),
    }


def _series_share(plate: Plate, draw: _Draw) -> Floats:
    """Resistance of the series field over that of the whole armature circuit."""
    if not plate.has_series_field:
        return np.zeros(len(draw("loss")))
    usual_ratio = 0.10 if plate.kind == "dc_compound" else 0.30
    ratio = draw.spread("series_ohm", 0.75 if plate.kind == "dc_compound" else 0.4, usual_ratio)
    return np.asarray(ratio / (1.0 + ratio))


def _shunt_share(plate: Plate, draw: _Draw) -> Floats:
    """Share of the rated ampere-turns that the shunt (or separate) field gives."""
    count = len(draw("loss"))
    if plate.kind == "dc_series":
        return np.zeros(count)
    if plate.kind != "dc_compound":
        return np.ones(count)
    return np.asarray(1.0 - 0.4 * draw.share("series_share", -0.3))


def _duty(plate: Plate, draw: _Draw) -> dict[str, Floats]:
    """Supply, load, heat and commutator of the day."""
    return {
        "load": 0.15 + 0.93 * draw.share("load", 0.25, 0.85),
        "level": draw.spread("level", 0.015) * _nominal(plate),
        "limit": draw.spread("limit", 0.3, 1.9),
        "ripple": draw("ripple"),
        "smoothing": draw("smoothing"),
        "source": _source(plate, draw),
        "ambient": 22.0 + 10.0 * draw("ambient"),
        "rise": draw.spread("rise", 0.13, RISE_K),
        "frame": draw.spread("frame", 0.22, 0.45),
        "bars": draw.spread("commutator", 0.15, usual((*COILS, 0.0), plate.power_w))
        * _size(plate, draw) ** COILS[1],
        "evenness": draw.spread("commutator", 0.4, 1.3),
    }


def _nominal(plate: Plate) -> float:
    """Where a DC supply of known nominal volts is expected, over the rated volts."""
    nominal = plate.source_voltage_v
    if plate.source != "dc" or nominal is None or plate.voltage_spread > 0.0:
        return 1.0
    ratio = nominal / plate.voltage_v
    return ratio if 0.9 < ratio < 1.1 else 1.0


def _source(plate: Plate, draw: _Draw) -> Floats:
    """Number the waveform: plain DC, six pulses, single-phase bridge; unknown runs through all three."""
    known = {"dc": 0.0, "six_pulse": 1.0, "bridge": 2.0}.get(plate.source)
    if known is not None:
        return np.full(len(draw("loss")), known)
    return np.asarray(draw.share("source", -0.4, 8.0) + draw.share("source", -5.0, 8.0))


def _field(plate: Plate, draw: _Draw, base: Mapping[str, Floats]) -> dict[str, Floats]:
    """Field winding, and what stands between it and its supply.

    ``margin`` is the share of the supply volts that the hot field does not need: a rheostat
    drops it (shunt and compound), a regulator holds it back (separate field).
    """
    hot = 1.0 + COPPER_PER_K * (PLATE_AMBIENT_C - 20.0 + 0.88 * draw.spread("rise", 0.13, RISE_K))
    supply = draw.spread("field_supply", plate.field_voltage_spread, plate.field_voltage_v)
    if plate.kind != "dc_separately_excited" and plate.voltage_spread > 0.0:
        supply = supply * base["volt"] / plate.voltage_v
    current = draw.spread("coil", plate.field_current_spread, plate.field_current_a)
    if plate.field_current_spread > 0.1:
        current = current * _size(plate, draw) ** (1.0 + FIELD_POWER[1]) * plate.field_voltage_v / supply
    free = 0.36 * draw.share("margin", -0.5)
    separate = plate.kind == "dc_separately_excited"
    held = np.clip((free - 0.05) / 0.1, 0.0, 1.0) if separate else np.zeros_like(free)
    held = held * held * (3.0 - 2.0 * held)
    winding = (1.0 - free) * supply / current / hot
    return {
        "field_volt": supply * draw.spread("setting", 0.015) * np.exp(0.08 * free * draw("setting")),
        "field_ampere": current,
        "field_cold": winding,
        "field_series": np.zeros_like(free) if separate else free * supply / current,
        "field_held": held,
        "field_heat": draw.spread("field_heat", 0.13),
    }
