"""Three-phase induction motor: plate to circuit, faults, readings in every state."""

from calc.induction_3ph.model import InductionTwin, fit

__all__ = ["InductionTwin", "fit"]
