"""How a reading of a DC machine is compared, and how far the model itself may be off.

The figures are one sigma beside the latents: what a state differs by from one hour to the
next, and what the formulas leave out.
"""

from __future__ import annotations

from typing import Final

from calc.dc.plate import Plate
from calc.twin import Ask, ModelError, Transform

_TEMPERATURES: Final = {
    "frame_temperature": 4.0,
    "ambient_temperature": 1.5,
    "bearing_temperature": 5.0,
    "winding_temperature": 8.0,
}
_RESTING_TEMPERATURE = 4.0
_LEVEL: Final = {
    "armature_voltage": 0.006,
    "armature_current": 0.025,
    "speed": 0.006,
    "field_voltage": 0.010,
    "field_current": 0.012,
    "input_power": 0.035,
    "armature_resistance": 0.03,
    "field_resistance": 0.012,
    "series_field_resistance": 0.02,
    "interpole_resistance": 0.40,
    "ripple_voltage": 0.10,
    "ripple_frequency": 0.08,
    "open_circuit_voltage": 0.012,
    "bar_drop_spread": 0.17,
    "bar_drop_max": 0.04,
    "starting_time": 0.9,
}
_IN_STATE: Final = {
    "armature_voltage@starting": 0.06,
    "armature_voltage@stalled": 0.05,
    "armature_current@starting": 0.05,
    "armature_current@stalled": 0.05,
    "armature_current@no_load": 0.04,
    "ripple_voltage@no_load": 0.16,
}


def transform(plate: Plate, measure: str) -> Transform:
    """Return how a measure enters the comparison: logarithm over a floor, or linear in degC or %."""
    ohm = plate.voltage_v / plate.current_a
    if measure in _TEMPERATURES:
        return Transform("linear", scale=1.0)
    if measure == "bar_drop_min":
        return Transform("linear", scale=1.0)
    if measure in {"bar_drop_spread", "bar_drop_max"}:
        return Transform("log", floor=1.0)
    if measure == "field_resistance":
        hot = plate.field_voltage_v / plate.field_current_a
        return Transform("log", floor=1e-3 * hot, cap=300.0 * hot)
    if measure.endswith("_resistance"):
        return Transform("log", floor=1e-6 * ohm, cap=50.0 * ohm)
    return Transform("log", floor=_floor(plate, measure))


def _floor(plate: Plate, measure: str) -> float:
    """Below this a value counts as nothing."""
    floors = {
        "armature_voltage": 0.005 * plate.voltage_v,
        "open_circuit_voltage": 0.005 * plate.voltage_v,
        "ripple_voltage": 0.001 * plate.voltage_v,
        "armature_current": 0.004 * plate.current_a,
        "speed": 0.02 * plate.speed_rpm,
        "field_voltage": 0.01 * plate.field_voltage_v,
        "field_current": 0.02 * plate.field_current_a,
        "input_power": 0.005 * plate.power_w,
        "ripple_frequency": 1.0,
        "starting_time": 0.1,
    }
    return floors.get(measure, 0.0)


def model_error(plate: Plate, ask: Ask) -> ModelError:
    """Return how far the model may be off for a reading, in transformed units."""
    if ask.measure in _TEMPERATURES:
        level = _RESTING_TEMPERATURE if ask.state == "isolated" else _TEMPERATURES[ask.measure]
        return ModelError(level=1.5 if ask.measure == "ambient_temperature" else level)
    if ask.measure == "bar_drop_min":
        return ModelError(level=5.0)
    if ask.measure == "open_circuit_voltage" and ask.speed_rpm is None and plate.spun_rpm is None:
        return ModelError(level=0.5)
    return ModelError(level=_IN_STATE.get(ask.key, _LEVEL[ask.measure]))
