"""The visit as plain questions and answers: the same engine, the same casebook, no full screen."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calc.errors import InputError, PlatesideError
from casebook.book import Casebook, open_casebook
from tui import people
from tui.answer_text import (
    answer_lines,
    fault_lines,
    finding_lines,
    gate_lines,
    item_name,
    next_lines,
    stop_lines,
    titled,
)
from tui.compose import Visit
from tui.context import values_wanted
from tui.drafts import Drafts
from tui.output import say
from tui.plain_intake import ask_case
from tui.plain_steps import STEPS, answer_proposal, proposals
from tui.talk import Back, Left, ask, tell, tell_problems

if TYPE_CHECKING:
    from pathlib import Path

    from rules.knowledge import Knowledge

HELP = (
    "Type the values that are asked for, as the meter shows them:",
    "  15.2 15.9 14.8, 0.42, 1.2k, >5G, open; - is a value that was not read.",
    "  What was noted with it goes behind: 350 at 24 C 500 V; 1.91 1.92 1.90 at 24 4-wire.",
    "Or one of these words:",
    "  skip [WHY]               put the proposed item aside",
    "  read MEASURE STATE       take another reading",
    "  seen OBSERVATION yes/no  say what was seen, heard or smelt",
    "  why, all, gate           the reasons; the whole answer; the gate, line by line",
    "  isolate, note TEXT       the isolation record; a remark",
    "  correct                  correct or strike out an entry",
    "  close, leave             close the case with what was found; leave it open",
    "  back                     leave any question without an answer",
)


def converse(path: Path, knowledge: Knowledge, *, use_learned: bool = True) -> int:
    """Hold one visit; every answer that is accepted is in the casebook. Returns the exit status."""
    with open_casebook(path) as book:
        for note in book.notes:
            tell(note)
        try:
            _visit(book, Drafts(path), knowledge, use_learned=use_learned)
        except (Left, Back):
            say("Left. What was accepted is in the casebook.")
    return 0


def _visit(book: Casebook, drafts: Drafts, knowledge: Knowledge, *, use_learned: bool) -> None:
    """Ask who and which case, then go on until the case is closed or left."""
    person = ask("Your name", str(drafts.recall("person") or people.login_name()))
    drafts.remember("person", person)
    visit = ask_case(book, drafts, person, knowledge)
    visit.use_learned = use_learned
    say(f"Case {visit.number}. Type help for the words that are understood.")
    if said := visit.learned_words():
        tell(f"Note: {said}")
    show(visit)
    while visit.case.status == "open":
        changed = False
        try:
            changed = _one(visit, ask(_asked(visit)))
        except InputError as error:
            tell_problems(error)
        except PlatesideError as error:
            tell(str(error))
        except Back:
            tell("Back; nothing of it was stored.")
        if changed and visit.case.status == "open":
            show(visit)
    say(f"Case {visit.number} is closed. `plateside report {visit.number}` prints its sheet.")


def show(visit: Visit) -> None:
    """Say what stands now: the gate, the limits crossed, the likely faults, the next reading."""
    answer = visit.weigh().diagnosis
    say(stop_lines(visit.sheet, visit.knowledge))
    say(gate_lines(answer.energise))
    say(titled("Limits crossed", finding_lines(answer.findings)))
    say(titled("Likely faults", fault_lines(answer, visit.knowledge)))
    say(titled("Next", next_lines(proposals(visit), visit.knowledge)))


def _asked(visit: Visit) -> str:
    """Return the prompt: the item that a bare answer answers."""
    items = proposals(visit)
    if not items:
        return "Nothing is proposed; help lists the words"
    first = items[0]
    measure = first.measure or ""
    wanted = values_wanted(measure, visit.kind, visit.context_of(measure)) if measure else "yes or no"
    return f"{item_name(first, visit.knowledge)} ({wanted})"


def _one(visit: Visit, line: str) -> bool:
    """Do what one line says; return whether the case has changed."""
    word, _, rest = line.partition(" ")
    step = STEPS.get(word.lower())
    if step is not None:
        return step(visit, rest.strip())
    match word.lower():
        case "leave" | "quit" | "exit":
            raise Left
        case "help" | "?":
            say(HELP)
        case "all":
            say(answer_lines(visit.weigh().diagnosis, visit.sheet, visit.knowledge))
        case "":
            say(titled("Next", next_lines(proposals(visit), visit.knowledge)))
        case _:
            return answer_proposal(visit, line)
    return False
