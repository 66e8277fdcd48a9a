"""What Plateside never says: no permission, no all-clear, no dangerous thing to do."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Final

import msgspec

from rules.decoding import Steps

_NEVER: Final = re.compile(
    r"""
    \bsafe(?:ly)?\b | (?<!prove\ )(?<!proved\ )(?<!proving\ )(?<!prove\ it\ )\bdead\b | \bgood\b
    | \b(?:ok|okay|fine)\ to\b | \ball\ clear\b
    | \bmay\ be\ (?:energi[sz]ed|started|re-?started|switched\ on|put\ back)\b
    | \b(?:can|is\ allowed\ to|allowed\ to)\ be\ energi[sz]ed\b
    | \bby-?pass | \bjumper | \bbridge\ (?:out|over|the\ contact)
    | \bhold(?:ing)?\ (?:in\ )?the\ contactor | \bcontactor\ held\ in\b | \bpush\ the\ contactor\ in\b
    | \bturn\ (?:it|the\ (?:shaft|rotor|motor))\ by\ hand\ (?:while|with\ the\ power|when\ energi)
    | \bspin(?:ning)?\ (?:it|the\ (?:shaft|rotor|motor))\ by\ hand | \bopen\ the\ (?:shunt\ )?field\b
    | \b(?:raise|increase|turn\ up)\ the\ (?:overload|relay|setting|trip) | \bset\ the\ relay\ higher
    | \b(?:arc[- ]flash|PPE)\ category\b | \bopen\ (?:an?|the)\ (?:explosion|flame)-?proof
    | \bopen\ (?:an?|the)\ explosion-protected
    """,
    re.IGNORECASE | re.VERBOSE,
)


def unwanted(text: str) -> tuple[str, ...]:
    """Return the words of a text that Plateside never says."""
    return tuple(found.group(0) for found in _NEVER.finditer(text))


def texts_in(part: object, path: Steps = ()) -> Iterator[tuple[Steps, str]]:
    """Yield every text inside a rule or an answer, with its path."""
    if isinstance(part, str):
        yield path, part
    elif isinstance(part, msgspec.Struct):
        for name in part.__struct_fields__:
            yield from texts_in(getattr(part, name), (*path, name))
    elif isinstance(part, dict):
        for key, value in part.items():
            yield from texts_in(value, (*path, str(key)))
    elif isinstance(part, list | tuple):
        for index, value in enumerate(part):
            yield from texts_in(value, (*path, index))
