"""In what ways a single-phase motor may differ from a sound one, as attributes of the model.

An attribute that is a flag is 0 or 1; the others carry what their comment says.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final

from calc.induction_1ph.designs import HAS_RUN_CAPACITOR, HAS_START_CAPACITOR, SPLIT_PHASE
from calc.twin import Mode, Severity

# design: index among the designs that the plate allows.
DEFAULTS: dict[str, float] = {
    "design": 0.0,
    "live": 1.0,
    "volts_lost": 0.0,  # fraction below rated
    "volts_over": 0.0,  # fraction above rated
    "set_volts": 0.0,  # 1: the supply level is the fault's, not the site's
    "run_open": 0.0,
    "run_shorted": 0.0,
    "run_lost": 0.0,  # fraction of capacitance lost
    "start_open": 0.0,
    "start_shorted": 0.0,
    "start_lost": 0.0,  # fraction of capacitance lost
    "switch_open": 0.0,
    "switch_closed": 0.0,
    "main_open": 0.0,
    "auxiliary_open": 0.0,
    "turns_shorted": 0.0,  # fraction of the main winding's turns
    "loop_leakage": 0.5,  # leakage of the shorted loop over its share of the winding's
    "winding_ohm": 1.0,  # impedance over that of the connection meant
    "load_set": 0.0,  # rated torque; 0: the site's load
    "friction": 0.0,  # rated torque
    "load_drags": 0.0,  # 1: the friction is in the load, not in the motor
    "rise": 1.0,  # factor on the temperature rise
    "earth_ohm": 1e9,  # path from winding to earth
    "jammed": 0.0,
}


ANY, START, RUN, SWITCH = "any", "start capacitor", "run capacitor", "start switch"


@dataclass(frozen=True)
class Variant:
    """One way of an effect: attributes, weight, severities, and the part that a design must have."""

    name: str
    weight: float
    fixed: Mapping[str, float]
    severity: tuple[Severity, ...] = ()
    part: str = ANY

    def suits(self, design: str) -> bool:
        """Whether a design has the part."""
        run, start = design in HAS_RUN_CAPACITOR, design in HAS_START_CAPACITOR
        return {
            ANY: True,
            START: start,
            RUN: run,
            SWITCH: start or design == SPLIT_PHASE,
        }[self.part]


def _one(attribute: str, low: float, high: float) -> tuple[Severity, ...]:
    return (Severity(attribute, low, high),)


VARIANTS: dict[str, tuple[Variant, ...]] = {
    "none": (Variant("", 1.0, {}),),
    "low_voltage": (Variant("", 1.0, {"set_volts": 1.0}, _one("volts_lost", 0.08, 0.30)),),
    "high_voltage": (Variant("", 1.0, {"set_volts": 1.0}, _one("volts_over", 0.08, 0.20)),),
    "no_supply": (Variant("", 1.0, {"live": 0.0}),),
    "start_capacitor_open": (Variant("", 1.0, {"start_open": 1.0}, part=START),),
    "start_capacitor_shorted": (Variant("", 1.0, {"start_shorted": 1.0}, part=START),),
    "start_capacitor_weak": (Variant("", 1.0, {}, _one("start_lost", 0.3, 0.9), part=START),),
    "run_capacitor_open": (Variant("", 1.0, {"run_open": 1.0}, part=RUN),),
    "run_capacitor_shorted": (Variant("", 1.0, {"run_shorted": 1.0}, part=RUN),),
    "run_capacitor_weak": (Variant("", 1.0, {}, _one("run_lost", 0.1, 0.7), part=RUN),),
    "start_switch_open": (Variant("", 1.0, {"switch_open": 1.0}, part=SWITCH),),
    "start_switch_closed": (Variant("", 1.0, {"switch_closed": 1.0}, part=SWITCH),),
    "open_auxiliary": (Variant("", 1.0, {"auxiliary_open": 1.0}),),
    "open_main": (Variant("", 1.0, {"main_open": 1.0}),),
    "main_turn_short": (Variant("", 1.0, {}, _one("turns_shorted", 0.01, 0.25)),),
    "other_connection": (
        Variant("auxiliary reversed", 0.7, {}),
        Variant("wired for the higher voltage", 0.2, {"winding_ohm": 4.0}),
        Variant("wired for the lower voltage", 0.1, {"winding_ohm": 0.25}),
    ),
    "excess_load": (Variant("", 1.0, {}, _one("load_set", 1.15, 2.0)),),
    "light_load": (Variant("", 1.0, {}, _one("load_set", 0.05, 0.3)),),
    "stall": (Variant("", 1.0, {"jammed": 1.0}),),
    "hot": (Variant("", 1.0, {}, _one("rise", 1.3, 3.0)),),
    "friction": (Variant("in the motor", 0.6, {}, _one("friction", 0.005, 0.1)),),
    "earth_path": (Variant("", 1.0, {}, _one("earth_ohm", 1.0, 3e4)),),
}
# Heavy drag may as well be in the load, where it is gone when uncoupled.
_DRAG_IN_LOAD = Variant("in the load", 0.4, {"load_drags": 1.0}, _one("friction", 0.1, 1.0))
_HEAVY = 0.2

_NOT_FITTED: Final = 1e-6
"""Weight of an effect of a part that no design of this motor has."""


def enumerate_modes(
    effect: str,
    designs: Sequence[str],
    shares: Sequence[float],
    severity: tuple[float, float] | None,
    picked: Sequence[int],
) -> tuple[Mode, ...]:
    """List the modes of an effect on each design that has the part.

    The weights add up to the chance that the motor has the part at all.

    Parameters
    ----------
    effect : str
        A key of ``VARIANTS``.
    designs, shares : sequences
        Designs that the plate allows and their shares.
    picked : sequence of int
        Indices of the designs to enumerate.
    severity : tuple or None
        Range that replaces the usual one of the effect.

    Raises
    ------
    KeyError
        If there is no such effect.

    """
    modes: list[Mode] = []
    for index in picked:
        design, share = designs[index], shares[index]
        suited = [variant for variant in _variants(effect, severity) if variant.suits(design)]
        total = sum(variant.weight for variant in suited)
        for variant in suited:
            words = design.replace("_", " ")
            name = variant.name if len(picked) == 1 else f"{variant.name} ({words})".strip()
            modes.append(
                Mode(
                    effect=effect,
                    variant=name,
                    weight=share * variant.weight / total,
                    fixed={**variant.fixed, "design": float(index)},
                    severity=_ranged(variant.severity, severity),
                )
            )
    if modes:
        return tuple(modes)
    likeliest = float(max(picked, key=lambda index: shares[index]))
    return (Mode(effect=effect, variant="not fitted", weight=_NOT_FITTED, fixed={"design": likeliest}),)


def _variants(effect: str, severity: tuple[float, float] | None) -> tuple[Variant, ...]:
    heavy = effect == "friction" and severity is not None and severity[1] > _HEAVY
    return (*VARIANTS[effect], _DRAG_IN_LOAD) if heavy else VARIANTS[effect]


def _ranged(usual: tuple[Severity, ...], asked: tuple[float, float] | None) -> tuple[Severity, ...]:
    if asked is None or not usual:
        return usual
    return (replace(usual[0], low=asked[0], high=asked[1]), *usual[1:])
