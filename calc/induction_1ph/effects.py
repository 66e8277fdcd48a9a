"""In what ways a single-phase motor may differ from a sound one, as attributes of the model.

An attribute that is a flag is 0 or 1; the others carry what their comment says.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Final

from calc.induction_1ph.plate import HAS_RUN_CAPACITOR, HAS_START_CAPACITOR, SPLIT_PHASE
from calc.twin import Mode, Severity

# design: index among the designs that the plate allows. stands: 0 starts, 1 does not start with its
# load coupled, 2 does not start at all. helped: runs without starting torque, since somebody turned it.
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
    "winding_ohm": 1.0,  # impedance over that of the connection meant
    "load_set": 0.0,  # rated torque; 0: the site's load
    "friction": 0.0,  # rated torque
    "load_drags": 0.0,  # 1: the friction is in the load, not in the motor
    "rise": 1.0,  # factor on the temperature rise
    "earth_ohm": 1e9,  # path from winding to earth
    "jammed": 0.0,
    "stands": 0.0,
    "trips": 0.0,  # protection opens within seconds of a start
}


@dataclass(frozen=True)
class Variant:
    """One way of an effect: attributes, weight, severities, and the parts that a design must have."""

    name: str
    weight: float
    fixed: Mapping[str, float]
    severity: tuple[Severity, ...] = ()
    needs_run: bool = False
    needs_start: bool = False
    needs_switch: bool = False
    only_run: bool = False

    def suits(self, design: str) -> bool:
        """Whether a design has the parts."""
        run, start = design in HAS_RUN_CAPACITOR, design in HAS_START_CAPACITOR
        switch = start or design == SPLIT_PHASE
        return not (
            (self.needs_run and not run)
            or (self.needs_start and not start)
            or (self.needs_switch and not switch)
            or (self.only_run and switch)
        )


def _one(attribute: str, low: float, high: float) -> tuple[Severity, ...]:
    return (Severity(attribute, low, high),)


def _start_dead(flag: str) -> tuple[Variant, ...]:
    """Ways of a dead start circuit: it stands, or was helped and runs."""
    return (
        Variant("stands", 0.72, {flag: 1.0, "stands": 2.0}),
        Variant("stands coupled", 0.2, {flag: 1.0, "stands": 1.0}),
        Variant("runs", 0.08, {flag: 1.0}),
    )


def _only(variants: tuple[Variant, ...], part: str) -> tuple[Variant, ...]:
    """Restrict variants to the designs that have a part: ``run``, ``start``, ``switch``, ``run alone``."""
    return tuple(
        replace(
            variant,
            needs_run=part in {"run", "run alone"},
            needs_start=part == "start",
            needs_switch=part == "switch",
            only_run=part == "run alone",
        )
        for variant in variants
    )


VARIANTS: dict[str, tuple[Variant, ...]] = {
    "none": (Variant("", 1.0, {}),),
    "low_voltage": (
        Variant("runs", 0.85, {"set_volts": 1.0}, _one("volts_lost", 0.08, 0.30)),
        Variant("stands coupled", 0.15, {"set_volts": 1.0, "stands": 1.0}, _one("volts_lost", 0.08, 0.30)),
    ),
    "high_voltage": (Variant("", 1.0, {"set_volts": 1.0}, _one("volts_over", 0.08, 0.20)),),
    "no_supply": (Variant("", 1.0, {"live": 0.0, "stands": 2.0}),),
    "start_capacitor_open": _only(_start_dead("start_open"), "start"),
    "start_capacitor_shorted": _only(_start_dead("start_shorted"), "start"),
    "start_capacitor_weak": (
        Variant("starts", 0.6, {}, _one("start_lost", 0.3, 0.9), needs_start=True),
        Variant("stands coupled", 0.4, {"stands": 1.0}, _one("start_lost", 0.3, 0.9), needs_start=True),
    ),
    "run_capacitor_open": (
        *_only(_start_dead("run_open"), "run alone"),
        Variant("runs", 1.0, {"run_open": 1.0}, needs_run=True, needs_switch=True),
    ),
    "run_capacitor_shorted": (
        *_only(_start_dead("run_shorted"), "run alone"),
        Variant("stands", 0.4, {"run_shorted": 1.0, "stands": 2.0}, needs_run=True, needs_switch=True),
        Variant(
            "stands coupled", 0.3, {"run_shorted": 1.0, "stands": 1.0}, needs_run=True, needs_switch=True
        ),
        Variant("trips", 0.3, {"run_shorted": 1.0, "trips": 1.0}, needs_run=True, needs_switch=True),
    ),
    "run_capacitor_weak": (
        Variant("runs", 0.8, {}, _one("run_lost", 0.1, 0.7), needs_run=True),
        Variant("stands coupled", 0.15, {"stands": 1.0}, _one("run_lost", 0.25, 0.7), needs_run=True),
        Variant("stands", 0.05, {"stands": 2.0}, _one("run_lost", 0.4, 0.8), needs_run=True),
    ),
    "start_switch_open": _only(_start_dead("switch_open"), "switch"),
    "start_switch_closed": (
        Variant("trips", 0.75, {"switch_closed": 1.0, "trips": 1.0}, needs_switch=True),
        Variant("runs", 0.25, {"switch_closed": 1.0}, needs_switch=True),
    ),
    "open_auxiliary": _start_dead("auxiliary_open"),
    "open_main": (
        Variant("stands", 0.9, {"main_open": 1.0, "stands": 2.0}),
        Variant("runs", 0.1, {"main_open": 1.0}),
    ),
    "main_turn_short": (
        Variant("runs", 0.7, {}, _one("turns_shorted", 0.01, 0.25)),
        Variant("trips", 0.2, {"trips": 1.0}, _one("turns_shorted", 0.03, 0.25)),
        Variant("stands coupled", 0.1, {"stands": 1.0}, _one("turns_shorted", 0.03, 0.25)),
    ),
    "other_connection": (
        Variant("auxiliary reversed", 0.7, {}),
        Variant("wired for the higher voltage", 0.15, {"winding_ohm": 4.0}),
        Variant("wired for the higher voltage, stands", 0.05, {"winding_ohm": 4.0, "stands": 1.0}),
        Variant("wired for the lower voltage", 0.05, {"winding_ohm": 0.25}),
        Variant("wired for the lower voltage, trips", 0.05, {"winding_ohm": 0.25, "trips": 1.0}),
    ),
    "excess_load": (
        Variant("runs", 0.85, {}, _one("load_set", 1.15, 2.0)),
        Variant("stands coupled", 0.15, {"stands": 1.0}, _one("load_set", 1.15, 2.5)),
    ),
    "light_load": (Variant("", 1.0, {}, _one("load_set", 0.05, 0.3)),),
    "stall": (
        Variant("motor", 0.55, {"jammed": 1.0, "stands": 2.0}),
        Variant("load", 0.45, {"jammed": 1.0, "stands": 1.0}),
    ),
    "hot": (Variant("", 1.0, {}, _one("rise", 1.3, 3.0)),),
    "friction": (
        Variant("in the motor", 0.6, {}, _one("friction", 0.005, 0.1)),
        Variant("in the load", 0.4, {"load_drags": 1.0}, _one("friction", 0.005, 0.1)),
    ),
    "earth_path": (
        Variant("runs", 0.5, {}, _one("earth_ohm", 1.0, 3e4)),
        Variant("trips", 0.5, {"trips": 2.0}, _one("earth_ohm", 1.0, 3e4)),
    ),
}


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
        suited = [variant for variant in VARIANTS[effect] if variant.suits(design)]
        total = sum(variant.weight for variant in suited)
        for variant in suited:
            name = variant.name if len(picked) == 1 else f"{variant.name} ({design})".strip()
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


def _ranged(usual: tuple[Severity, ...], asked: tuple[float, float] | None) -> tuple[Severity, ...]:
    if asked is None or not usual:
        return usual
    return (replace(usual[0], low=asked[0], high=asked[1]), *usual[1:])
