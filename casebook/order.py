"""The order in which the entries of one case are read.

Time alone will not do: clocks are set back, and two laptops write to one case.
Each entry names the last entry that its writer had seen (``after``) and a
correction names what it corrects. Those come first; all else goes by time, then
by id. The order depends on the set of entries alone, so every casebook that holds
the same entries shows the same sequence.
"""

from __future__ import annotations

import heapq
from collections.abc import Iterable, Mapping
from datetime import datetime
from typing import TypeAlias

from casebook.entry import Entry

_Place: TypeAlias = tuple[datetime, str]


def in_order(entries: Iterable[Entry], names: Mapping[str, str] | None = None) -> list[Entry]:
    """Return entries of one case in reading order; ``names`` maps a correction's id to what it names."""
    named = names or {}
    held = {entry.id: entry for entry in entries}
    by_time = sorted(held.values(), key=_place)
    if _already_right(by_time, held, named):
        return by_time
    return _by_cause(held, named)


def _place(entry: Entry) -> _Place:
    return (entry.time_utc, entry.id)


def _before(entry: Entry, held: Mapping[str, Entry], named: Mapping[str, str]) -> set[str]:
    """Ids that must come before an entry, as far as this set holds them."""
    wanted = {entry.after, named.get(entry.id)}
    return {other for other in wanted if other is not None and other != entry.id and other in held}


def _already_right(by_time: list[Entry], held: Mapping[str, Entry], named: Mapping[str, str]) -> bool:
    seen: set[str] = set()
    for entry in by_time:
        if not _before(entry, held, named) <= seen:
            return False
        seen.add(entry.id)
    return True


def _by_cause(held: Mapping[str, Entry], named: Mapping[str, str]) -> list[Entry]:
    """Sort so that causes come first, earliest first among the free ones; a ring is cut at its earliest."""
    waits = {key: _before(entry, held, named) for key, entry in held.items()}
    followers: dict[str, list[str]] = {}
    for key, causes in waits.items():
        for cause in causes:
            followers.setdefault(cause, []).append(key)
    free = [_place(held[key]) for key, causes in waits.items() if not causes]
    left = sorted(_place(entry) for entry in held.values())  # only used to cut rings
    heapq.heapify(free)
    ordered: list[Entry] = []
    done: set[str] = set()
    cut = iter(left)
    while len(ordered) < len(held):
        place = heapq.heappop(free) if free else next(p for p in cut if p[1] not in done)
        key = place[1]
        if key in done:
            continue
        done.add(key)
        ordered.append(held[key])
        for follower in followers.get(key, ()):
            waits[follower].discard(key)
            if not waits[follower] and follower not in done:
                heapq.heappush(free, _place(held[follower]))
    return ordered
