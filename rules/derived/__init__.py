"""Quantities that limits judge and that follow from readings and plate, by name.

Each function takes a sheet and yields one :class:`Derived` per reading that it rests on.
Where an input is missing it yields nothing: a limit without its inputs is silent.
"""

from __future__ import annotations

import math
from typing import Final

from calc.sheet import CaseSheet
from rules.derived import electric, insulation, machine
from rules.derived.base import OPEN_OHM, Derived, Quantity, numbers_of, over_plate
from rules.derived.machine import poles_of

__all__ = ["OPEN_OHM", "QUANTITIES", "Derived", "derived", "numbers_of", "poles_of"]

QUANTITIES: Final[dict[str, Quantity]] = {
    "voltage_unbalance": electric.unbalance("supply_voltage", "incoming_voltage"),
    "current_unbalance": electric.unbalance("line_current"),
    "winding_unbalance": electric.unbalance("winding_resistance", "phase_resistance"),
    "lowest_line_current": electric.lowest_of("line_current"),
    "lowest_voltage_to_earth": electric.lowest_of("voltage_to_earth"),
    "open_windings": electric.open_windings,
    "winding_per_unit": electric.winding_per_unit,
    "auxiliary_over_main": electric.auxiliary_over_main,
    "voltage_deviation": electric.voltage_deviation,
    "armature_voltage_deviation": electric.armature_voltage_deviation,
    "frequency_deviation": electric.frequency_deviation,
    "voltage_and_frequency_deviation": electric.voltage_and_frequency_deviation,
    "current_over_rated": electric.current_over_rated,
    "field_resistance_over_plate": electric.field_resistance_over_plate,
    "ripple_share": electric.ripple_share,
    "insulation_at_40c": insulation.at_40c,
    "insulation_over_kv_plus_one": insulation.over_kv_plus_one,
    "polarisation_index": insulation.polarisation_index,
    "absorption_ratio": insulation.absorption_ratio,
    "slip_over_plate": machine.slip_over_plate,
    "sideband_below_line": machine.sideband_below_line,
    "bearing_rise": machine.bearing_rise,
    "run_capacitance_over_marked": machine.run_capacitance_over_marked,
    "start_capacitance_over_lowest": machine.start_capacitance_over_lowest,
    "start_capacitance_over_highest": machine.start_capacitance_over_highest,
    "field_voltage_over_plate": electric.field_voltage_over_plate,
    "speed_over_highest": machine.speed_over_highest,
    "speed_over_maximum": lambda sheet: over_plate(sheet, "speed", "max_speed"),
    "field_current_over_plate": lambda sheet: over_plate(sheet, "field_current", "field_current"),
    "overload_setting_over_plate": lambda sheet: over_plate(sheet, "overload_setting", "current"),
}


def derived(sheet: CaseSheet, quantity: str) -> tuple[Derived, ...]:
    """Return every value of a quantity that a sheet holds: of a measure itself, or derived.

    Unknown quantities have no value. Values that are nan are left out.
    """
    derive = QUANTITIES.get(quantity)
    found = machine.read_directly(sheet, quantity) if derive is None else derive(sheet)
    return tuple(one for one in found if not math.isnan(one.value))
