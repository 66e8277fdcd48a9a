"""The words and fields of the case sheet, beside the measures, states and kinds of ``quantities``.

Word lists are id -> what it means, so that a screen can offer them.
"""

from __future__ import annotations

from typing import Final

SOURCES: Final = {
    "mains": "mains",
    "generator": "generator",
    "inverter": "inverter",
    "soft_starter": "soft starter",
    "rectifier_1ph": "single-phase rectifier",
    "rectifier_3ph": "three-phase rectifier",
    "dc_bus": "DC bus",
    "battery": "battery",
}
CONNECTIONS: Final = {
    "star": "star",
    "delta": "delta",
    "double_star": "double star",
    "double_delta": "double delta",
}
STARTERS: Final = {
    "direct": "direct on line",
    "star_delta": "star-delta",
    "autotransformer": "autotransformer",
    "soft_starter": "soft starter",
    "inverter": "inverter",
    "rotor_resistance": "rotor resistance",
    "armature_resistance": "armature resistance",
}
LOADS: Final = {
    "pump_centrifugal": "centrifugal pump",
    "fan": "fan",
    "pump_positive": "positive-displacement pump",
    "compressor": "compressor",
    "conveyor": "conveyor",
    "hoist": "hoist",
    "travel": "travel drive",
    "mixer": "mixer",
    "crusher": "crusher",
    "other": "other",
}
MOUNTS: Final = {"rigid": "rigid", "flexible": "flexible"}
PROTECTORS: Final = {"none": "none", "manual": "manual reset", "automatic": "automatic reset"}
CURRENT_IS: Final = {"armature": "armature current", "line": "line current, field included"}
PLACES: Final = {
    "line_side": "line side of the gear",
    "starter": "starter output",
    "drive": "drive output",
    "cable_end": "end of the cable",
    "motor": "motor terminals",
}
LINKS: Final = {"fitted": "links fitted", "removed": "links removed"}
METHODS: Final = {
    "two_lead": "two-lead meter",
    "four_wire": "four-wire meter",
    "volt_drop": "current and volt drop",
    "inrush_100ms": "inrush mode, 100 ms",
    "max_hold": "highest value held",
    "low_pass": "low-pass filter on",
}
POSITIONS: Final = {"de": "drive end", "nde": "non-drive end"}
# IEC 60085 classes, with the temperatures that some plates print instead
INSULATION_CLASSES: Final = {
    "Y": "90", "A": "105", "E": "120", "B": "130", "F": "155", "H": "180", "N": "200", "R": "220",
}  # fmt: skip
# IEC 60034-12 designs and their variants, then NEMA MG 1 designs
DESIGN_LETTERS: Final = ("N", "NE", "NY", "NEY", "H", "HE", "HY", "HEY", "A", "B", "C", "D", "E")

# nameplate field -> dimension; fractions are ratios: 88.7 % is 0.887 inside
PLATE_DIMENSION: Final = {
    "power": "power",
    "voltage": "voltage",
    "current": "current",
    "frequency": "frequency",
    "speed": "speed",
    "power_factor": "ratio",
    "efficiency": "ratio",
    "service_factor": "ratio",
    "locked_rotor_current_ratio": "ratio",
    "ambient": "temperature",
    "poles": "count",
    "duty_factor": "ratio",
    "shaft_height": "length",
    "rotor_bars": "count",
    "max_speed": "speed",
    "field_voltage": "voltage",
    "field_current": "current",
    "rotor_voltage": "voltage",
    "rotor_current": "current",
    "run_capacitor": "capacitance",
    "start_capacitor": "capacitance",
    "in_use": "voltage",
}
# ratios that plates also print as a percentage without the sign: 88.7 is 88.7 %
PERCENT_RATIOS: Final = frozenset({"power_factor", "efficiency", "duty_factor"})
RANGE_FIELDS: Final = frozenset({"run_capacitor", "start_capacitor"})
PLATE_WORDS: Final = {"connection": CONNECTIONS, "current_is": CURRENT_IS}
PLATE_TEXTS: Final = frozenset({"duty", "enclosure", "power_supply_code"})
RATING_FIELDS: Final = (
    "voltage", "current", "frequency", "power", "speed", "power_factor", "efficiency", "connection",
)  # fmt: skip
SUPPLY_DIMENSION: Final = {
    "nominal_voltage": "voltage",
    "nominal_frequency": "frequency",
    "cable_length": "cable",
}
CONTEXT_DIMENSION: Final = {
    "temperature": "temperature",
    "test_voltage": "voltage",
    "speed": "speed",
    "after_stop": "time",
}
CONTEXT_WORDS: Final = {"at": PLACES, "links": LINKS, "method": METHODS, "position": POSITIONS}
CONTEXT_TEXTS: Final = {"direction": 64, "instrument": 64, "taken_at": 64, "note": 2000}
TAG_LENGTH: Final = 64
# The word in a reading's note that says: looked at twice, it is so.
CHECKED: Final = "checked"
