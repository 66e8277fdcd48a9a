"""What each word of the plain visit does. Every step returns whether the case has changed."""

from __future__ import annotations

from typing import TYPE_CHECKING

import msgspec

from calc.errors import InputError
from calc.quantities import MEASURES, STATES
from casebook import bodies
from tui.answer_text import gate_lines, hazard_texts, reason_lines
from tui.columns import paragraph
from tui.context import values_wanted
from tui.output import say
from tui.picked import item_of
from tui.shift import before_isolated
from tui.talk import NO, YES, ask, ask_choice, ask_yes, match, tell, tell_problems
from tui.typed import minutes_of
from tui.words import fault_name, key_words, measure_name, plain

if TYPE_CHECKING:
    from collections.abc import Callable

    from rules.answer import NextItem
    from tui.compose import Visit
    from tui.typed import Understood


CONFIRMED = {
    "teardown": "seen when it was taken apart",
    "repair": "the repair cured it",
    "believed": "believed, not confirmed",
}


def proposals(visit: Visit) -> tuple[NextItem, ...]:
    """Return what is proposed next, without what was put aside here."""
    return tuple(item for item in visit.weigh().diagnosis.next if item.key not in visit.skipped)


def answer_proposal(visit: Visit, line: str) -> bool:
    """Take a line as the answer to the first proposal."""
    items = proposals(visit)
    if not items:
        tell("Nothing is proposed; `read` takes another reading, `help` lists the words.")
        return False
    first = items[0]
    if first.observation:
        return _observe(visit, first.observation, line)
    return take(visit, str(first.measure), str(first.state), line, first.hazards)


def take(visit: Visit, measure: str, state: str, text: str, hazards: tuple[str, ...]) -> bool:
    """Take one reading: what must come first, what was understood, then into the casebook."""
    understood = visit.understand(measure, state, text)
    if not _first(visit, measure, state, hazards):
        return False
    if not _sure(understood):
        return False
    visit.record(understood)
    return True


def _sure(understood: Understood) -> bool:
    """Say what was understood; ask where it is doubted."""
    tell(understood.echo)
    return not understood.asks or ask_yes(f"{understood.asks}. Is it so?")


def _first(visit: Visit, measure: str, state: str, hazards: tuple[str, ...]) -> bool:
    """Ask for the isolation record or the acknowledgement that a state needs; return whether it is there."""
    wanted = visit.wants_first(state, hazards, measure)
    if wanted == "isolation":
        isolate(visit, "")
        return visit.wants_first(state, hazards, measure) == ""
    if wanted == "acknowledge":
        texts = hazard_texts(hazards, visit.knowledge)
        for text in texts:
            tell(f"! {text}")
        if not ask_yes("Read, and taken care of?"):
            return False
        visit.acknowledge(state, hazards, " ".join(texts))
    return True


def isolate(visit: Visit, _: str) -> bool:
    """Ask for the isolation record."""
    by = ask("Isolated by", visit.person)
    points = ask("Where (points of isolation)")
    locked = ask_yes("Locked out and tagged?")
    before = ask_yes("Tester proved before?")
    dead = ask_yes("Every line to every other and to earth proved dead?")
    after = ask_yes("Tester proved after?")
    also = {
        name: ask_yes(f"{line.name[:1].upper()}{line.name[1:]}?")
        for line in before_isolated(visit.case, visit.knowledge)
        for name in line.asks
    }
    visit.isolate(
        bodies.Isolation(
            by=by,
            points=points,
            locked_out=locked,
            proved_dead=dead and before and after,
            tester_proved_before=before,
            tester_proved_after=after,
        ),
        shown=[name for name, yes in also.items() if yes],
    )
    if not (locked and before and dead and after and all(also.values())):
        tell("This is no complete isolation record; no isolated reading is taken on it.")
    return True


def skip(visit: Visit, why: str) -> bool:
    """Put the first proposal aside."""
    items = proposals(visit)
    if items:
        visit.skip(items[0].key, why)
    return bool(items)


def read(visit: Visit, rest: str) -> bool:
    """Take a reading that is not the proposed one: ``read MEASURE STATE``."""
    words = rest.split()
    fitting = {one.id: one.label for one in MEASURES.values() if one.suits(visit.kind)}
    measures = match(words[0], fitting) if words else []
    states = match(words[1], dict(STATES)) if len(words) > 1 else []
    measure = (
        measures[0]
        if len(measures) == 1
        else ask_choice("Which reading", {m: fitting[m] for m in measures or fitting})
    )
    rule = visit.knowledge.readings.get(measure)
    allowed = {one: f"{plain(one)}: {STATES[one]}" for one in STATES if rule is None or one in rule.states}
    known = [state for state in states if state in allowed]
    state = known[0] if known else ask_choice("In which state", allowed)
    hazards = item_of(f"{measure}@{state}", visit.sheet, visit.knowledge).hazards
    if rule is not None:
        tell(rule.states[state].leads)
    wanted = values_wanted(measure, visit.kind, visit.context_of(measure))
    values = " ".join(words[2:]) or ask(f"{measure_name(measure)}, {plain(state)} ({wanted})")
    return bool(values) and take(visit, measure, state, values, hazards)


def seen(visit: Visit, rest: str) -> bool:
    """Answer any observation: ``seen OBSERVATION yes``."""
    name, _, answer = rest.rpartition(" ")
    if answer.lower() not in YES + NO:
        name, answer = rest, ""
    fitting = {
        one.id: one.name
        for one in visit.knowledge.observations.values()
        if "any" in one.kinds or visit.kind in one.kinds
    }
    found = match(name, fitting)
    observation = (
        found[0] if len(found) == 1 else ask_choice("What", {one: fitting[one] for one in found or fitting})
    )
    return _observe(visit, observation, answer or ask(f"{fitting[observation]} yes/no"))


def _observe(visit: Visit, observation: str, answer: str) -> bool:
    """Store one answer if it is yes or no."""
    if answer.lower() not in YES + NO:
        tell("Answer yes or no, or skip; read takes another reading.")
        return False
    if visit.is_by_hand(observation) and not _first(visit, "", "isolated", ()):
        return False
    visit.observe(observation, answer.lower() in YES)
    return True


def why(visit: Visit, _: str) -> bool:
    """Say what speaks for and against the first faults."""
    for fault in visit.weigh().diagnosis.faults[:3]:
        say(fault.name or fault_name(fault.id, visit.knowledge))
        say(reason_lines(fault, most=8))
    return False


def gate(visit: Visit, _: str) -> bool:
    """Say what stands before energising, and what cleared each line."""
    answer = visit.weigh().diagnosis.energise
    say(gate_lines(answer))
    for line in answer.lines:
        if line.status == "cleared":
            because = f" ({line.because})" if line.because else ""
            say(paragraph(f"{line.needs}{because}", first="  cleared  "))
    return False


def note(visit: Visit, text: str) -> bool:
    """Store a remark."""
    if text:
        visit.note(text)
    return False


def correct(visit: Visit, _: str) -> bool:
    """Correct a reading or an observation, or strike it out."""
    entries = visit.correctable()
    if not entries:
        tell("There is nothing to correct.")
        return False
    named = {entry: f"{key_words(key, visit.knowledge)}: {text}" for entry, key, text in entries}
    chosen = ask_choice("Which entry", named)
    key = next(key for entry, key, _ in entries if entry == chosen)
    text = ask("The right values, or `strike`")
    measure, at, state = key.partition("@")
    if text.lower() == "strike":
        visit.correct(chosen, None)
    elif at:
        understood = visit.understand(measure, state, text)
        if not _sure(understood):
            return False
        visit.correct(chosen, understood)
    elif text.lower() in YES + NO:
        visit.correct(chosen, bodies.Observed(observation=key, answer=text.lower() in YES))
    else:
        return False
    return True


def close(visit: Visit, _: str) -> bool:
    """Ask what was found and done, and close the case."""
    faults = {"healthy": "nothing wrong"} | {
        one.id: one.name for one in visit.knowledge.faults.values() if visit.kind in one.odds
    }
    likely = [fault.id for fault in visit.weigh().diagnosis.faults if fault.id in faults]
    ordered = {one: faults[one] for one in [*likely, *(one for one in faults if one not in likely)]}
    found = ask_choice("What was found", ordered)
    how = ask_choice("How is that known", CONFIRMED)
    whole = visit.knowledge.faults.get(found)
    retest = whole.for_kind(visit.kind).retest if whole is not None else ()
    asked = retest if how != "believed" and found != "healthy" else ()
    again = [taken for key in asked if "@" in key and (taken := _again(visit, key)) is not None]
    minutes = _minutes()
    visit.close(
        bodies.Closed(
            found=found,
            confirmed=msgspec.convert(how, bodies.Confirmed),
            done=ask("What was done"),
            parts=tuple(part.strip() for part in ask("Parts, with commas").split(",") if part.strip()),
            minutes=minutes,
            retest=retest,
            retested=tuple(again),
        )
    )
    return True


def _minutes() -> float | None:
    """Ask how long it took, until that is a number or a blank line."""
    while True:
        try:
            return minutes_of(ask("Minutes"))
        except InputError as error:
            tell_problems(error)


def _again(visit: Visit, key: str) -> bodies.ReadingTaken | None:
    """Ask what a reading shows after the repair; nothing where it was not taken."""
    measure, _, state = key.partition("@")
    wanted = values_wanted(measure, visit.kind, visit.context_of(measure))
    name = f"{measure_name(measure)}, {plain(state)}"
    while text := ask(f"Re-test: {name} ({wanted}; Enter where it was not read)"):
        try:
            understood = visit.understand(measure, state, text)
        except InputError as error:
            tell_problems(error)
            continue
        hazards = item_of(key, visit.sheet, visit.knowledge).hazards
        if _first(visit, measure, state, hazards) and _sure(understood):
            return visit.taken(understood)
    return None


STEPS: dict[str, Callable[[Visit, str], bool]] = {
    "skip": skip, "read": read, "seen": seen, "why": why, "gate": gate,
    "isolate": isolate, "note": note, "correct": correct, "close": close,
}  # fmt: skip
