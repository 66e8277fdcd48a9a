"""In which states a motor can be found: what stands, what runs, what trips.

Chances are common practice: what technicians find on such motors.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from calc.twin import Floats


@dataclass(frozen=True)
class Found:
    """Chance of each state, shape (rows,): energised and standing, running uncoupled, running with its load.

    ``starts``: that a start can be read at all.
    """

    stands: Floats
    turns_free: Floats
    turns_loaded: Floats
    starts: Floats


# (stands, runs uncoupled, runs with its load). No start circuit: it stands and hums; some start without
# load, a few were helped and run.
_START_DEAD = (0.92, 0.25, 0.07)
_FLAGS: dict[str, tuple[float, float, float]] = {
    "start_open": _START_DEAD,
    "start_shorted": _START_DEAD,
    "switch_open": _START_DEAD,
    "auxiliary_open": _START_DEAD,
    "start_lost": (0.4, 0.9, 0.6),
    "run_lost": (0.2, 0.95, 0.8),
    "volts_lost": (0.12, 0.97, 0.88),
    "switch_closed": (0.0, 0.12, 0.1),
    "main_open": (0.9, 0.1, 0.05),
    "turns_shorted": (0.12, 0.85, 0.75),
    "jammed": (1.0, 0.3, 0.0),
}
_RUN_OPEN, _RUN_SHORTED = _START_DEAD, (0.92, 0.1, 0.05)
_RUN_SHORTED_BESIDE_START = (0.7, 0.3, 0.1)
_HIGHER_VOLTAGE, _LOWER_VOLTAGE = (0.3, 0.9, 0.7), (0.1, 0.5, 0.4)
_OVERLOADED = (0.12, 1.0, 0.88)
_EARTH, _EARTH_STARTS = (0.0, 0.5, 0.5), 0.5
_DEAD = (1.0, 0.0, 0.0)


def found_in(attributes: Mapping[str, Floats], has_switch: Floats) -> Found:
    """Return the chance of each state from what is wrong with each row.

    Parameters
    ----------
    attributes : mapping
        Attributes of the model, each of shape (rows,).
    has_switch : ndarray
        1 where the design has a start switch.

    Notes
    -----
    Several things wrong at once are taken to act independently.

    """
    switch = has_switch > 0.5
    earth = attributes["earth_ohm"] < 1e8
    present = [
        (attributes[name] > 1e-6, chances) for name, chances in _FLAGS.items() if attributes[name].any()
    ]
    present += [
        ((attributes["run_open"] > 0.5) & ~switch, _RUN_OPEN),
        ((attributes["run_shorted"] > 0.5) & ~switch, _RUN_SHORTED),
        ((attributes["run_shorted"] > 0.5) & switch, _RUN_SHORTED_BESIDE_START),
        (attributes["winding_ohm"] > 1.5, _HIGHER_VOLTAGE),
        (attributes["winding_ohm"] < 0.7, _LOWER_VOLTAGE),
        (attributes["load_set"] > 1.05, _OVERLOADED),
        (earth, _EARTH),
        (attributes["live"] < 0.5, _DEAD),
    ]
    moves, free, loaded = (np.ones_like(has_switch) for _ in range(3))
    for flag, (stands, runs_free, runs_loaded) in present:
        if not flag.any():
            continue
        moves = moves * np.where(flag, 1.0 - stands, 1.0)
        free = free * np.where(flag, runs_free, 1.0)
        loaded = loaded * np.where(flag, runs_loaded, 1.0)
    starts = np.where(earth, _EARTH_STARTS, 1.0)
    return Found(stands=1.0 - moves, turns_free=free, turns_loaded=loaded, starts=starts)
