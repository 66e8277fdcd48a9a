"""The tables beside this module, read once when they are first asked for."""

from __future__ import annotations

import csv
from functools import cache
from pathlib import Path
from typing import Final

from calc.errors import InputError, Problem
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


def code_letter_kva_per_hp(letter: str) -> tuple[float, float | None]:
    """Return the span of locked-rotor kVA per horsepower that a code letter stands for.

    Parameters
    ----------
    letter : str
        A code letter, capital.

    Returns
    -------
    tuple of float and (float or None)
        Lowest value, and the value below which it stays (None for V, which has no end). [kVA/hp]

    Raises
    ------
    KeyError
        If there is no such letter.

    References
    ----------
    NEMA MG 1, 10.37.2 (``tables/code_letters.csv``).

    Examples
    --------
    >>> code_letter_kva_per_hp("G")
    (5.6, 6.3)

    """
    lows = [float(row["low_kva_per_hp"]) for row in rows("code_letters")]
    try:
        place = code_letters().index(letter)
    except ValueError:
        raise KeyError(letter) from None
    return lows[place], lows[place + 1] if place + 1 < len(lows) else None
