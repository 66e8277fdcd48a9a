"""Plain questions that open a case: which machine, what its plate says, what is wrong, which kit."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calc.errors import InputError
from calc.quantities import KINDS
from calc.sheet import CaseSheet
from calc.sheet_io import sheet_from_plain, sheet_to_plain
from casebook.errors import UnknownCase
from tui.compose import Visit, recall
from tui.output import say
from tui.plate_lines import hear, machine_of, plate_lines
from tui.talk import ask, ask_choice, ask_yes, tell

if TYPE_CHECKING:
    from calc.sheet import Machine
    from casebook.book import Casebook
    from rules.knowledge import Knowledge
    from tui.drafts import Drafts


def ask_case(book: Casebook, drafts: Drafts, person: str, knowledge: Knowledge) -> Visit:
    """Go on with an open case that is named by its number, or open a new one."""
    while True:
        name = ask("Machine tag for a new case, or number of an open case")
        if not name:
            continue
        if name.upper().startswith("C-"):
            try:
                return Visit(book, book.case_id(name), person=person, knowledge=knowledge)
            except UnknownCase as error:
                tell(str(error))
                continue
        machine = _machine(book, name)
        complaint = _complaint(machine["kind"], knowledge)
        sheet = {"format": 1, "machine": machine, "complaint": complaint, "kit": _kit(drafts, knowledge)}
        try:
            return Visit.new(book, sheet_from_plain(sheet), person=person, knowledge=knowledge)
        except InputError as error:
            for problem in error.problems:
                tell(f"{problem.where}: {problem.given}; {problem.allowed}")


def _machine(book: Casebook, tag: str) -> dict[str, Any]:
    """Return the machine as a sheet holds it: recalled by its tag, or asked for."""
    known = recall(book, tag)
    if known is not None:
        plain = as_plain(known)
        tell(f"Known: {', '.join(f'{name} {value}' for name, value in plain.get('nameplate', {}).items())}")
        if ask_yes("Is it this one?"):
            return plain
    kind = ask_choice("Kind of machine", KINDS)
    typed: dict[str, str] = {}
    say("What the plate says; Enter where it says nothing.")
    for line in plate_lines(kind):
        while text := ask(f"{line.word} ({line.hint})"):
            said, is_kept = hear(line, text)
            if is_kept:
                typed[line.field] = text
                break
            tell(said)
    return machine_of(kind, tag, typed)


def as_plain(machine: Machine) -> dict[str, Any]:
    """Return a machine as a case sheet holds it."""
    plain: dict[str, Any] = sheet_to_plain(CaseSheet(machine=machine, complaint="routine_check"))["machine"]
    return plain


def _complaint(kind: str, knowledge: Knowledge) -> str:
    """Ask what is wrong, with the complaints that such a machine can have."""
    fitting = {
        one.id: one.name for one in knowledge.complaints.values() if "any" in one.kinds or kind in one.kinds
    }
    return ask_choice("What is wrong", fitting)


def _kit(drafts: Drafts, knowledge: Knowledge) -> list[str]:
    """Return the kit: asked once and remembered."""
    kept = drafts.recall("kit")
    if isinstance(kept, list) and kept:
        return [str(instrument) for instrument in kept]
    known = sorted({name for rule in knowledge.readings.values() for name in rule.instruments} - {"eyes"})
    say("What do you carry? Answer for each; it is asked only once.")
    kit = [name for name in known if ask_yes(f"  {name.replace('_', ' ')}")]
    drafts.remember("kit", kit)
    return kit
