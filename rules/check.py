"""What ``plateside check-rules`` asks: all that is wrong with the rules."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from calc.errors import Problem
from rules.loading import build, read_texts


def check_rules(folders: Sequence[Path] = ()) -> list[Problem]:
    """Return every problem of the shipped rules and of a shop's own folders, in reading order."""
    texts, problems = read_texts(folders)
    _, found = build(texts, extra_folders=folders, thorough=True)
    return sorted([*problems, *found], key=lambda problem: (problem.file, problem.line or 0))
