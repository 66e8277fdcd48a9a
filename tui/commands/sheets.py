"""Read the case sheet that a command names."""

from __future__ import annotations

import sys
from typing import TYPE_CHECKING

from calc.safe_yaml import SHEET_LIMITS
from calc.sheet_io import read_sheet, sheet_from_text

if TYPE_CHECKING:
    from calc.sheet import CaseSheet

STDIN = "-"


def read(name: str) -> CaseSheet:
    """Return a sheet from a file, or from standard input for ``-``; InputError says what is wrong with it."""
    if name != STDIN:
        return read_sheet(name)
    given = sys.stdin.buffer.read(SHEET_LIMITS.bytes + 1)
    return sheet_from_text(given.decode("utf-8", "replace"), file="standard input")
