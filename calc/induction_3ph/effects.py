"""Effects that the three-phase model understands, and the discrete ways in which each shows.

Severity of an effect is spread evenly in its logarithm between two ends; meaning and unit
stand beside each default. Attributes can be merged, so two effects may act at once.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import cache

from calc.twin import Mode, Severity

OPEN = 200.0  # a series resistance of 200 pu carries half a percent of rated current: open

DEFAULTS: dict[str, float] = {
    "level": 0.0,  # relative change of the supply voltage
    "level_sd": 0.029,
    "unbalance_sd": 0.0042,
    "no_supply": 0.0,
    "frequency_change": 0.0,
    "line_r": 0.0,  # pu, in one line
    "line": 0.0,
    "line_place": 0.0,  # 0 before the volt meter, 1 between it and the ohm meter, 2 at the motor, 3 cable
    "phase": 0.0,
    "phase_r": 0.0,  # pu, inside the winding
    "turns": 0.0,  # shorted fraction of one phase
    "loop": 1.0,  # resistance of the shorted loop, over that of its turns alone
    "reversed": 0.0,
    "path_r": 0.0,  # resistance of a path between two phases, pu; 0: none
    "path_a": 1.0,  # where the path begins in the phase, share of its turns
    "path_b": 1.0,  # where it ends in the next phase
    "earth_ohm": 0.0,  # resistance from one phase to earth; 0: none
    "impedance": 1.0,  # all winding impedances times
    "bars": 0.0,  # broken fraction of the rotor bars
    "load": 0.0,  # torque over rated where it is set; 0: the latent decides
    "load_low": 0.28,
    "load_high": 1.06,
    "stall": 0.0,
    "load_stalls": 0.0,  # 1: it is the load that stands, and the motor turns uncoupled
    "running_star": 0.0,  # 1: energised in star although linked for delta
    "upstream": 0.0,  # 1: the line is open on the primary of a delta-star transformer
    "hot": 1.0,
    "friction": 0.0,  # extra torque over rated
    "bearing_k": 0.0,  # heat of a bearing over its usual temperature, K
    "delta": 0.0,
}

_LINES = (0, 1, 2)


def _each(effect: str, count: int, **attributes: float) -> tuple[Mode, ...]:
    return tuple(
        Mode(
            effect=effect, variant=f"{'UVW'[i]}", weight=1.0 / count, fixed={"phase": float(i), **attributes}
        )
        for i in range(count)
    )


def _severe(modes: tuple[Mode, ...], attribute: str, severity: tuple[float, float]) -> tuple[Mode, ...]:
    step = (Severity(attribute, *severity),)
    return tuple(replace(m, severity=step) for m in modes)


def _one(
    effect: str, attribute: str, severity: tuple[float, float], sign: float = 1.0, **fixed: float
) -> tuple[Mode, ...]:
    low, high = severity
    ends = Severity(attribute, sign * low, sign * high)
    return (Mode(effect=effect, fixed=fixed, severity=(ends,)),)


def _with_stall(modes: tuple[Mode, ...], share: float, *, free_uncoupled: bool = False) -> tuple[Mode, ...]:
    """Add the variant in which the shaft stands, with a share of the weight; uncoupled it may turn."""
    stands = {"stall": 1.0, "load_stalls": 1.0 if free_uncoupled else 0.0}
    running = tuple(replace(m, weight=m.weight * (1.0 - share)) for m in modes)
    standing = tuple(
        replace(
            m, variant=f"{m.variant} standing".strip(), weight=m.weight * share, fixed={**m.fixed, **stands}
        )
        for m in modes
    )
    return running + standing


def _lines(effect: str, places: dict[int, float], **fixed: float) -> tuple[Mode, ...]:
    # In the cable: volts read at the motor and ohms at the starter, so that both meters see it.
    names = {
        0: "before the volt meter",
        1: "between volt meter and ohm meter",
        2: "at the motor",
        3: "in the cable",
    }
    return tuple(
        Mode(
            effect=effect,
            variant=f"L{line + 1}, {names[place]}",
            weight=weight / 3.0,
            fixed={"line": float(line), "line_place": float(place), **fixed},
        )
        for place, weight in places.items()
        for line in _LINES
    )


def _series_resistance(severity: tuple[float, float]) -> tuple[Mode, ...]:
    in_lines = _severe(_lines("series_resistance", {0: 0.31, 1: 0.31, 2: 0.17, 3: 0.06}), "line_r", severity)
    inside = _severe(_each("series_resistance", 3), "phase_r", severity)
    return in_lines + tuple(
        replace(m, variant=f"joint of phase {m.variant}", weight=0.15 / 3) for m in inside
    )


def _open_line(_severity: tuple[float, float]) -> tuple[Mode, ...]:
    """One line open before or behind the volt meter, or before a delta-star transformer (1 : 2 : 1)."""
    here = _with_stall(_lines("open_line", {0: 0.42, 1: 0.42, 3: 0.08}, line_r=OPEN), 0.5)
    upstream = tuple(
        replace(
            m, variant=f"L{m.variant[1]}, upstream of the transformer", cause="open_upstream_of_transformer"
        )
        for m in _with_stall(_lines("open_line", {0: 0.08}, line_r=OPEN, upstream=1.0), 0.5)
    )
    return here + upstream


def _open_phase(_severity: tuple[float, float]) -> tuple[Mode, ...]:
    return _with_stall(_each("open_phase", 3, phase_r=OPEN), 0.4)


def _turn_short(severity: tuple[float, float]) -> tuple[Mode, ...]:
    steps = (Severity("turns", *severity), Severity("loop", 1.0, 25.0))
    modes = tuple(replace(m, severity=steps) for m in _each("turn_short", 3))
    return _with_stall(modes, 0.06)


def _phase_short(severity: tuple[float, float]) -> tuple[Mode, ...]:
    """Path between two phases, near the terminals, mid-winding, or at unlike places."""
    places = ((0.85, 0.85), (0.35, 0.35), (0.8, 0.3), (0.3, 0.8))
    ends = (Severity("path_r", *severity),)
    return tuple(
        Mode(
            effect="phase_short",
            variant=f"{'UVW'[k]}-{'VWU'[k]}",
            weight=1.0 / 12.0,
            fixed={"phase": float(k), "path_a": a, "path_b": b},
            severity=ends,
        )
        for k in range(3)
        for a, b in places
    )


def _broken_bars(severity: tuple[float, float]) -> tuple[Mode, ...]:
    return _one("broken_bars", "bars", severity)


def _off_frequency(severity: tuple[float, float]) -> tuple[Mode, ...]:
    fixed = {"level_sd": 0.05}
    low = _one("off_frequency", "frequency_change", severity, -1.0, **fixed)
    high = _one("off_frequency", "frequency_change", severity, 1.0, **fixed)
    return tuple(replace(m, variant=v, weight=0.5) for m, v in ((low[0], "low"), (high[0], "high")))


def _friction(severity: tuple[float, float]) -> tuple[Mode, ...]:
    steps = (Severity("friction", *severity), Severity("bearing_k", 2.0, 45.0))
    return (Mode(effect="friction", severity=steps),)


def _other_connection(_severity: tuple[float, float]) -> tuple[Mode, ...]:
    ways = (
        ("star for delta", "star_for_delta", 0.45, {"impedance": 3.0, "delta": 0.0}),
        ("delta for star", "delta_for_star", 0.35, {"impedance": 1 / 3.0, "delta": 1.0}),
        ("high range on low voltage", "voltage_range", 0.1, {"impedance": 4.0}),
        ("low range on high voltage", "voltage_range", 0.1, {"impedance": 0.25}),
    )
    modes = tuple(
        Mode(effect="other_connection", variant=name, weight=w, fixed=fixed, cause=cause)
        for name, cause, w, fixed in ways
    )
    return _with_stall(modes, 0.3, free_uncoupled=True)


def _stall(_severity: tuple[float, float]) -> tuple[Mode, ...]:
    """The motor itself is seized, or what it drives: then it turns uncoupled."""
    return (
        Mode(effect="stall", variant="motor seized", weight=0.45, fixed={"stall": 1.0}),
        Mode(effect="stall", variant="load seized", weight=0.55, fixed={"stall": 1.0, "load_stalls": 1.0}),
    )


def _stuck_in_star(_severity: tuple[float, float]) -> tuple[Mode, ...]:
    """A star-delta starter that does not change over: it runs in star, and is read in delta at rest."""
    mode = Mode(effect="stuck_in_star", variant="stays in star", fixed={"running_star": 1.0})
    return _with_stall((mode,), 0.3, free_uncoupled=True)


_MAKERS: dict[str, tuple[Callable[[tuple[float, float]], tuple[Mode, ...]], tuple[float, float]]] = {
    "none": (lambda _s: (Mode(effect="none"),), (1.0, 1.0)),
    # fraction below rated
    "low_voltage": (
        lambda s: _with_stall(_one("low_voltage", "level", s, -1.0), 0.12, free_uncoupled=True),
        (0.08, 0.30),
    ),
    # fraction above rated
    "high_voltage": (lambda s: _one("high_voltage", "level", s), (0.08, 0.20)),
    # one sigma of each component of V2/V1
    "voltage_unbalance": (lambda s: _one("voltage_unbalance", "unbalance_sd", s), (0.012, 0.05)),
    "open_line": (_open_line, (1.0, 1.0)),
    # pu of rated impedance, in one line or joint
    "series_resistance": (_series_resistance, (0.01, 0.6)),
    # relative change of frequency, both ways
    "off_frequency": (_off_frequency, (0.03, 0.22)),
    "no_supply": (lambda _s: (Mode(effect="no_supply", fixed={"no_supply": 1.0, "stall": 1.0}),), (1.0, 1.0)),
    # shorted fraction of one phase
    "turn_short": (_turn_short, (0.003, 0.15)),
    # resistance of the path between two phases, pu
    "phase_short": (_phase_short, (0.05, 50.0)),
    # resistance to earth, ohm
    "earth_path": (lambda s: _severe(_each("earth_path", 3), "earth_ohm", s), (0.3, 1e5)),
    "open_phase": (_open_phase, (1.0, 1.0)),
    "other_connection": (_other_connection, (1.0, 1.0)),
    "reversed_phase": (lambda _s: _each("reversed_phase", 3, reversed=1.0, stall=1.0), (1.0, 1.0)),
    # fraction of bars
    "broken_bars": (_broken_bars, (0.015, 0.25)),
    # torque over rated
    "excess_load": (
        lambda s: _with_stall(_one("excess_load", "load", s), 0.06, free_uncoupled=True),
        (1.12, 2.0),
    ),
    "light_load": (lambda s: _one("light_load", "load", s), (0.01, 0.28)),
    "stall": (_stall, (1.0, 1.0)),
    "stuck_in_star": (_stuck_in_star, (1.0, 1.0)),
    # temperature rise times
    "hot": (lambda s: _one("hot", "hot", s), (1.25, 3.0)),
    # extra torque over rated
    "friction": (_friction, (0.003, 0.1)),
}

EFFECTS = tuple(_MAKERS)


@cache
def modes(effect: str, severity: tuple[float, float] | None, connection: str | None) -> tuple[Mode, ...]:
    """Enumerate the ways of an effect on a winding linked in star, delta, or unknown (both, half each).

    Raises
    ------
    KeyError
        If the model knows no such effect.

    """
    make, default = _MAKERS[effect]
    found = make(severity or default)
    inside = effect in {"turn_short", "phase_short", "open_phase", "reversed_phase", "series_resistance"}
    if connection in {"star", "delta"} or not inside:
        return tuple(_linked(m, connection == "delta", 1.0) for m in found)
    return tuple(_linked(m, delta, 0.5) for m in found for delta in (False, True))


def _linked(mode: Mode, delta: bool, share: float) -> Mode:
    fixed = {"delta": 1.0 if delta else 0.0, **mode.fixed}
    word = "" if share == 1.0 else (" in delta" if delta else " in star")
    return replace(mode, variant=f"{mode.variant}{word}".strip(), weight=mode.weight * share, fixed=fixed)
