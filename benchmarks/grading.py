"""Answers graded cases in process: ``--call benchmarks.grading:answer`` of a grader with plain sheets."""

from __future__ import annotations

from functools import cache
from typing import Any

from calc.sheet_io import sheet_from_plain
from rules.diagnosing import diagnose
from rules.knowledge import Knowledge
from rules.loading import load_knowledge
from tui.jsonout import as_json


@cache
def _knowledge() -> Knowledge:
    return load_knowledge()


def answer(data: dict[str, Any]) -> dict[str, Any]:
    """Weigh one sheet given as plain data, and give the answer as the contract has it."""
    sheet = sheet_from_plain(data, file="case")
    return as_json(diagnose(sheet, knowledge=_knowledge()))
