"""What a check in this folder rests on: where the number is published, how it is known, and what it checks.

Every test here carries the mark ``published``; ``tools/published`` reads the marks and writes
``docs/published.md``. The numbers stand in ``data/`` and in the tests, never taken from the rules or
tables that they check.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
import yaml

DATA = Path(__file__).with_name("data")

KNOWN = {
    "looked up": "the number was seen in a text that gives it",
    "from memory": "known, and not seen in print for this check",
    "computed": "follows from published inputs, a closed form or an identity",
    "another road": "an independent library, or differential equations written for the check",
    "common practice": "no published number; trade usage or judgement, as the rule's own source says",
}


@dataclass(frozen=True)
class Source:
    """Where a check's number comes from, and which parts of Plateside it holds against it."""

    standard: str
    clause: str
    says: str
    known: str
    checks: tuple[str, ...]

    def __post_init__(self) -> None:
        if self.known not in KNOWN:
            raise ValueError(f"known is {self.known!r}; one of {', '.join(KNOWN)}")
        if not (self.standard and self.says and self.checks):
            raise ValueError(f"{self}: standard, says and checks must be filled")


def published(
    standard: str, clause: str = "", *, says: str, known: str, checks: str | list[str] | tuple[str, ...]
) -> pytest.MarkDecorator:
    """Return the mark that names a check's source; ``checks`` are names as ``names.py`` explains them."""
    several = (checks,) if isinstance(checks, str) else tuple(checks)
    return pytest.mark.published(Source(standard, clause, says, known, several))


def entries(name: str) -> list[dict[str, Any]]:
    """Return the entries of ``data/NAME.yaml``."""
    found = yaml.safe_load((DATA / f"{name}.yaml").read_text(encoding="utf-8"))
    assert isinstance(found, list)
    return found


def of_entry(entry: dict[str, Any], *checks: str) -> pytest.MarkDecorator:
    """Return the mark of one entry of a data file."""
    return published(
        entry["standard"], entry.get("clause", ""), says=entry["says"], known=entry["known"], checks=checks
    )


def column_table(name: str) -> list[dict[str, str]]:
    """Return the rows of ``data/NAME.csv``; lines that begin with # say where it is from."""
    lines = (DATA / f"{name}.csv").read_text(encoding="utf-8").splitlines()
    head, *rows = [line.split(",") for line in lines if line and not line.startswith("#")]
    return [dict(zip(head, row, strict=True)) for row in rows]
