"""Invented nameplates for these tests."""

import numpy as np

from calc.sheet import Machine, Nameplate, Supply, Value
from calc.twin import Ask

UNITS = {
    "power": ("W", 1.0),
    "voltage": ("V", 1.0),
    "current": ("A", 0.1),
    "frequency": ("Hz", 1.0),
    "speed": ("rpm", 5.0),
    "power_factor": ("", 0.01),
    "efficiency": ("", 0.01),
    "run_capacitor": ("F", 1e-6),
    "start_capacitor": ("F", 1e-6),
    "poles": ("", 1.0),
}

SPLIT = {"power": 250, "voltage": 230, "current": 3.2, "frequency": 50, "speed": 1440}
START = {**SPLIT, "power": 750, "current": 7.4, "start_capacitor": 200e-6}
RUN = {"power": 550, "voltage": 230, "current": 3.3, "frequency": 50, "speed": 1430, "run_capacitor": 20e-6}
BOTH = {
    "power": 1500,
    "voltage": 230,
    "current": 9.0,
    "frequency": 50,
    "speed": 1435,
    "run_capacitor": 45e-6,
    "start_capacitor": 250e-6,
}
ALL = {"split phase": SPLIT, "capacitor start": START, "capacitor run": RUN, "both": BOTH}


def value(number, unit="", step=0.0, high=None):
    kind = "exact" if high is None else "range"
    return Value(text=f"{number} {unit}", number=number, unit=unit, resolution=step, kind=kind, high=high)


def machine(fields, *, insulation_class=None, nominal=None):
    known = {name: value(float(number), *UNITS[name]) for name, number in fields.items()}
    supply = Supply() if nominal is None else Supply(nominal_voltage=value(nominal, "V"))
    plate = Nameplate(**known, insulation_class=insulation_class)
    return Machine(kind="induction_1ph", nameplate=plate, supply=supply)


def one(twin, asks, z=None, **attributes):
    """One row: every reading asked for, of the typical motor with some attributes changed."""
    rows = {name: np.array([attributes.get(name, number)]) for name, number in twin.defaults.items()}
    z = np.zeros((1, twin.dim)) if z is None else z
    return [float(found[0, 0]) for found in twin.predict(z, rows, [Ask(*a.split("@")) for a in asks])]
