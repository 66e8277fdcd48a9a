"""What the worksheet offers to pick from, and what a pick means."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from calc.quantities import MEASURES
from casebook.bodies import Closed, Confirmed
from tui.screens.ask import Ask
from tui.screens.pick import Choice
from tui.typed import minutes_of
from tui.words import key_words, percent, plain

if TYPE_CHECKING:
    from collections.abc import Sequence

    from tui.compose import Visit


def shut_question(state: str) -> Ask:
    """Return what is asked before a reading behind the shut gate is entered."""
    return Ask(
        f"The gate is shut for the state '{plain(state)}'. Was it read already, on a running machine?",
        "y enters a reading that is there. n: nothing is energised for it; F6 shows the gate.",
    )


def closing_of(answer: dict[str, str], retest: tuple[str, ...], visit: Visit) -> Closed:
    """Return what the closing page says as what is stored."""
    typed = [(key.split("@"), answer[key]) for key in retest if answer.get(key)]
    again = [visit.understand(measure, state, text) for (measure, state), text in typed]
    return Closed(
        found=answer["found"],
        confirmed=msgspec.convert(answer["confirmed"], Confirmed),
        done=answer["done"],
        parts=tuple(part.strip() for part in answer["parts"].split(",") if part.strip()),
        minutes=minutes_of(answer["minutes"]),
        retest=retest,
        retested=tuple(visit.taken(understood) for understood in again),
        note=answer["note"],
    )


def found_choices(names: dict[str, str], odds: dict[str, float]) -> list[Choice]:
    """Return the faults to choose from, the likeliest first."""
    pairs = {fault: " and ".join(names.get(part, plain(part)) for part in fault.split("+")) for fault in odds}
    every = {**pairs, **{fault: name for fault, name in names.items() if fault not in pairs}}
    ordered = sorted(every, key=lambda fault: -odds.get(fault, 0.0))
    return [Choice(f, every[f], word=percent(odds[f]) if odds.get(f, 0) >= 0.01 else "") for f in ordered]


def stored_choices(visit: Visit) -> dict[str, Choice]:
    """Return what is stored and can be corrected, by entry, newest first."""
    knowledge = visit.knowledge
    return {
        entry: Choice(entry, f"{key_words(key, knowledge)}: {text}", word=key.partition("@")[2] or "seen")
        for entry, key, text in visit.correctable()
    }


def other_choices(visit: Visit, proposed: Sequence[str]) -> list[Choice]:
    """Return all readings and questions that suit the machine: proposed, in the state last read, the rest."""
    knowledge, kind = visit.knowledge, visit.kind
    choices = {}
    for rule in knowledge.readings.values():
        for state in rule.states:
            if rule.id in MEASURES and MEASURES[rule.id].suits(kind):
                key = f"{rule.id}@{state}"
                choices[key] = Choice(
                    key,
                    f"{MEASURES[rule.id].label}, {plain(state)}",
                    word="proposed" if key in proposed else "",
                )
    for seen in knowledge.observations.values():
        if {"any", kind} & set(seen.kinds):
            choices[seen.id] = Choice(seen.id, seen.name, word="proposed" if seen.id in proposed else "")
    order = {key: place for place, key in enumerate(proposed)}
    last = next((reading.state for reading in reversed(visit.sheet.readings)), "")

    def place(choice: Choice) -> tuple[int, bool]:
        return order.get(choice.key, len(order)), choice.key.partition("@")[2] != last

    return sorted(choices.values(), key=place)


def tick_questions(visit: Visit, proposed: Sequence[str | None]) -> list[tuple[str, str]]:
    """Return the id and the words of every observation that suits the machine, the proposed first."""
    fitting = [o for o in visit.knowledge.observations.values() if {"any", visit.kind} & set(o.kinds)]
    fitting.sort(key=lambda o: proposed.index(o.id) if o.id in proposed else len(proposed))
    return [(o.id, o.name) for o in fitting]


def only_one_meant(choices: Sequence[Choice], typed: str) -> str | None:
    """Return the one choice that typed words can mean: the only one, or the only proposed one."""
    words = typed.lower().replace("-", " ").split()
    fitting = [choice for choice in choices if words and choice.matches(words)]
    proposed = [choice for choice in fitting if choice.word]
    named = [choice for choice in proposed if choice.text.lower().startswith(typed.lower().strip())]
    return next((found[0].key for found in (fitting, named, proposed) if len(found) == 1), None)
