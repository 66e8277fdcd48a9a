"""Case numbers: short enough to say over the radio, and the same on every machine.

A running number would be given twice by two laptops. So a case's number is taken
from the random end of its id (a UUID), in the 32 letters and digits that are not
mistaken for each other (no I, L, O, U). Six of them are shown: ``C-7K3F9Q``.
Where two cases of one casebook share six, both show as many as tell them apart:
a number that stands on paper may grow, it never changes. Any beginning that is
unique is understood.
"""

from __future__ import annotations

from typing import Final
from uuid import UUID

from casebook.errors import BadRow

ALPHABET: Final = "0123456789ABCDEFGHJKMNPQRSTVWXYZ"
SHOWN: Final = 6
LENGTH: Final = 12
_READ_AS: Final = str.maketrans({"I": "1", "L": "1", "O": "0"})


def full_number(case: str) -> str:
    """Return the twelve characters of a case's number, without the ``C-``.

    They are the low 60 bits of the id, read from its end, where it is random.
    """
    try:
        bits = UUID(case).int
    except ValueError as error:
        raise BadRow(f"{case!r:.40} is no id of a case") from error
    return "".join(ALPHABET[(bits >> (5 * place)) & 31] for place in range(LENGTH))


def shown_number(full: str, neighbours: tuple[str, ...] = ()) -> str:
    """Return a number as people see it: six characters, more where a neighbour begins alike."""
    needed = SHOWN
    for other in neighbours:
        if other != full:
            needed = max(needed, _common(full, other) + 1)
    return "C-" + full[:needed]


def read_number(text: str) -> str | None:
    """Return the beginning of a full number that was typed, or None if it is no number.

    Small letters, a missing ``C-`` and I, L, O for 1, 1, 0 are understood.
    """
    stem = "".join(text.upper().split())
    stem = stem.removeprefix("C-") if stem.startswith("C-") else stem
    stem = stem.replace("-", "").translate(_READ_AS)
    if not stem or len(stem) > LENGTH or any(character not in ALPHABET for character in stem):
        return None
    return stem


def _common(one: str, other: str) -> int:
    for place, (a, b) in enumerate(zip(one, other, strict=False)):
        if a != b:
            return place
    return min(len(one), len(other))
