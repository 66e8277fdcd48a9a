"""Invented nameplates of three-phase motors for these tests."""

import numpy as np

from calc.sheet import Machine, Nameplate, Supply, Value
from calc.twin import Ask, Mode, Twin, attribute_rows

STEPS = {
    "power": ("W", 1.0),
    "voltage": ("V", 1.0),
    "current": ("A", 0.1),
    "frequency": ("Hz", 1.0),
    "speed": ("rpm", 1.0),
    "power_factor": ("", 0.01),
    "efficiency": ("%", 0.1),
    "locked_rotor_current_ratio": ("", 0.1),
    "service_factor": ("", 0.01),
    "poles": ("", 1.0),
}

PUMP = {
    "power": 7500.0, "voltage": 400.0, "current": 14.9, "frequency": 50.0, "speed": 1455.0,
    "power_factor": 0.84, "efficiency": 88.7, "locked_rotor_current_ratio": 6.5, "connection": "delta",
}  # fmt: skip
FAN = {
    "power": 1100.0,
    "voltage": 400.0,
    "current": 2.6,
    "frequency": 50.0,
    "speed": 1415.0,
    "connection": "star",
}
MILL = {
    "power": 160e3,
    "voltage": 690.0,
    "current": 162.0,
    "frequency": 50.0,
    "speed": 992.0,
    "connection": "delta",
}
LIFT = {
    "power": 18650.0, "voltage": 460.0, "current": 31.0, "frequency": 60.0, "speed": 1175.0,
    "code_letter": "G", "service_factor": 1.15,
}  # fmt: skip
BLANK: dict = {}
ALL = {"pump": PUMP, "fan": FAN, "mill": MILL, "lift": LIFT, "blank": BLANK}


def number(field: str, worth: float) -> Value:
    unit, step = STEPS[field]
    return Value(text=f"{worth:g} {unit}".strip(), number=float(worth), unit=unit, resolution=step)


def machine(
    *, source: str | None = None, starter: str | None = None, load_type: str | None = None, **fields
) -> Machine:
    """A three-phase motor whose plate says these fields, in inner units."""
    told = {k: number(k, v) if k in STEPS else v for k, v in fields.items()}
    return Machine(
        kind="induction_3ph",
        nameplate=Nameplate(**told),
        supply=Supply(source=source),
        starter=starter,
        load_type=load_type,
    )


def asks_of(twin: Twin) -> list[Ask]:
    """Every reading that the twin covers, each in every state."""
    from calc.quantities import MEASURES, STATES  # noqa: PLC0415

    every = [Ask(m.id, s) for m in MEASURES.values() if m.suits(twin.kind) for s in STATES]
    return [ask for ask in every if twin.covers(ask)]


def predict(twin: Twin, mode: Mode, asks, z=None, **attributes):
    """Readings of one mode: a dict from key to an array (rows, arity); z of shape (rows, dim)."""
    z = np.zeros((1, twin.dim)) if z is None else np.atleast_2d(z)
    rows = attribute_rows([mode], z[None], twin.defaults)
    for name, worth in attributes.items():
        rows[name] = np.full(len(z), float(worth))
    asks = [Ask(*a.split("@")) if isinstance(a, str) else a for a in asks]
    return {a.key: found for a, found in zip(asks, twin.predict(z, rows, asks), strict=True)}
