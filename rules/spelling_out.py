"""Entries that a table spells out: one form with ``columns`` and ``rows``, filled once from every row.

``{name}`` in a text of the form stands for the cell of the column of that name.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from itertools import islice
from typing import Final

from calc.safe_yaml import Plain
from rules.decoding import MOST_MISTAKES, Mistake, did_you_mean

MOST_ROWS: Final = 500
"""Rows that one form may have."""
MOST_TEXT: Final = 200_000
"""Characters that one form may spell out to, at most."""
LONGEST_CELL: Final = 200
_TABLE: Final = ("columns", "rows")
_GAP: Final = re.compile(r"\{([a-z_][a-z0-9_]*)\}")


def spelled_out(plain: Plain) -> tuple[list[Plain], list[Mistake]]:
    """Return the entries that an entry stands for, or what is wrong with its table.

    An entry without ``columns`` and ``rows`` stands for itself.
    """
    if not isinstance(plain, dict) or not any(name in plain for name in _TABLE):
        return [plain], []
    form: dict[str, Plain] = {name: part for name, part in plain.items() if name not in _TABLE}
    if mistakes := list(islice(_mistakes(plain, form), MOST_MISTAKES)):
        return [], mistakes
    columns, rows = _list(plain["columns"]), _list(plain["rows"])
    cells = (dict(zip(map(str, columns), map(str, _list(row)), strict=True)) for row in rows)
    return [_filled(form, row) for row in cells], []


def _mistakes(plain: Mapping[str, Plain], form: Plain) -> Iterator[Mistake]:
    columns, rows = plain.get("columns"), plain.get("rows")
    for name, part in (("columns", columns), ("rows", rows)):
        if not isinstance(part, list) or not part:
            yield Mistake((name,), "no list", f"columns and rows go together; {name} is a list")
    if not isinstance(columns, list) or not isinstance(rows, list):
        return
    gaps = {gap: path for path, text in _texts(form, ()) for gap in _GAP.findall(text)}
    names = [column for column in columns if isinstance(column, str)]
    for name in sorted(set(gaps) - set(names)):
        yield Mistake(gaps[name], f"{{{name}}}", did_you_mean(name, names))
    if len(rows) > MOST_ROWS:
        yield Mistake(("rows",), f"{len(rows)} rows", f"at most {MOST_ROWS}")
    longest = sum(len(text) + LONGEST_CELL * len(_GAP.findall(text)) for _, text in _texts(form, ()))
    if longest * len(rows) > MOST_TEXT:
        yield Mistake(("rows",), "too much text", f"a form that spells out to at most {MOST_TEXT} characters")
    for index, row in enumerate(rows):
        if not isinstance(row, list) or len(row) != len(columns):
            yield Mistake(("rows", index), "another row", f"a list of {len(columns)} cells, one a column")
        elif not all(isinstance(cell, str) and len(cell) <= LONGEST_CELL for cell in row):
            yield Mistake(("rows", index), "another cell", f"texts of at most {LONGEST_CELL} characters")


def _texts(part: Plain, path: tuple[str | int, ...]) -> Iterator[tuple[tuple[str | int, ...], str]]:
    """Yield every text of plain data with its path."""
    if isinstance(part, str):
        yield path, part
    elif isinstance(part, dict):
        for key, value in part.items():
            yield from _texts(value, (*path, key))
    elif isinstance(part, list):
        for index, value in enumerate(part):
            yield from _texts(value, (*path, index))


def _filled(part: Plain, cells: Mapping[str, str]) -> Plain:
    """Return plain data with every gap filled."""
    if isinstance(part, str):
        return _GAP.sub(lambda gap: cells[gap[1]], part)
    if isinstance(part, dict):
        return {key: _filled(value, cells) for key, value in part.items()}
    return [_filled(value, cells) for value in part] if isinstance(part, list) else part


def _list(part: Plain) -> list[Plain]:
    return part if isinstance(part, list) else []
