"""What was learned from confirmed cases, as cells of tables."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from casebook.learned import SIZE_EDGES_W
from tui.harmless import harmless
from tui.words import complaint_name, fault_name, kind_name, question

if TYPE_CHECKING:
    from collections.abc import Iterable

    from casebook.learned import Score
    from rules.knowledge import Knowledge
    from rules.learned import Shift

ROOM: Final = 56  # eighty columns with three numbers beside it


def size_text(size: int | None) -> str:
    """Return a size class in words; None is every size."""
    edges = [f"{edge / 1000:g}" for edge in SIZE_EDGES_W]
    if size is None:
        return "all sizes (holds where the plate says no output)"
    if size == 0:
        return f"below {edges[0]} kW"
    if size >= len(edges):
        return f"from {edges[-1]} kW"
    return f"{edges[size - 1]} to {edges[size]} kW"


def shift_rows(found: Iterable[Shift], knowledge: Knowledge) -> list[tuple[str, ...]]:
    """Return what was moved, from which chance to which, by how many cases."""
    return [
        (_moved(one, knowledge), _share(one.before), _share(one.after), f"{one.cases:g}") for one in found
    ]


def score_rows(scores: Iterable[Score]) -> list[tuple[str, ...]]:
    """Return the scoreboard: all kinds first."""
    return [
        (
            kind_name(score.kind) if score.kind else "all kinds",
            str(score.cases),
            _of(score.first_right, score.cases),
            _of(score.in_first_three, score.cases),
            f"{score.readings:g}",
            f"{score.minutes:.0f}",
        )
        for score in scores
    ]


def reliability_rows(score: Score) -> list[tuple[str, ...]]:
    """Return how often faults were found that were shown with odds of a range."""
    return [
        (f"{_share(one.low)} to {_share(one.high)}", str(one.shown), _share(one.mean), _share(one.found))
        for one in score.reliability
    ]


def _moved(one: Shift, knowledge: Knowledge) -> str:
    fault = fault_name(one.fault, knowledge)
    if not one.about:
        return fault
    known = one.about in knowledge.observations
    about = question(one.about, knowledge) if known else complaint_name(one.about, knowledge)
    return harmless(f"{fault}: {about.rstrip('?')}", limit=ROOM)


def _share(chance: float) -> str:
    return f"{100 * chance:.1f} %" if chance < 0.0995 else f"{100 * chance:.0f} %"


def _of(some: int, of: int) -> str:
    return f"{some} ({100 * some / of:.0f} %)" if of else "-"
