"""The model of DC machines: plate, circuit, effects of faults, and what each state reads."""

from calc.dc.model import KINDS, DcTwin, fit

__all__ = ["KINDS", "DcTwin", "fit"]
