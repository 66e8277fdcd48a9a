"""Make graded cases of three-phase motors from an invented plant of their own physics and habits.

``python -m benchmarks.cases FOLDER [--n 300] [--seed 1] [--fault ID]``

The plant (``benchmarks/generator``) shares nothing with the models and rules that the cases test.
The same number and seed give the same cases.
"""

from __future__ import annotations

import argparse
from collections.abc import Iterator, Sequence
from dataclasses import asdict
from pathlib import Path
from typing import Any

import numpy as np

from benchmarks.generator.design import Motor, draw_motor
from benchmarks.generator.faults import draw_trouble
from benchmarks.generator.meters import draw_meters, read_everything
from benchmarks.generator.noticing import answers, complaint, first_look, habits, signs_of
from benchmarks.generator.running import Operation, operate
from benchmarks.generator.trouble import Site, Trouble, draw_site
from benchmarks.graded import Case, save_case

LOADS = {
    "pump": ["pump_centrifugal"],
    "fan": ["fan"],
    "constant": ["conveyor", "compressor", "pump_positive", "mixer", "crusher"],
}
WHY_NOT_SPUN = "not used on induction motors"


def make_cases(n: int, seed: int, fault: str | None = None) -> Iterator[Case]:
    """Yield so many cases."""
    for number in range(1, n + 1):
        random = np.random.default_rng([seed, number])
        yield make_case(f"{number:04}", random, fault)


def make_case(name: str, random: np.random.Generator, fault: str | None = None) -> Case:
    """Make one case; machines on which the fault cannot show itself as drawn are drawn again."""
    chosen = fault or _draw_fault(random)
    while True:
        motor, site = draw_motor(random), draw_site(random)
        severity = 0.0 if chosen == "healthy" else round(float(random.uniform(0.05, 1.0)), 3)
        trouble = draw_trouble(chosen, severity, motor, site, random)
        operation = operate(motor, site, trouble)
        if _is_apt(motor, trouble, operation):
            break
    return _case(name, motor, site, trouble, operation, random)


def _draw_fault(random: np.random.Generator) -> str:
    weights = habits()["faults"]
    chances = np.array(list(weights.values()), dtype=float)
    return str(random.choice(list(weights), p=chances / chances.sum()))


def _is_apt(motor: Motor, trouble: Trouble, operation: Operation) -> bool:
    """Return whether the case is one: sound machines start, a relay set low has something to trip on."""
    if trouble.fault == "healthy":
        return operation.mode == "runs"
    if trouble.relay_setting is not None:
        point = operation.points.get("loaded")
        amps = 0.0 if point is None else float(np.max(np.abs(point.flow.line_a[0])))
        return amps > 1.08 * trouble.relay_setting * motor.rated.current_a
    if trouble.fault in {
        "bearing_defect",
        "misalignment",
        "mechanical_unbalance",
        "loose_mounting",
        "damp_insulation",
    }:
        return operation.mode == "runs"
    return True


def _case(
    name: str, motor: Motor, site: Site, trouble: Trouble, operation: Operation, random: np.random.Generator
) -> Case:
    meters = draw_meters(motor, random)
    readings = read_everything(motor, site, trouble, operation, meters, random)
    signs = signs_of(motor, trouble, operation)
    found = answers(operation, signs, random)
    called = complaint(operation, signs, random)
    if called == "after_repair" and random.random() < 0.8:
        found["recently_rewound_or_reconnected"] = True
    kept, said = first_look(readings, found, random)
    sound = draw_trouble("healthy", 0.0, motor, site, random)
    healthy = read_everything(motor, site, sound, operate(motor, site, sound), meters, random)
    machine: dict[str, Any] = {
        "tag": f"TP-{name}",
        "kind": "induction_3ph",
        "supply": {"source": "mains"},
        "nameplate": motor.plate,
    }
    if random.random() < 0.8:
        machine["load"] = {"type": str(random.choice(LOADS[site.law]))}
    sheet = {"format": 1, "machine": machine, "complaint": called, "readings": kept, "observations": said}
    truth = {
        "kind": "induction_3ph",
        "fault": trouble.fault,
        "severity": trouble.severity,
        "detail": _plain(trouble.detail),
        "complaint": called,
        "readings": readings,
        "infeasible_states": {**operation.infeasible, "spun": WHY_NOT_SPUN},
        "observations": found,
        "healthy_readings": healthy,
        "machine": _circuit(motor),
        "context": _plain(
            {"mode": operation.mode, "signs": signs, "meters": asdict(meters), "site": asdict(site)}
        ),
    }
    return Case(name, sheet, truth)


def _circuit(motor: Motor) -> dict[str, Any]:
    return dict(_plain(asdict(motor.winding) | asdict(motor.rated)))


def _plain(found: Any) -> Any:
    """Return numbers that JSON knows."""
    if isinstance(found, dict):
        return {key: _plain(value) for key, value in found.items()}
    if isinstance(found, list | tuple):
        return [_plain(value) for value in found]
    if isinstance(found, complex):
        return [float(found.real), float(found.imag)]
    return found.item() if isinstance(found, np.generic) else found


def main(words: Sequence[str] | None = None) -> int:
    """Write the cases into a folder."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks.cases", description=__doc__)
    parser.add_argument("folder", type=Path)
    parser.add_argument("--n", type=int, default=300, help="how many")
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--fault", choices=sorted(habits()["faults"]), help="only this fault")
    chosen = parser.parse_args(words)
    chosen.folder.mkdir(parents=True, exist_ok=True)
    for case in make_cases(chosen.n, chosen.seed, chosen.fault):
        save_case(case, chosen.folder)
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
