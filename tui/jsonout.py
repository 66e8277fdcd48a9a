"""The answer for one case sheet as JSON: the contract of case-sheet format 1, and more keys."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any, TypeAlias

import msgspec

if TYPE_CHECKING:
    from calc.errors import Problem
    from rules.answer import Band, Diagnosis, FaultOdds, NextItem

Json: TypeAlias = "dict[str, Json] | list[Json] | str | float | bool | None"

DIGITS = 6  # significant, of every number that is written


def as_json(diagnosis: Diagnosis) -> dict[str, Any]:
    """Return one answer as plain objects; every number is finite, or null."""
    answer: dict[str, Json] = {
        "sheet": diagnosis.sheet,
        "model": diagnosis.model,
        "expected": [_band(band) for band in diagnosis.expected],
        "faults": [_fault(fault) for fault in diagnosis.faults],
        "next": [_next(item) for item in diagnosis.next],
        "findings": msgspec.to_builtins(diagnosis.findings),
        "energise": msgspec.to_builtins(diagnosis.energise),
        "cautions": list(diagnosis.cautions),
        "slips": msgspec.to_builtins(diagnosis.slips),
        "turns": msgspec.to_builtins(diagnosis.turns),
        "plate_remarks": list(diagnosis.plate_remarks),
        "notes": list(diagnosis.notes),
    }
    return {key: _finite(value) for key, value in answer.items()}


def error_json(sheet: str, error: Exception) -> dict[str, Any]:
    """Return the line of a sheet that could not be answered."""
    answer: dict[str, Any] = {"sheet": sheet, "error": str(error) or type(error).__name__}
    problems: list[Problem] = getattr(error, "problems", [])
    return {**answer, "problems": [_problem(problem) for problem in problems]} if problems else answer


def _problem(problem: Problem) -> Json:
    """Return the fields of one problem."""
    return {name: getattr(problem, name) for name in ("file", "line", "where", "given", "allowed")}


def _band(band: Band) -> Json:
    """Return one band; its condition stands as text with a unit."""
    plain = {
        name: getattr(band, name) for name in ("measure", "state", "low", "mid", "high", "unit", "coverage")
    }
    if band.temperature_c is not None:
        plain["temperature"] = f"{band.temperature_c:g} degC"
    if band.speed_rpm is not None:
        plain["speed"] = f"{band.speed_rpm:g} rpm"
    return plain


def _fault(fault: FaultOdds) -> Json:
    """Return one fault with what speaks for and against it; keys that are empty are left out."""
    plain: dict[str, Json] = {
        "id": fault.id,
        "probability": fault.probability,
        "name": fault.name,
        "part": fault.part,
    }
    more: dict[str, Json] = {
        "within": [_fault(inner) for inner in fault.within],
        "reasons": [msgspec.to_builtins(reason) for reason in fault.reasons],
    }
    return {key: value for key, value in (plain | more).items() if value not in ("", [], ())}


def _next(item: NextItem) -> Json:
    """Return one item of what to read next, with the measure and state, or the observation."""
    plain: dict[str, Any] = msgspec.to_builtins(item)
    unused = ("measure", "state") if item.observation else ("observation",)
    return {key: value for key, value in plain.items() if key not in unused and value not in ("", [], ())}


def _finite(value: Json) -> Json:
    """Return a JSON value with its numbers rounded, and null for what is not finite."""
    if isinstance(value, float):
        return float(f"{value:.{DIGITS}g}") if math.isfinite(value) else None
    if isinstance(value, dict):
        return {key: _finite(inner) for key, inner in value.items()}
    return [_finite(inner) for inner in value] if isinstance(value, list | tuple) else value
