"""``plateside learned``: what the shop's own confirmed cases do to the odds, and how well the odds did."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from calc.errors import InputError, Problem
from calc.quantities import KINDS
from casebook.book import open_casebook
from rules.learned import shifts
from tui import cli, places
from tui.columns import columns, paragraph
from tui.experience import as_counts
from tui.learned_text import reliability_rows, score_rows, shift_rows, size_text
from tui.output import say, say_json
from tui.words import kind_name

if TYPE_CHECKING:
    from argparse import Namespace

    from casebook.learned import LearnedCounts, Score
    from rules.knowledge import Knowledge
    from rules.learned import Shift

SHIFTS_SHOWN = 12
INTRODUCTION = (
    "Only faults confirmed by teardown or repair count. What is shipped weighs as a few cases; odds never "
    "open the gate. --no-learned leaves these shifts out."
)


def run(arguments: Namespace) -> int:
    """Show every shift by kind and size, then the scoreboard; of one kind, or of all."""
    kind = arguments.kind or ""
    if kind and kind not in KINDS:
        raise InputError([Problem(file="", where="KIND", given=kind, allowed=f"one of {', '.join(KINDS)}")])
    knowledge = places.knowledge(arguments)
    with open_casebook(places.existing_casebook(arguments)) as book:
        groups = book.learned_groups(kind)
        scores = [score for score in book.scoreboard() if not kind or score.kind == kind]
    if arguments.json:
        for group in groups:
            say_json(_as_json(group, knowledge))
        for score in scores:
            say_json({"scoreboard": score.kind or "all", **_score_json(score)})
        return cli.DONE
    if not groups:
        say("No fault is confirmed yet by teardown or repair; the odds are those that are shipped.")
        return cli.DONE
    say(paragraph(INTRODUCTION))
    for group in _shown(groups):
        say(_group_lines(group, knowledge))
    say(_score_lines(scores))
    return cli.DONE


def _shown(groups: list[LearnedCounts]) -> list[LearnedCounts]:
    """Return the groups without a whole that one size makes up alone."""
    sized = {(group.kind, group.cases) for group in groups if group.size is not None}
    return [group for group in groups if group.size is not None or (group.kind, group.cases) not in sized]


def _group_lines(group: LearnedCounts, knowledge: Knowledge) -> list[str]:
    """Return the shifts of one kind and size: starting odds, then what was noted with each fault."""
    found = shifts(knowledge, group.kind, as_counts(group))
    title = f"{kind_name(group.kind)}, {size_text(group.size)}: {group.cases} confirmed"
    if not found:
        return ["", *paragraph(title), "  no fault that the rules know for this kind"]
    lines = ["", *paragraph(title)]
    counted = [one for one in found if not one.about and one.cases]
    lines += _table("starting odds", counted, knowledge)
    rest = next((one for one in found if not one.about and not one.cases), None)
    if rest is not None:
        lines.append(f"every other fault: {rest.after / rest.before:.2f} of what is shipped")
    return lines + _table("chance of what was noted", [one for one in found if one.about], knowledge)


def _table(title: str, found: list[Shift], knowledge: Knowledge) -> list[str]:
    """Return the largest shifts as a table; nothing where there are none."""
    if not found:
        return []
    rows = shift_rows(found[:SHIFTS_SHOWN], knowledge)
    lines = columns(rows, head=(title, "shipped", "now", "cases"), right=(1, 2, 3))
    return lines + ([f"and {len(found) - SHIFTS_SHOWN} smaller ones"] if len(found) > SHIFTS_SHOWN else [])


def _score_lines(scores: list[Score]) -> list[str]:
    """Return how often the first suspect was right, and how reliable the odds were."""
    if not scores:
        return ["", "No confirmed case shows odds yet: no scoreboard."]
    board = ("how well the odds did", "cases", "first right", "in first 3", "readings", "minutes")
    shown = ("odds shown", "faults", "mean", "found")
    return [
        "",
        *columns(score_rows(scores), head=board, right=(1, 2, 3, 4, 5)),
        "",
        *columns(reliability_rows(scores[0]), head=shown, right=(1, 2, 3)),
    ]


def _as_json(group: LearnedCounts, knowledge: Knowledge) -> dict[str, object]:
    """Return one group with its shifts as plain objects."""
    found = shifts(knowledge, group.kind, as_counts(group))
    return {
        "kind": group.kind,
        "size": size_text(group.size),
        "cases": group.cases,
        "shifts": msgspec.to_builtins(found),
    }


def _score_json(score: Score) -> dict[str, object]:
    """Return one line of the scoreboard as plain objects."""
    plain: dict[str, object] = msgspec.to_builtins(score)
    return {name: value for name, value in plain.items() if name != "kind"}
