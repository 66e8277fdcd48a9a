"""Read the case sheet that a command names."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from calc.sheet import CaseSheet

STDIN = "-"


def read(name: str) -> CaseSheet:
    """Return a sheet from a file, or from standard input for ``-``; InputError says what is wrong with it."""
    from calc import sheet_io

    if name == STDIN:
        return sheet_io.read_sheet_text(sys.stdin.buffer.read(), file="standard input")
    return sheet_io.read_sheet(Path(name))
