"""From a solved state to the reading that a meter shows, and how far the model may be off."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from calc.induction_1ph import priors
from calc.induction_1ph.machine import OPEN_OHM, copper_factor
from calc.induction_1ph.plate import Plate
from calc.induction_1ph.states import Attributes, Site, Standing, capacitances, supply, torque_asked
from calc.quantities import MEASURES, RUNNING_STATES
from calc.twin import Ask, Floats, ModelError, Transform

_LIVE = frozenset({"standby", "starting", "stalled"}) | RUNNING_STATES
_TURNED_ON = frozenset({"starting", "stalled"}) | RUNNING_STATES
_REST = frozenset({"isolated"})

COVERED: dict[str, frozenset[str]] = {
    "supply_voltage": _LIVE,
    "supply_frequency": _LIVE,
    "line_current": _LIVE,
    "main_current": _TURNED_ON,
    "auxiliary_current": _TURNED_ON,
    "capacitor_voltage": _TURNED_ON,
    "speed": RUNNING_STATES,
    "input_power": RUNNING_STATES,
    "power_factor": RUNNING_STATES,
    "main_resistance": _REST,
    "auxiliary_resistance": _REST,
    "run_capacitance": _REST,
    "start_capacitance": _REST,
    "frame_temperature": RUNNING_STATES,
    "bearing_temperature": RUNNING_STATES,
    "winding_temperature": RUNNING_STATES,
    "ambient_temperature": _LIVE | _REST,
    "starting_time": frozenset({"starting"}),
}

# One sigma of the model itself, in transformed units: running without load, with load, otherwise.
_MODEL_ERROR: dict[str, tuple[float, float, float]] = {
    "supply_voltage": (0.004, 0.004, 0.01),
    "supply_frequency": (0.001, 0.001, 0.001),
    "line_current": (0.03, 0.02, 0.03),
    "main_current": (0.04, 0.04, 0.03),
    "auxiliary_current": (0.035, 0.035, 0.05),
    "capacitor_voltage": (0.03, 0.03, 0.04),
    "speed": (0.0018, 0.002, 0.002),
    "input_power": (0.06, 0.025, 0.03),
    "power_factor": (0.03, 0.015, 0.03),
    "main_resistance": (0.012, 0.012, 0.012),
    "auxiliary_resistance": (0.012, 0.012, 0.012),
    "run_capacitance": (0.008, 0.008, 0.008),
    "start_capacitance": (0.01, 0.01, 0.01),
    "frame_temperature": (0.4, 0.4, 0.4),
    "bearing_temperature": (0.6, 0.6, 0.6),
    "winding_temperature": (0.6, 0.6, 0.6),
    "ambient_temperature": (0.15, 0.15, 0.15),
    "starting_time": (0.6, 0.6, 0.6),
}
_KELVIN_SCALE = 10.0


def transform_of(measure: str, plate: Plate, amps: float) -> Transform:
    """Return the transform of a measure: logarithms with a floor, or linear where values lie close."""
    if measure in _LINEAR:
        scales = {"speed": plate.synchronous_rpm, "supply_frequency": plate.frequency_hz, "power_factor": 1.0}
        return Transform("linear", scale=scales.get(measure, _KELVIN_SCALE))
    ohm = plate.voltage_v / amps
    unit = {
        "current": amps,
        "voltage": plate.voltage_v,
        "power": plate.power_w,
        "capacitance": plate.power_w / (plate.voltage_v**2 * 2.0 * np.pi * plate.frequency_hz),
        "resistance": ohm,
        "time": 1.0,
    }[MEASURES[measure].dimension]
    cap = 1e3 * ohm if measure in {"main_resistance", "auxiliary_resistance"} else np.inf
    return Transform("log", floor=_FLOOR[MEASURES[measure].dimension] * unit, cap=cap)


_LINEAR = frozenset({"speed", "supply_frequency", "power_factor"}) | {
    measure for measure in COVERED if measure.endswith("_temperature")
}
# Below this share of the rated value a reading is as good as none.
_FLOOR = {
    "current": 0.01,
    "voltage": 0.01,
    "power": 0.01,
    "capacitance": 0.02,
    "resistance": 1e-4,
    "time": 0.05,
}


def error_of(ask: Ask, plate: Plate) -> ModelError:
    """How far the model may be off for a reading, one sigma."""
    no_load, loaded, otherwise = _MODEL_ERROR[ask.measure]
    level = {"no_load": no_load, "light_load": loaded, "loaded": loaded}.get(ask.state, otherwise)
    if ask.measure == "speed" and ask.state == "loaded":
        level = max(level, 0.06 * plate.slip)
    if ask.measure in {"main_resistance", "auxiliary_resistance"} and ask.temperature_c is None:
        level = 0.03
    return ModelError(level=level)


def predict_one(
    plate: Plate, site: Site, attributes: Attributes, ask: Ask, solved: Standing | None
) -> Floats:
    """Predict one reading, shape (rows,), in the inner unit of its dimension."""
    if ask.measure in _AT_REST:
        return _AT_REST[ask.measure](site, attributes, ask)
    if ask.measure == "supply_frequency":
        return np.full_like(site.load, plate.frequency_hz)
    if solved is None:
        return supply(site, attributes) if ask.measure == "supply_voltage" else np.zeros_like(site.load)
    if ask.measure == "speed":
        return np.asarray(plate.synchronous_rpm * (1.0 - solved.running.slip))
    if ask.measure == "starting_time":
        return _starting_time(site, attributes, solved)
    return _RUNNING[ask.measure](site, solved)


def _main_resistance(site: Site, attributes: Attributes, ask: Ask) -> Floats:
    factor = attributes["winding_ohm"] * (1.0 - attributes["turns_shorted"])
    ohm = site.machine.main_ohm * factor * _copper(site, ask)
    return np.asarray(ohm + OPEN_OHM * attributes["main_open"])


def _auxiliary_resistance(site: Site, attributes: Attributes, ask: Ask) -> Floats:
    return np.asarray(
        site.machine.auxiliary_ohm * _copper(site, ask) + OPEN_OHM * attributes["auxiliary_open"]
    )


def _copper(site: Site, ask: Ask) -> Floats:
    if ask.temperature_c is not None:
        return copper_factor(np.full_like(site.load, ask.temperature_c))
    return copper_factor(site.ambient_c + 5.0)


_AT_REST: dict[str, Callable[[Site, Attributes, Ask], Floats]] = {
    "main_resistance": _main_resistance,
    "auxiliary_resistance": _auxiliary_resistance,
    "run_capacitance": lambda site, attributes, _: capacitances(site, attributes)[0],
    "start_capacitance": lambda site, attributes, _: capacitances(site, attributes)[1],
    "ambient_temperature": lambda site, _attributes, _ask: site.ambient_c,
}


def _power_factor(site: Site, solved: Standing) -> Floats:
    apparent = solved.running.voltage_v * np.abs(solved.line)
    floor = 1e-6 * site.machine.power_w
    return np.asarray(solved.input_w / np.maximum(apparent, floor))


def frame_c(site: Site, solved: Standing) -> Floats:
    """Frame temperature [°C] after hours in a state."""
    return np.asarray(site.ambient_c + priors.FRAME_RISE * (solved.winding_c - site.ambient_c))


def _bearing_c(site: Site, solved: Standing) -> Floats:
    share, own = priors.BEARING_RISE
    return np.asarray(site.ambient_c + own + share * (frame_c(site, solved) - site.ambient_c))


_RUNNING: dict[str, Callable[[Site, Standing], Floats]] = {
    "supply_voltage": lambda _, solved: solved.running.voltage_v,
    "line_current": lambda _, solved: np.abs(solved.line),
    "main_current": lambda _, solved: np.abs(solved.running.currents.main),
    "auxiliary_current": lambda _, solved: np.abs(solved.running.currents.auxiliary),
    "capacitor_voltage": lambda _, solved: solved.capacitor_v,
    "input_power": lambda _, solved: solved.input_w,
    "power_factor": _power_factor,
    "winding_temperature": lambda _, solved: solved.winding_c,
    "frame_temperature": frame_c,
    "bearing_temperature": _bearing_c,
}


def _starting_time(site: Site, attributes: Attributes, solved: Standing) -> Floats:
    """Time [s] to speed, from the torque at standstill and at pull-out less half the load's."""
    rated = site.machine.power_w
    pull_out = priors.PULL_OUT * rated * np.square(solved.running.voltage_v / site.machine.voltage_v)
    load = torque_asked(site, attributes, "loaded")
    mean = 0.5 * (np.abs(solved.running.currents.torque_w) + pull_out) - 0.5 * load
    return np.asarray(2.0 * priors.INERTIA_S * rated / np.maximum(mean, 0.02 * rated))
