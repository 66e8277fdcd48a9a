"""Finds what typed words mean among names: beginnings of words, one slip of the keys forgiven."""

from __future__ import annotations

from itertools import takewhile
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

SHORTEST: Final = 4
"""Letters that a word must have before a slip in it is forgiven: shorter ones can mean anything."""


def words_of(text: str) -> list[str]:
    """Return the words of a text as they are compared: small letters, hyphens and underscores as spaces."""
    return text.lower().replace("_", " ").replace("-", " ").replace(",", " ").split()


def begins(typed: Sequence[str], name: str) -> bool:
    """Whether every typed word begins a word of a name."""
    parts = words_of(name)
    return all(any(part.startswith(word) for part in parts) for word in typed)


def nearly_begins(typed: Sequence[str], name: str) -> bool:
    """Whether every typed word begins a word of a name, one slip of the keys in each forgiven."""
    parts = words_of(name)
    return all(any(part.startswith(word) or _slipped(word, part) for part in parts) for word in typed)


def found(text: str, names: Iterable[tuple[str, str]]) -> list[str]:
    """Return the ids whose names hold words that begin as typed; those with a slip where there are none."""
    typed, pairs = words_of(text), list(names)
    for fits in (begins, nearly_begins):
        ids = [one for one, name in pairs if typed and fits(typed, name)]
        if ids:
            return ids
    return []


def _slipped(word: str, part: str) -> bool:
    """Whether a word is the beginning of another, with one letter wrong, missing, too many or swapped."""
    if len(word) < SHORTEST:
        return False
    return any(_one_apart(word, part[:length]) for length in range(len(word) - 1, len(word) + 2))


def _one_apart(one: str, other: str) -> bool:
    """Whether two words differ by one letter, or by two neighbours that are swapped."""
    same = sum(1 for _ in takewhile(lambda pair: pair[0] == pair[1], zip(one, other, strict=False)))
    left, right = one[same:], other[same:]
    swapped = left[:2] == right[1::-1] and left[2:] == right[2:]
    return swapped or left[1:] == right[1:] or left[1:] == right or left == right[1:]
