"""What people notice about a machine, why somebody called, and what stands on the sheet at first."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import yaml

from benchmarks.generator.design import Motor
from benchmarks.generator.meters import vibration
from benchmarks.generator.running import Operation
from benchmarks.generator.trouble import Trouble

Random = np.random.Generator
Signs = dict[str, float]
LIMIT_C = {"B": 120.0, "F": 145.0, "H": 165.0}
RUNNING_ONLY = frozenset(
    {"trips_with_normal_current", "load_disconnected", "current_swings", "runs_backwards"}
)
ENERGISED_ONLY = frozenset({"hums", "hum_stops_with_power", "bearing_noise"})


@cache
def habits() -> dict[str, Any]:
    """Return the tables of habits."""
    text = (Path(__file__).parent / "habits.yaml").read_text(encoding="utf-8")
    return dict(yaml.safe_load(text))


def signs_of(motor: Motor, trouble: Trouble, operation: Operation) -> Signs:
    """Return what there is to notice, each between 0 and 1."""
    s = trouble.severity
    of_fault: dict[str, Signs] = {
        "open_supply_line": {"one_phase": 1.0},
        "open_winding": {"one_phase": 0.8},
        "supply_voltage_unbalance": {"uneven": 0.3 + 0.6 * s},
        "high_resistance_connection": {"joint": s, "uneven": 0.5 * s},
        "turn_short": {"winding": 0.2 + 0.8 * s},
        "phase_to_phase_short": {"phase_short": 0.2 + 0.8 * s, "winding": 0.5 * s},
        "ground_fault": {"earthed": 0.3 + 0.7 * s},
        "damp_insulation": {"damp": 0.4 + 0.6 * s},
        "wrong_connection": {"misconnected": 1.0, "weak": 0.7},
        "reversed_winding": {"misconnected": 1.0, "uneven": 1.0},
        "broken_rotor_bars": {"cage": 0.2 + 0.8 * s},
        "bearing_defect": {"bad_bearing": 0.2 + 0.8 * s},
        "misalignment": {"coupling": 0.3 + 0.7 * s},
        "loose_mounting": {"loose": 0.3 + 0.7 * s},
        "cooling_lost": {"blocked": 0.5 + 0.5 * s},
        "load_lost": {"lost": 0.5 + 0.5 * s},
        "overload_relay_misset": {"relay": 1.0},
        "low_supply_voltage": {"weak": 0.3 + 0.5 * s},
    }
    signs = dict(of_fault.get(trouble.fault, {}))
    if trouble.fault == "jammed_shaft":
        signs |= {"seized": 1.0} if trouble.seized else {"rubbing": 0.4 + 0.6 * s}
        signs |= {"seized_motor": 1.0} if trouble.seized == "motor" else {}
    signs |= {"stalled_live": 1.0} if operation.mode == "stalls" else {}
    return signs | _running_signs(motor, trouble, operation)


def _running_signs(motor: Motor, trouble: Trouble, operation: Operation) -> Signs:
    point = operation.points.get("loaded")
    if point is None:
        return {}
    rated = motor.rated
    amps = (
        float(np.max(np.abs(point.flow.line_a[0])))
        / rated.current_a
        / float(motor.plate.get("service_factor", 1.0))
    )
    shake = np.log(vibration(motor, trouble, "loaded") / 2.5) / np.log(2.5)
    rpm = 120 * operation.hertz / rated.poles * (1 - point.slip)
    found = {
        "overcurrent": (amps - 1.05) / 0.25,
        "overheated": (point.winding_c - LIMIT_C[rated.insulation] + 12) / 25,
        "shaking": float(shake),
        "slow": (rated.rpm - rpm) / (1.5 * rated.slip * rated.sync_rpm),
        "fast": (rpm / rated.sync_rpm - 1.003) / 0.02,
    }
    found = {name: float(np.clip(x, 0, 1)) for name, x in found.items()}
    return found | {"calm": 1.0 - max(found.values(), default=0.0)}


def answers(operation: Operation, signs: Signs, random: Random) -> dict[str, bool]:
    """Return every yes-or-no answer that can be had; one in twelve of the rarer ones nobody knows."""
    found = {}
    for name, weights in habits()["observations"].items():
        if name in RUNNING_ONLY and operation.mode != "runs":
            continue
        if name in ENERGISED_ONLY and operation.mode in {"dead", "trips"} and name != "bearing_noise":
            continue
        if random.random() < 0.04:
            continue
        chance = sum(
            weight * (1.0 if sign == "base" else signs.get(sign, 0.0)) for sign, weight in weights.items()
        )
        found[name] = bool(random.random() < np.clip(chance, 0.01, 0.98))
    return found


def complaint(operation: Operation, signs: Signs, random: Random) -> str:
    """Return why somebody called."""
    t = habits()
    if operation.mode == "trips" and "earthed" in signs and random.random() < t["earth_trip_if_earthed"]:
        return "earth_fault_trip"
    if operation.mode != "runs":
        if "misconnected" in signs and random.random() < t["after_repair_if_misconnected"]:
            return "after_repair"
        weights = t[{"stalls": "stalled", "dead": "dead", "trips": "tripped"}[operation.mode]]
    else:
        weights = {
            name: sum(w * (1.0 if sign == "base" else signs.get(sign, 0.0)) for sign, w in parts.items())
            for name, parts in t["complaints"].items()
        }
    chances = np.array(list(weights.values()), dtype=float)
    return str(random.choice(list(weights), p=chances / chances.sum()))


def first_look(
    readings: dict[str, Any], found: dict[str, bool], random: Random
) -> tuple[list[Any], dict[str, bool]]:
    """Return the readings and answers that stand on the sheet as received."""
    t = habits()
    kept = [reading for key, reading in readings.items() if random.random() < t["first_look"].get(key, 0.0)]
    said = {name: answer for name, answer in found.items() if random.random() < t["first_answers"]}
    return kept, said
