"""Plain questions that open a case: which machine, what its plate says, what is wrong, which kit."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Final

from calc.errors import InputError, PlatesideError
from calc.quantities import KINDS
from calc.sheet_io import sheet_from_plain
from casebook.errors import CasebookError
from tui.begun import DRAFT, Begun, waiting
from tui.compose import Visit
from tui.harmless import harmless
from tui.output import say
from tui.people import USUAL_KIT
from tui.plate_lines import hear, machine_of, plate_lines, raw_of, usual_choice
from tui.talk import Back, Left, ask, ask_choice, ask_several, ask_yes, tell

if TYPE_CHECKING:
    from casebook.book import Casebook
    from rules.knowledge import Knowledge
    from tui.drafts import Drafts
    from tui.plate_lines import Raw

CASE_NUMBER: Final = re.compile(r"C-[0-9A-Z]{6,12}", re.IGNORECASE)
"""A number as it is shown; a machine's tag may begin with ``C-`` too, as C-5 compressor does."""


def ask_case(book: Casebook, drafts: Drafts, person: str, knowledge: Knowledge) -> Visit:
    """Go on with an open case that is named by its number, or open a new one."""
    begun = _taken_up(drafts)
    while True:
        try:
            found = begun or _named(book, drafts, person, knowledge)
            if isinstance(found, Visit):
                return found
            begun = found
            if begun is not None and (visit := _opened(book, begun, drafts, person, knowledge)) is not None:
                drafts.drop(begun.name)
                return visit
        except Back:
            begun = None


def _named(book: Casebook, drafts: Drafts, person: str, knowledge: Knowledge) -> Visit | Begun | None:
    """Ask for a machine or a case: an open case, or a new one that is begun; None where it is neither."""
    name = ask("Machine tag for a new case, or number of an open case")
    if not CASE_NUMBER.fullmatch(name):
        return Begun(tag=name, name=drafts.free_name(DRAFT)) if name else None
    try:
        return Visit(book, book.case_id(name), person=person, knowledge=knowledge)
    except CasebookError as error:
        tell(str(error))
        return None


def _taken_up(drafts: Drafts) -> Begun | None:
    """Return the new case that was begun and not stored, where the person goes on with it."""
    for name in waiting(drafts):
        begun = Begun.of(drafts.load(name), name)
        said = f"{harmless(begun.tag or 'no tag')}: a new case was begun and not stored."
        if ask_yes(f"{said} Go on with it?"):
            return begun
    return None


def _opened(book: Casebook, begun: Begun, drafts: Drafts, person: str, knowledge: Knowledge) -> Visit | None:
    """Ask for what is still to be told and open the case; None where it could not be stored and goes on."""
    machine = _machine(book, begun, drafts)
    begun.complaint = begun.complaint or _complaint(machine["kind"], knowledge)
    drafts.save(begun.name, begun.kept())
    sheet = {"format": 1, "machine": machine, "complaint": begun.complaint, "kit": _kit(drafts, knowledge)}
    try:
        return Visit.new(book, sheet_from_plain(sheet), person=person, knowledge=knowledge)
    except InputError as error:
        for problem in error.problems:
            tell(f"{problem.where}: {problem.given}; {problem.allowed}")
    except PlatesideError as error:
        tell(str(error))
        if not ask_yes("Try again? What you told stays"):
            raise Left from error
    return None


def _machine(book: Casebook, begun: Begun, drafts: Drafts) -> Raw:
    """Return the machine as a sheet holds it: recalled by its tag, or asked for."""
    known = book.machine(begun.tag or "") if not begun.kind else None
    if known is not None:
        plain = raw_of(known)
        tell(f"Known: {', '.join(f'{name} {value}' for name, value in plain.get('nameplate', {}).items())}")
        if ask_yes("Is it this one?"):
            return plain
    if begun.kind not in KINDS:
        begun.kind = ask_choice("Kind of machine", KINDS)
    say("What the plate says; Enter where it says nothing, or where it is right in brackets.")
    for line in plate_lines(begun.kind):
        while text := ask(f"{line.word} ({line.hint})", begun.lines.get(line.field, "")):
            said, is_kept = hear(line, text)
            if is_kept:
                begun.lines[line.field] = text
                drafts.save(begun.name, begun.kept())
                if usual_choice(line, text):
                    tell(f"{line.word}: {said}.")
                break
            begun.lines.pop(line.field, None)
            tell(said)
    return machine_of(begun.kind, begun.tag or "", begun.lines)


def _complaint(kind: str, knowledge: Knowledge) -> str:
    """Ask what is wrong, with the complaints that such a machine can have; what means stop is first."""
    fitting = [one for one in knowledge.complaints.values() if "any" in one.kinds or kind in one.kinds]
    fitting.sort(key=lambda complaint: not complaint.stop)
    names = {one.id: f"STOP: {one.name}" if one.stop else one.name for one in fitting}
    return ask_choice("What is wrong", names, also={one.id: " ".join(one.also) for one in fitting})


def _kit(drafts: Drafts, knowledge: Knowledge) -> list[str]:
    """Return the kit: asked once and remembered."""
    kept = drafts.recall("kit")
    if isinstance(kept, list) and kept:
        return [str(instrument) for instrument in kept]
    known = sorted({name for rule in knowledge.readings.values() for name in rule.instruments} - {"eyes"})
    say("What do you carry? It is asked only once; nothing else is proposed.")
    kit = ask_several("You carry", {name: name.replace("_", " ") for name in known}, USUAL_KIT)
    drafts.remember("kit", kit)
    return kit
