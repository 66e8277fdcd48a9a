"""Which model belongs to which machine kind, and one fitted twin per machine."""

from __future__ import annotations

import importlib
from collections.abc import Sequence
from functools import lru_cache
from typing import Protocol, cast

from calc.quantities import DC_KINDS
from calc.sheet import Machine, Reading
from calc.twin import Twin

# kind -> module that offers ``fit(machine)``; a kind that is not named here has no model.
MODELS: dict[str, str] = {
    "induction_3ph": "calc.induction_3ph",
    "induction_1ph": "calc.induction_1ph",
    **dict.fromkeys(sorted(DC_KINDS), "calc.dc"),
}


# Plate fields without which a model looks at readings for the class of the machine.
_CLASS_FIELDS = ("power", "voltage", "current", "speed", "frequency", "run_capacitor", "start_capacitor")


class _Model(Protocol):
    def fit(self, machine: Machine, *, readings: Sequence[Reading] = ()) -> Twin:
        """Make the twin of a machine."""


def twin_of(machine: Machine, readings: Sequence[Reading] = ()) -> Twin | None:
    """Return the twin of a machine, fitted once, or None where its kind has no model.

    ``readings`` are context for a plate that does not say everything; they are never evidence here.
    """
    plate = machine.nameplate
    silent = any(getattr(plate, name) is None for name in _CLASS_FIELDS)
    return _fitted(machine, tuple(readings) if silent else ())


@lru_cache(maxsize=256)
def _fitted(machine: Machine, readings: tuple[Reading, ...]) -> Twin | None:
    name = MODELS.get(machine.kind)
    if name is None:
        return None
    return cast(_Model, importlib.import_module(name)).fit(machine, readings=readings)
