"""The tables beside this module, each with its source in its head, read once when first asked for."""

from __future__ import annotations

import csv
from functools import cache
from pathlib import Path
from typing import Final

from calc.errors import InputError, Problem, RangeError
from calc.safe_yaml import Plain, read_document

TABLES: Final = Path(__file__).with_name("tables")


@cache
def rows(name: str) -> tuple[dict[str, str], ...]:
    """Return the rows of ``tables/NAME.csv``; lines that begin with # are its head."""
    text = (TABLES / f"{name}.csv").read_text(encoding="utf-8")
    return tuple(csv.DictReader(line for line in text.splitlines() if not line.startswith("#")))


@cache
def table(name: str) -> dict[str, Plain]:
    """Return ``tables/NAME.yaml`` as plain data."""
    path = TABLES / f"{name}.yaml"
    data = read_document(path).data
    if not isinstance(data, dict):
        raise InputError([Problem(str(path), "", "no mapping", "a table of names and values")])
    return data


def code_letters() -> tuple[str, ...]:
    """Return the locked-rotor code letters, A to V without I, O, Q."""
    return tuple(row["letter"] for row in rows("code_letters"))


def code_letter_kva_per_hp(letter: str) -> tuple[float, float]:
    """Return the span of locked-rotor kVA per horsepower that a code letter stands for.

    Parameters
    ----------
    letter : str
        A code letter, capital.

    Returns
    -------
    tuple of float
        Lowest value, and the value below which it stays. [kVA/hp]

    Raises
    ------
    RangeError
        If there is no such letter.

    Notes
    -----
    A has no lower end and V no upper one in the standard; both get the width of
    their neighbour here (2.80 and 25.1), so that a middle can be taken.

    References
    ----------
    .. [1] NEMA MG 1, 10.37.2 (``code_letters.csv``).

    Examples
    --------
    >>> code_letter_kva_per_hp("G")
    (5.6, 6.3)

    """
    for row in rows("code_letters"):
        if row["letter"] == letter:
            return float(row["low_kva_per_hp"]), float(row["high_kva_per_hp"])
    raise RangeError("letter", letter, f"one of {', '.join(code_letters())}")


def curve(name: str, poles: int) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return one column of a table by size: the powers in W, rising, and the values for a number of poles."""
    columns = [int(key) for key in rows(name)[0] if key.isdigit()]
    column = str(min(columns, key=lambda known: abs(known - poles)))
    return tuple(1000.0 * float(r["kw"]) for r in rows(name)), tuple(float(r[column]) for r in rows(name))
