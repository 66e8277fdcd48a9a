"""How faults come about: each drawn as changes to a sound machine on its site."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np

from benchmarks.generator.circuit import BOX, OPEN_OHM, TAP, TURN
from benchmarks.generator.design import Motor
from benchmarks.generator.trouble import Random, Site, Triple, Trouble


def draw_trouble(fault: str, severity: float, motor: Motor, site: Site, random: Random) -> Trouble:
    """Draw one fault of a severity between 0 and 1."""
    plain = Trouble(
        fault,
        severity,
        {"load_fraction": round(site.load, 3), "law": site.law, "ambient": round(site.ambient_c, 1)},
    )
    if fault == "healthy":
        return replace(plain, severity=0.0)
    return _DRAW[fault](plain, severity, motor, site, random)


def _at(line: int, value: float, otherwise: float = 0.0) -> Triple:
    a, b, c = (value if k == line else otherwise for k in range(3))
    return a, b, c


def _says(plain: Trouble, changes: dict[str, Any], **detail: Any) -> Trouble:
    return replace(plain, detail={**plain.detail, **detail}, **changes)


def _base_ohm(motor: Motor) -> float:
    """Rated voltage of a line to neutral over rated current."""
    return motor.rated.volts / (3**0.5 * motor.rated.current_a)


def _low(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return replace(t, level=0.89 - 0.17 * s)


def _high(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return replace(t, level=1.11 + 0.12 * s)


def _unbalance(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    size = 0.018 + 0.045 * s
    if r.random() < 0.6:
        k = int(r.integers(3))
        a, b, c = (complex(1 - 3 * size / (1 + size) if i == k else 1.0) for i in range(3))
        return _says(t, {"pattern": (a, b, c)}, cause="one phase low")
    turned = size * np.exp(2j * np.pi * r.random())
    a, b, c = (complex(1 + turned * TURN ** (2 * i)) for i in range(3))
    return _says(t, {"pattern": (a, b, c)}, cause="negative sequence", v2_over_v1=size)


def _open_line(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    line, where = int(r.integers(3)), str(r.choice(["up", "down", "primary"], p=[0.5, 0.35, 0.15]))
    changes: dict[str, Any] = {"runs_on": bool(r.random() < 0.45)}
    if where == "up":
        changes["before_ohm"] = _at(line, OPEN_OHM)
    elif where == "down":
        changes["after_ohm"] = _at(line, OPEN_OHM)
    else:
        # a primary line of a delta-star transformer dead: two secondary phases at half, the third opposed
        straight = [complex(-0.866 if k == line else 0.433) for k in range(3)]
        turned = [straight[k] / TURN ** (2 * k) for k in range(3)]
        changes["pattern"] = (turned[0], turned[1], turned[2])
    return _says(t, changes, line=line + 1, where=where)


def _joint(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    ohm = _base_ohm(m) * 0.008 * 14**s
    line, where = int(r.integers(3)), str(r.choice(["up", "down", "joint"], p=[0.4, 0.25, 0.35]))
    name = {"up": "before_ohm", "down": "after_ohm", "joint": "joint_ohm"}[where]
    return _says(t, {name: _at(line, ohm)}, line=line + 1, where=where, ohm=ohm)


def _frequency(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    if r.random() < 0.5:
        other = 60.0 / 50.0 if m.rated.hertz == 50.0 else 50.0 / 60.0
        return _says(
            t, {"hertz_times": other, "level": float(r.choice([1.0, 0.96, other]))}, cause="other grid"
        )
    return _says(
        t, {"hertz_times": 1 + (0.04 + 0.09 * s) * r.choice([-1, 1])}, cause="generator off its speed"
    )


def _dead(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return replace(t, dead=True)


def _misset(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return replace(t, relay_setting=0.92 - 0.4 * s)


def _turns(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    k, share = int(r.integers(3)), 0.004 * 30**s
    ohm = m.winding.voltage_v / m.winding.current_a * 10 ** r.uniform(-4.5, -2)
    return _says(
        t,
        {"tap": _at(k, share, 0.5), "shorts": ((BOX + k, TAP + k, ohm),)},
        phase=k + 1,
        share=share,
        ohm=ohm,
    )


def _phases(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    k = int(r.integers(3))
    taps = [0.5, 0.5, 0.5]
    taps[k], taps[(k + 1) % 3] = r.uniform(0.04, 0.7, 2)
    ohm = m.winding.voltage_v / m.winding.current_a * 10 ** (1.4 - 2.9 * s)
    return _says(
        t,
        {"tap": tuple(taps), "shorts": ((TAP + k, TAP + (k + 1) % 3, ohm),)},
        phases=[k + 1, (k + 1) % 3 + 1],
        ohm=ohm,
    )


def _earth(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    k, share, ohm = int(r.integers(3)), float(r.uniform(0.03, 0.95)), 10 ** (5.2 - 4.4 * s)
    shorts = ((TAP + k, -1, ohm),) if site.neutral_earthed else ()
    changes = {
        "tap": _at(k, share, 0.5),
        "shorts": shorts,
        "insulation_ohm": ohm,
        "polarisation": float(r.uniform(0.97, 1.05)),
    }
    return _says(t, changes, phase=k + 1, ohm=ohm)


def _open_winding(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    k = int(r.integers(3))
    return _says(t, {"extra_ohm": _at(k, OPEN_OHM), "runs_on": bool(r.random() < 0.4)}, phase=k + 1)


def _connection(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return _says(t, {"other_connection": True}, type="delta as star" if m.rated.is_delta else "star as delta")


def _reversed(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    k = int(r.integers(3))
    return _says(t, {"sense": _at(k, -1.0, 1.0)}, phase=k + 1)


def _damp(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    ohm = 1e6 * 10 ** (0.9 - 2.0 * s) * np.exp(r.normal(0, 0.3))
    return replace(t, insulation_ohm=float(ohm), polarisation=float(r.uniform(1.0, 1.4)))


def _bars(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    bars = max(1, round(0.16 * s * m.bars))
    share = bars / m.bars
    return _says(
        t, {"bars": share, "rotor_times": 1 + 2.2 * share, "vibration": 1 + 1.2 * s}, bars=bars, of=m.bars
    )


def _bearing(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    times = float(np.exp(r.normal(0.2 + 1.3 * s, 0.25)))
    return replace(
        t,
        vibration=times,
        vibration_uncoupled=times,
        bearing_k=float(3 + 38 * s * r.uniform(0.5, 1.3)),
        drag=0.02 * s,
    )


def _misaligned(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return replace(
        t,
        vibration=float(np.exp(r.normal(0.45 + 1.3 * s, 0.2))),
        bearing_k=float(14 * s * r.uniform(0.5, 1.4)),
        drag=0.015 * s,
    )


def _unbalanced(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    times = float(np.exp(r.normal(0.5 + 1.4 * s, 0.2)))
    own = bool(r.random() < 0.4)
    return _says(
        t,
        {"vibration": times, "vibration_uncoupled": times if own else 1.0, "bearing_k": 5 * s},
        part="rotor" if own else "driven",
    )


def _loose(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    times = float(np.exp(r.normal(0.4 + 1.3 * s, 0.25)))
    return replace(t, vibration=times, vibration_uncoupled=times * float(r.uniform(0.7, 1.0)))


def _jam(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    kind = str(r.choice(["motor seized", "driven machine seized", "rubbing"], p=[0.3, 0.4, 0.3]))
    if kind != "rubbing":
        return _says(t, {"seized": kind.split(maxsplit=1)[0]}, type=kind)
    own = bool(r.random() < 0.4)
    return _says(
        t,
        {
            "drag": 0.25 + 0.7 * s,
            "drag_in_motor": own,
            "vibration": 1 + s,
            "vibration_uncoupled": 1 + s * own,
            "bearing_k": 12 * s,
        },
        type=kind,
        part="motor" if own else "driven",
    )


def _overload(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    factor = float(m.plate.get("service_factor", 1.0))
    return replace(t, load=factor * (1.08 + 0.75 * s))


def _lost(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return replace(t, load=0.22 - 0.2 * s)


def _cooling(t: Trouble, s: float, m: Motor, site: Site, r: Random) -> Trouble:
    return replace(t, cooling=1.3 + 1.0 * s)


_DRAW: dict[str, Callable[[Trouble, float, Motor, Site, Random], Trouble]] = {
    "low_supply_voltage": _low,
    "high_supply_voltage": _high,
    "supply_voltage_unbalance": _unbalance,
    "open_supply_line": _open_line,
    "high_resistance_connection": _joint,
    "wrong_frequency": _frequency,
    "no_supply_at_terminals": _dead,
    "overload_relay_misset": _misset,
    "turn_short": _turns,
    "phase_to_phase_short": _phases,
    "ground_fault": _earth,
    "open_winding": _open_winding,
    "wrong_connection": _connection,
    "reversed_winding": _reversed,
    "damp_insulation": _damp,
    "broken_rotor_bars": _bars,
    "bearing_defect": _bearing,
    "misalignment": _misaligned,
    "mechanical_unbalance": _unbalanced,
    "loose_mounting": _loose,
    "jammed_shaft": _jam,
    "overload": _overload,
    "load_lost": _lost,
    "cooling_lost": _cooling,
}
