"""Graded cases: a case sheet as received (``NNNN.yaml``) and what is true of it (``NNNN.truth.json``)."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeAlias

import yaml

Plain: TypeAlias = dict[str, Any]
Answer: TypeAlias = Callable[[Plain], Plain]


@dataclass(frozen=True)
class Case:
    """One graded case; ``sheet`` and ``truth`` are plain data as their files hold them."""

    name: str
    sheet: Plain
    truth: Plain

    @property
    def faults(self) -> frozenset[str]:
        """Ids that are right as the first entry; of two faults at once either, or both joined."""
        several = self.truth.get("faults") or []
        if len(several) < 2:
            return frozenset({self.truth["fault"]})
        return frozenset({*several, "+".join(sorted(several))})

    @property
    def is_healthy(self) -> bool:
        """Whether nothing is wrong with the machine."""
        return bool(self.truth["fault"] == "healthy")

    @property
    def severity(self) -> str:
        """How far the fault has gone: incipient below .3, moderate below .7, gross."""
        level = float(self.truth.get("severity", 0.0))
        return "incipient" if level < 0.3 else "moderate" if level < 0.7 else "gross"

    def complete_sheet(self) -> Plain:
        """Return the sheet with every reading and observation that could be had."""
        return {
            **self.sheet,
            "readings": list(self.truth["readings"].values()),
            "observations": dict(self.truth["observations"]),
        }


def load_cases(folders: Iterable[Path], limit: int | None = None) -> list[Case]:
    """Read the cases of some folders, in the order of their names; ``limit`` counts per folder."""
    cases = []
    for folder in folders:
        found = sorted(folder.glob("*.truth.json"))
        if not found:
            raise FileNotFoundError(f"{folder}: no graded cases (NNNN.yaml with NNNN.truth.json)")
        cases += [_load(path) for path in found[:limit]]
    return cases


def save_case(case: Case, folder: Path) -> None:
    """Write one case in the format that ``load_cases`` reads."""
    text = yaml.safe_dump(case.sheet, sort_keys=False, default_flow_style=None, width=150)
    (folder / f"{case.name}.yaml").write_text(text, encoding="utf-8")
    truth = json.dumps(case.truth, indent=1, ensure_ascii=False)
    (folder / f"{case.name}.truth.json").write_text(truth, encoding="utf-8")


def _load(truth: Path) -> Case:
    name = truth.name.removesuffix(".truth.json")
    sheet = yaml.safe_load((truth.parent / f"{name}.yaml").read_text(encoding="utf-8"))
    return Case(name, sheet, json.loads(truth.read_text(encoding="utf-8")))
