"""The gate asked by tests: what stays shut, and how its lines stand."""

from calc.quantities import ENERGISED_STATES
from rules.gate import gate

from .makers import reading

STARTED = ENERGISED_STATES - {"standby", "stalled"}
LOADED = reading("line_current", "loaded", "14 A", "14 A", "14 A")
CLEARED = {"shaft_turns_freely": True, "guards_fitted": True}


def shut(sheet, knowledge, **suspects) -> set[str]:
    """Energised states that stay shut, but the stall, which always does."""
    state = gate(sheet, knowledge, suspects=suspects)
    return {name for name in ENERGISED_STATES if state.forbids(name)} - {"stalled"}


def lines(sheet, knowledge) -> dict[str, str]:
    """How each line of the gate stands, by its id."""
    return {line.id: line.status for line in gate(sheet, knowledge).energise.lines}
