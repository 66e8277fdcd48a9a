"""Many case sheets in one file: YAML documents, one after the other, each behind a line of ``---``."""

from __future__ import annotations

import dataclasses
import re
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO, Final

from calc.errors import InputError, Problem
from calc.safe_yaml import SHEET_LIMITS, document_from_bytes
from calc.sheet import CaseSheet
from calc.sheet_io import sheet_from_document

# At the start of a line this ends a document whatever stands around it (YAML 1.2, section 9.1.2).
_MARK: Final = re.compile(rb"---(?=[\s]|$)")
_LONGEST_LINE: Final = SHEET_LIMITS.bytes + 1


@dataclass(frozen=True)
class SheetAt:
    """One sheet of a file, or what is wrong with it, and the line on which it begins."""

    line: int
    sheet: CaseSheet | None
    error: InputError | None = None


def read_sheets(path: Path, *, file: str = "") -> Iterator[SheetAt]:
    """Yield every case sheet of a file, called ``file`` in messages; a bad one does not stop the others.

    Each document may be as long as a sheet may be; the file may be longer, and is never held whole.
    Raises ``OSError`` if the file cannot be read.
    """
    with path.open("rb") as stream:
        for line, raw in _documents(stream):
            try:
                yield SheetAt(line, sheet_from_document(document_from_bytes(raw, file=file)))
            except InputError as error:
                moved = [_moved(problem, line - 1) for problem in error.problems]
                yield SheetAt(line, None, InputError(moved))


def _moved(problem: Problem, lines: int) -> Problem:
    """Return a problem with its line counted from the start of the file."""
    return dataclasses.replace(problem, line=problem.line + lines) if problem.line is not None else problem


def _documents(file: BinaryIO) -> Iterator[tuple[int, bytes]]:
    """Yield first line and bytes of each document that holds anything; of a longer one the beginning."""
    held, first, says_something = bytearray(), 1, False
    number = 0
    while piece := file.readline(_LONGEST_LINE):
        number += 1
        while not piece.endswith(b"\n") and (rest := file.readline(_LONGEST_LINE)):
            piece = (piece + rest)[:_LONGEST_LINE] + rest[-1:]
        if _MARK.match(piece):
            if says_something:
                yield first, bytes(held)
            held, first, says_something = bytearray(), number, _says(piece[3:])
        else:
            says_something = says_something or _says(piece)
        if len(held) < _LONGEST_LINE:
            held += piece
    if says_something:
        yield first, bytes(held)


def _says(line: bytes) -> bool:
    """Whether a line holds more than a comment, a directive or the end of a document."""
    bare = line.removeprefix(b"\xef\xbb\xbf").strip()
    return bool(bare) and not bare.startswith((b"#", b"%")) and bare != b"..."
