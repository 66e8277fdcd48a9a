"""Machines and magnets for the tests of the DC model."""

from __future__ import annotations

from typing import Any

import numpy as np

from calc.dc import DcTwin
from calc.dc.circuit import Armature, Magnet
from calc.sheet_io import sheet_from_plain

PLATE = {
    "power": "7.5 kW",
    "voltage": "240 V",
    "current": "37 A",
    "speed": "1150 rpm",
    "field_voltage": "240 V",
    "field_current": "1.2 A",
}


def machine(kind: str, nameplate: dict[str, str] | None = None, source: str | None = "dc_bus") -> Any:
    plate = dict(PLATE if nameplate is None else nameplate)
    if kind in {"dc_series", "dc_permanent_magnet"}:
        plate.pop("field_voltage", None)
        plate.pop("field_current", None)
    inner: dict[str, Any] = {"kind": kind, "nameplate": plate}
    if source:
        inner["supply"] = {"source": source}
    return sheet_from_plain({"format": 1, "machine": inner, "complaint": "routine_check"}).machine


def rows_of(twin: DcTwin, count: int, **changed: float) -> dict[str, np.ndarray]:
    return {name: np.full(count, changed.get(name, number)) for name, number in twin.defaults.items()}


def one(number: float) -> np.ndarray:
    return np.array([float(number)])


def magnet(**given: Any) -> Magnet:
    usual: dict[str, Any] = {
        "shunt": 1.0, "series": 0.0, "bend": 1.1, "residual": 0.0, "factor": 1.0, "reaction": 0.0,
        "lame": 0.0, "lame_share": 1.0,
    }  # fmt: skip
    permanent = bool(given.pop("permanent", False))
    return Magnet(**{k: one(v) for k, v in (usual | given).items()}, permanent=permanent)


def armature(*, volts: float = 1.0, resistance: float, brush: float = 0.0, emf: float = 1.0) -> Armature:
    return Armature(one(volts), one(resistance), one(brush), one(emf))
