"""The single-phase induction motor: split phase, capacitor start, capacitor run, or both."""

from calc.induction_1ph.model import SinglePhaseTwin, fit

__all__ = ["SinglePhaseTwin", "fit"]
