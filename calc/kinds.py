"""Which model belongs to which machine kind, and one fitted twin per machine."""

from __future__ import annotations

import importlib
from functools import lru_cache
from typing import Protocol, cast

from calc.quantities import DC_KINDS
from calc.sheet import Machine
from calc.twin import Twin

# kind -> module that offers ``fit(machine)``; a kind that is not named here has no model.
MODELS: dict[str, str] = {
    "induction_3ph": "calc.induction_3ph",
    "induction_1ph": "calc.induction_1ph",
    **dict.fromkeys(sorted(DC_KINDS), "calc.dc"),
}


class _Model(Protocol):
    def fit(self, machine: Machine) -> Twin:
        """Make the twin of a machine."""


@lru_cache(maxsize=256)
def twin_of(machine: Machine) -> Twin | None:
    """Return the twin of a machine, fitted once, or None where its kind has no model."""
    name = MODELS.get(machine.kind)
    if name is None:
        return None
    return cast(_Model, importlib.import_module(name)).fit(machine)
