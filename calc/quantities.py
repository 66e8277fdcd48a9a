"""Measures, states, kinds and dimensions: the vocabulary of the case sheet.

Every dimension has one inner unit; numbers inside Plateside are plain floats in it.
"""

from __future__ import annotations

from typing import Final

import msgspec

STATES: Final = {
    "isolated": "off, locked out, proved dead",
    "standby": "live, not commanded",
    "stalled": "energised, shaft not turning",
    "starting": "first seconds of a start",
    "no_load": "uncoupled, running",
    "light_load": "coupled, process idle",
    "loaded": "running with its load",
    "coasting": "switched off, still turning",
    "spun": "driven from outside, open circuit",
}
ENERGISED_STATES: Final = frozenset({"standby", "stalled", "starting", "no_load", "light_load", "loaded"})
RUNNING_STATES: Final = frozenset({"no_load", "light_load", "loaded"})

KINDS: Final = {
    "induction_3ph": "three-phase induction motor",
    "induction_1ph": "single-phase induction motor",
    "dc_shunt": "DC shunt motor",
    "dc_separately_excited": "DC motor, separately excited",
    "dc_series": "DC series motor",
    "dc_compound": "DC compound motor",
    "dc_permanent_magnet": "DC permanent-magnet motor",
    "induction_wound_rotor": "wound-rotor induction motor",
    "synchronous_permanent_magnet": "permanent-magnet AC motor",
    "synchronous_wound": "wound-field synchronous motor",
    "universal": "universal motor",
    "dc_generator": "DC generator",
    "alternator": "alternator",
}
DC_KINDS: Final = frozenset(kind for kind in KINDS if kind.startswith("dc_") and kind != "dc_generator")

# dimension -> inner unit, as people write it
INNER_UNIT: Final = {
    "power": "W",
    "apparent_power": "VA",
    "voltage": "V",
    "current": "A",
    "frequency": "Hz",
    "speed": "rpm",
    "resistance": "ohm",
    "temperature": "degC",
    "velocity": "mm/s",
    "acceleration": "m/s**2",
    "capacitance": "F",
    "time": "s",
    "level": "dB",
    "percent": "%",
    "ratio": "",
    "length": "mm",
    "force": "N",
    "rate": "1/h",
    "count": "",
    "cable": "m",
}

ALL: Final = frozenset({"any"})
_3PH: Final = frozenset({"induction_3ph"})
_1PH: Final = frozenset({"induction_1ph"})
_AC: Final = _3PH | _1PH


class Measure(msgspec.Struct, frozen=True, kw_only=True):
    """One quantity that can be read on a machine."""

    id: str
    label: str
    dimension: str
    usual_unit: str
    arity: int = 1
    kinds: frozenset[str] = ALL

    def suits(self, kind: str) -> bool:
        """Whether the measure makes sense on a machine kind."""
        return "any" in self.kinds or kind in self.kinds


def _m(  # one line per measure below
    id: str,
    label: str,
    dimension: str,
    usual_unit: str,
    arity: int = 1,
    kinds: frozenset[str] = ALL,
) -> Measure:
    return Measure(id=id, label=label, dimension=dimension, usual_unit=usual_unit, arity=arity, kinds=kinds)


_TABLE: Final = (
    # AC supply and running
    _m("supply_voltage", "supply voltage at the motor", "voltage", "V", 3, _AC),
    _m("supply_frequency", "supply frequency", "frequency", "Hz"),
    _m("line_current", "line current", "current", "A", 3, _AC),
    _m("speed", "speed", "speed", "rpm"),
    _m("input_power", "input power", "power", "kW"),
    _m("power_factor", "power factor", "ratio", ""),
    _m("winding_resistance", "winding resistance between terminals", "resistance", "ohm", 3, _3PH),
    _m("phase_resistance", "resistance of each phase, links off", "resistance", "ohm", 3, _3PH),
    _m("insulation_resistance", "insulation to frame, 60 s", "resistance", "Mohm"),
    _m("insulation_resistance_30s", "insulation to frame, 30 s", "resistance", "Mohm"),
    _m("insulation_resistance_10min", "insulation to frame, 10 min", "resistance", "Mohm"),
    _m("insulation_between_phases", "insulation between phases", "resistance", "Mohm", 3, _3PH),
    _m("cable_insulation_resistance", "insulation of the cable alone", "resistance", "Mohm"),
    _m("starting_time", "starting time", "time", "s"),
    _m("sideband_level", "sideband at (1-2s)f below the line component", "level", "dB", 1, _3PH),
    # gear and supply
    _m("incoming_voltage", "voltage at the incoming side", "voltage", "V", 3),
    _m("voltage_to_earth", "voltage of each line to earth", "voltage", "V", 3),
    _m("pole_drop", "voltage drop across each contactor pole", "voltage", "mV", 3),
    _m("control_voltage", "control voltage at the coil", "voltage", "V"),
    _m("overload_setting", "overload relay setting", "current", "A"),
    _m("overload_class", "overload relay trip class", "count", ""),
    _m("time_to_trip", "time until it trips", "time", "s"),
    _m("trip_current", "current when it trips", "current", "A"),
    _m("starts_per_hour", "starts per hour", "rate", "1/h"),
    _m("earth_leakage_current", "earth leakage current", "current", "mA"),
    _m("joint_temperature", "hottest joint or lug", "temperature", "degC"),
    _m("output_frequency", "inverter output frequency", "frequency", "Hz"),
    _m("dc_bus_voltage", "inverter DC bus voltage", "voltage", "V"),
    _m("drive_current", "current shown by the drive", "current", "A"),
    _m("brake_voltage", "voltage at the brake coil", "voltage", "V"),
    # heat and vibration
    _m("frame_temperature", "frame temperature", "temperature", "degC"),
    _m("ambient_temperature", "ambient temperature", "temperature", "degC"),
    _m("bearing_temperature", "bearing temperature", "temperature", "degC"),
    _m("winding_temperature", "winding temperature", "temperature", "degC"),
    _m("thermistor_resistance", "thermistor resistance", "resistance", "ohm"),
    _m("vibration_velocity", "vibration velocity, overall rms", "velocity", "mm/s"),
    _m("vibration_1x", "vibration at shaft speed", "velocity", "mm/s"),
    _m("vibration_2x", "vibration at twice shaft speed", "velocity", "mm/s"),
    _m("vibration_axial", "vibration along the shaft", "velocity", "mm/s"),
    _m("vibration_2f_line", "vibration at twice line frequency", "velocity", "mm/s"),
    _m("bearing_acceleration", "bearing acceleration, high frequency", "acceleration", "m/s**2"),
    # single-phase
    _m("main_current", "main winding current", "current", "A", 1, _1PH),
    _m("auxiliary_current", "auxiliary winding current", "current", "A", 1, _1PH),
    _m("main_resistance", "main winding resistance", "resistance", "ohm", 1, _1PH),
    _m("auxiliary_resistance", "auxiliary winding resistance", "resistance", "ohm", 1, _1PH),
    _m("run_capacitance", "run capacitor", "capacitance", "uF", 1, _1PH),
    _m("start_capacitance", "start capacitor", "capacitance", "uF", 1, _1PH),
    _m("capacitor_voltage", "voltage across the capacitor", "voltage", "V", 1, _1PH),
    # DC
    _m("armature_voltage", "armature voltage", "voltage", "V", 1, DC_KINDS),
    _m("armature_current", "armature current", "current", "A", 1, DC_KINDS),
    _m("field_voltage", "voltage at the field terminals", "voltage", "V", 1, DC_KINDS),
    _m("field_current", "field current", "current", "A", 1, DC_KINDS),
    _m("armature_resistance", "armature circuit resistance", "resistance", "ohm", 1, DC_KINDS),
    _m("field_resistance", "field resistance", "resistance", "ohm", 1, DC_KINDS),
    _m("series_field_resistance", "series field resistance", "resistance", "ohm", 1, DC_KINDS),
    _m("interpole_resistance", "interpole resistance", "resistance", "ohm", 1, DC_KINDS),
    _m("ripple_voltage", "AC component on the armature, true rms", "voltage", "V", 1, DC_KINDS),
    _m("ripple_frequency", "ripple frequency", "frequency", "Hz", 1, DC_KINDS),
    _m("open_circuit_voltage", "voltage of the spun machine", "voltage", "V", 1, DC_KINDS),
    _m("bar_drop_spread", "largest deviation of bar-to-bar drop", "percent", "%", 1, DC_KINDS),
    _m("bar_drop_max", "highest bar-to-bar drop against the mean", "percent", "%", 1, DC_KINDS),
    _m("bar_drop_min", "lowest bar-to-bar drop against the mean", "percent", "%", 1, DC_KINDS),
    _m("field_insulation_resistance", "insulation of the field", "resistance", "Mohm", 1, DC_KINDS),
    _m("brush_length", "brush length", "length", "mm", 1, DC_KINDS),
    _m("brush_spring_force", "brush spring force", "force", "N", 1, DC_KINDS),
    _m("commutator_runout", "commutator run-out", "length", "mm", 1, DC_KINDS),
    _m("pole_drop_spread", "largest deviation of field pole drop", "percent", "%", 1, DC_KINDS),
)

MEASURES: Final[dict[str, Measure]] = {measure.id: measure for measure in _TABLE}


def arity(measure: str, kind: str) -> int:
    """Return how many values a measure takes on a machine kind: three on three phases, else one."""
    entry = MEASURES[measure]
    return entry.arity if entry.arity == 1 or kind in {"induction_3ph", "alternator"} else 1
