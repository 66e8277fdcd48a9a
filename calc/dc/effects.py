"""Effects of faults on a DC machine: attributes of the model, and the discrete ways each shows.

Severity meanings are a contract with the fault knowledge; the ranges here hold where it gives none.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Final

from calc.dc.plate import Plate
from calc.twin import Mode, Severity

HEALTHY: Final[Mapping[str, float]] = {
    "volts_below": 0.0,  # fraction that the armature volts are below their level
    "volts_above": 0.0,
    "pulses_lost": 0.0,  # 1: pulses of the converter are missing
    "volts_lost": 0.0,  # fraction of the mean volts that went with them
    "armature_open": 0.0,  # 1: the armature circuit conducts nowhere
    "armature_reads_open": 0.0,  # 1: and the break lies between the armature terminals
    "interpole_open": 0.0,
    "series_open": 0.0,
    "field_open": 0.0,
    "field_unfed": 0.0,  # 1: no volts come to the field terminals
    "field_shorted": 0.0,  # fraction of the field's turns
    "short_poles": 0.25,  # share of the poles on which they are
    "magnets_lost": 0.0,  # fraction of the flux
    "coil_shorted": 0.0,  # fraction of the armature's turns
    "coil_open": 0.0,  # rise of the armature's resistance
    "brush_ohm": 0.0,  # added brush resistance, of rated V over A
    "unevenness": 0.0,  # scatter of contact from bar to bar, %
    "off_neutral": 0.0,  # armature ampere-turns that act on the field's axis
    "shift_sense": 1.0,
    "series_sense": 1.0,
    "torque": 0.0,  # load of rated torque; 0: the load of the day
    "stalled": 0.0,
    "seized": 0.0,  # 1: stalled even uncoupled
    "at_limit": 0.0,  # 1: the load holds the drive at its current limit
    "heat": 1.0,  # factor on the temperature rise
    "friction": 0.0,  # of rated torque
}


@dataclass(frozen=True)
class Effect:
    """An effect: the attribute that its severity sets, its usual range, and how it shows."""

    attribute: str | None
    low: float
    high: float
    ways: Callable[[Plate], tuple[tuple[str, float, dict[str, float]], ...]]


def _one(**fixed: float) -> Callable[[Plate], tuple[tuple[str, float, dict[str, float]], ...]]:
    return lambda plate: (("", 1.0, fixed),)


def _ways(
    *ways: tuple[str, float, dict[str, float]],
) -> Callable[[Plate], tuple[tuple[str, float, dict[str, float]], ...]]:
    return lambda plate: ways


def _open_armature(plate: Plate) -> tuple[tuple[str, float, dict[str, float]], ...]:
    ways: tuple[tuple[str, float, dict[str, float]], ...] = (
        ("at the brushes", 0.8, {"armature_open": 1.0, "armature_reads_open": 1.0}),
        ("in the interpoles", 0.1, {"armature_open": 1.0, "armature_reads_open": 1.0, "interpole_open": 1.0}),
    )
    if plate.has_series_field:
        ways += (("in the series field", 0.1, {"armature_open": 1.0, "series_open": 1.0}),)
    return ways


_AT_LIMIT: Final = ("drive at its current limit", 0.1, {"at_limit": 1.0})
_EFFECTS: Final[Mapping[str, Effect]] = {
    "none": Effect(None, 0.0, 0.0, _one()),
    "low_voltage": Effect(
        "volts_below", 0.08, 0.35, _ways(("", 0.95, {}), ("standing", 0.05, {"stalled": 1.0}))
    ),
    "high_voltage": Effect("volts_above", 0.08, 0.25, _one()),
    "open_armature": Effect(None, 0.0, 0.0, _open_armature),
    "open_field": Effect(
        None,
        0.0,
        0.0,
        _ways(
            ("in the field circuit", 0.8, {"field_open": 1.0}),
            ("without field supply", 0.2, {"field_unfed": 1.0}),
        ),
    ),
    "weak_field": Effect(
        "field_shorted",
        0.05,
        0.5,
        _ways(("in one pole", 0.5, {}), ("in two poles", 0.5, {"short_poles": 0.5})),
    ),
    "weak_magnets": Effect("magnets_lost", 0.1, 0.5, _ways(("", 0.9, {}), _AT_LIMIT)),
    "shorted_coil": Effect("coil_shorted", 0.002, 0.08, _one()),
    "open_coil": Effect(
        None,
        0.0,
        0.0,
        _ways(
            ("winding of two paths", 0.65, {"coil_open": 0.95}),
            ("winding of four paths", 0.35, {"coil_open": 0.33}),
        ),
    ),
    "brush_resistance": Effect("brush_ohm", 0.02, 0.3, _one()),
    "dirty_commutator": Effect("brush_ohm", 0.004, 0.06, _one(unevenness=7.0)),
    "off_neutral": Effect(
        "off_neutral",
        0.02,
        0.2,
        _ways(("shifted with rotation", 0.5, {}), ("shifted against rotation", 0.5, {"shift_sense": -1.0})),
    ),
    "reversed_series": Effect(
        None,
        0.0,
        0.0,
        _ways(
            ("", 0.7, {"series_sense": -1.0}),
            ("drive at its current limit", 0.15, {"series_sense": -1.0, "at_limit": 1.0}),
            ("standing", 0.15, {"series_sense": -1.0, "stalled": 1.0}),
        ),
    ),
    "missing_pulses": Effect(
        "volts_lost",
        0.1,
        0.5,
        _ways(
            ("", 0.85, {"pulses_lost": 1.0}),
            ("made up for by the controller", 0.15, {"pulses_lost": 1.0, "volts_lost": 0.0}),
        ),
    ),
    "excess_load": Effect(
        "torque", 1.15, 2.0, _ways(("", 0.75, {}), _AT_LIMIT, ("standing", 0.15, {"stalled": 1.0}))
    ),
    "light_load": Effect("torque", 0.02, 0.2, _one()),
    "stall": Effect(
        None,
        0.0,
        0.0,
        _ways(
            ("in the load", 0.4, {"stalled": 1.0}),
            ("in the motor", 0.4, {"stalled": 1.0, "seized": 1.0}),
            ("rubbing", 0.2, {}),
        ),
    ),
    "hot": Effect("heat", 1.3, 3.0, _one()),
    "friction": Effect("friction", 0.005, 0.1, _one()),
}

NAMES: Final = tuple(_EFFECTS)
_RUBBING = Severity("friction", 0.1, 0.5)
_IMPOSSIBLE = 1e-6  # weight of an effect that this machine cannot show: plain DC has no pulses to lose
_BRIDGE_LOSS = (0.38, 0.52)  # half of a single-phase bridge gone


def modes(plate: Plate, effect: str, severity: tuple[float, float] | None = None) -> tuple[Mode, ...]:
    """Enumerate the discrete ways of an effect on this machine.

    Raises
    ------
    KeyError
        If the effect is not one of :data:`NAMES`.

    """
    entry = _EFFECTS[effect]
    low, high = severity or _range(plate, effect, entry)
    scale = _IMPOSSIBLE if effect == "missing_pulses" and plate.source == "dc" else 1.0
    found = []
    for variant, weight, fixed in entry.ways(plate):
        given: tuple[Severity, ...] = ()
        if entry.attribute is not None and entry.attribute not in fixed:
            given = (Severity(entry.attribute, low, high),)
        elif effect == "stall" and variant == "rubbing":
            given = (_RUBBING,)
        found.append(Mode(effect=effect, variant=variant, weight=weight * scale, fixed=fixed, severity=given))
    return tuple(found)


def _range(plate: Plate, effect: str, entry: Effect) -> tuple[float, float]:
    if effect == "missing_pulses" and plate.source == "bridge":
        return _BRIDGE_LOSS
    return entry.low, entry.high
