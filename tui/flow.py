"""The way from the casebook to the worksheet: who, machine, complaint, plate."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calc.errors import PlatesideError
from calc.quantities import KINDS
from tui.plate_lines import typed_of
from tui.screens.ask import Ask
from tui.screens.nameplate import NameplatePage
from tui.screens.page import refusal
from tui.screens.person import USUAL, Person
from tui.screens.pick import Choice, Pick
from tui.screens.worksheet import Worksheet
from tui.widgets.ruled import tagged
from tui.words import kind_name

if TYPE_CHECKING:
    from calc.sheet import Machine
    from tui.application import PlatesideApp
    from tui.compose import Visit
    from tui.plate_lines import Raw

DRAFT = "new_case"
NO_TAG = "-"
OFFERED_KINDS = tuple(kind for kind in KINDS if kind not in {"dc_generator", "alternator"})


async def ask_person(app: PlatesideApp) -> bool:
    """Ask for name and kit; return whether they were given."""
    desk = app.desk
    tools = {tool for rule in desk.knowledge.readings.values() for tool in rule.instruments} - {"eyes"}
    instruments = sorted(tools, key=lambda tool: (tool not in USUAL, tool))
    answer = await app.push_screen_wait(Person(desk.person, desk.kit, instruments))
    if answer is None:
        return False
    desk.remember(answer["person"], answer["kit"].split())
    return True


async def open_case(app: PlatesideApp, case: str) -> None:
    """Take up a case; a closed one only when it is to go on."""
    if not app.desk.knows_person and not await ask_person(app):
        return
    visit = app.desk.visit(case)
    if visit.case.status == "closed":
        from tui.screens.closed import ClosedCase

        page = ClosedCase(visit)
        await app.push_screen_wait(page)
        if not page.wants_reopening:
            return
        visit.reopen("goes on")
    await app.push_screen_wait(Worksheet(visit))


async def new_case(app: PlatesideApp, draft: dict[str, Any] | None = None) -> None:
    """Go from the machine to the worksheet; back goes one step back."""
    if not app.desk.knows_person and not await ask_person(app):
        return
    begun = draft or {}
    tag = begun.get("tag") if draft is not None else await pick_machine(app)
    if tag is None:
        return
    known = app.desk.machine(tag) if tag and not begun.get("lines") else None
    complaint = begun.get("complaint") or await pick_complaint(app, tag, known.kind if known else "")
    if complaint is None:
        return
    machine = sheet_of(known) if known else await type_plate(app, tag, complaint, begun)
    if machine is not None:
        await start(app, machine, complaint)


async def start(app: PlatesideApp, machine: Raw, complaint: str) -> None:
    """Open the case on disk and go to its worksheet."""
    from calc.sheet_io import sheet_from_plain

    kit = list(app.desk.kit or ())
    try:
        sheet = sheet_from_plain({"format": 1, "machine": machine, "complaint": complaint, "kit": kit})
        visit = app.desk.open_case(sheet)
    except PlatesideError as error:
        await app.push_screen_wait(Ask("The case could not be stored.", refusal(error)))
        return
    app.desk.drafts.drop(DRAFT)
    await app.push_screen_wait(Worksheet(visit))


async def pick_machine(app: PlatesideApp) -> str | None:
    """Ask for the tag: a known machine, or a new one as typed. Returns "" for a machine without a tag."""
    known = app.desk.book.machines(limit=500)
    choices = [
        Choice(m.tag, m.tag, word="known", more=f"{kind_name(m.kind)}, {m.cases} cases") for m in known
    ]

    def fresh(text: str) -> Choice:
        if not text:
            return Choice(NO_TAG, "a machine without a tag", word="new")
        return Choice(text, f"{text}: a machine that the casebook does not know", word="new")

    answer = await app.push_screen_wait(Pick("machine", "Which machine? Type its tag.", choices, fresh=fresh))
    return "" if answer == NO_TAG else answer


async def pick_complaint(app: PlatesideApp, tag: str, kind: str) -> str | None:
    """Ask what is wrong; what means stop stands first."""
    complaints = app.desk.knowledge.complaints.values()
    fitting = [c for c in complaints if not kind or {"any", kind} & set(c.kinds)]
    fitting.sort(key=lambda complaint: not complaint.stop)
    choices = [
        Choice(c.id, c.name, word="STOP" if c.stop else "", style="bold" if c.stop else "") for c in fitting
    ]
    return await app.push_screen_wait(Pick(*tagged(tag, "What is wrong?"), choices))


async def type_plate(app: PlatesideApp, tag: str, complaint: str, begun: dict[str, Any]) -> Raw | None:
    """Ask for the kind of machine and its plate; another kind keeps what is typed."""
    kind: str | None = begun.get("kind")
    lines: dict[str, str] = dict(begun.get("lines") or {})
    while True:
        if not kind:
            choices = [Choice(kind, KINDS[kind]) for kind in OFFERED_KINDS]
            pick = Pick(*tagged(tag, "What kind of machine?"), choices)
            kind = await app.push_screen_wait(pick)
        if kind is None:
            return None
        page = NameplatePage(kind, tag, check_of(complaint), lines, {"complaint": complaint})
        machine = await app.push_screen_wait(page)
        if machine is None:
            if any(page.values.values()):
                app.desk.drafts.save(DRAFT, page.kept())
            return None
        if machine["kind"]:
            return machine
        kind, lines = None, page.values


def check_of(complaint: str) -> Any:  # noqa: ANN401  (a function from a raw machine to remarks)
    """Return what finds contradictions in a machine as typed."""
    from calc import nameplate
    from calc.sheet_io import sheet_from_plain

    def check(machine: Raw) -> list[str]:
        if not hasattr(nameplate, "check_plate"):
            return []
        sheet = sheet_from_plain({"format": 1, "machine": machine, "complaint": complaint or "routine_check"})
        return [str(remark) for remark in nameplate.check_plate(sheet.machine)]

    return check


def sheet_of(machine: Machine) -> Raw:
    """Return a machine as a sheet holds it."""
    from calc.sheet import CaseSheet
    from calc.sheet_io import sheet_to_plain

    plain_sheet = sheet_to_plain(CaseSheet(machine=machine, complaint="routine_check"))
    return dict(plain_sheet["machine"])


async def edit_plate(app: PlatesideApp, visit: Visit) -> bool:
    """Correct the plate of a case; return whether something was stored."""
    from calc.sheet_io import sheet_from_plain

    machine = visit.sheet.machine
    page = NameplatePage(
        machine.kind, machine.tag or "", check_of(visit.sheet.complaint), typed_of(sheet_of(machine))
    )
    raw = await app.push_screen_wait(page)
    if raw is None or not raw["kind"]:
        return False
    visit.set_machine(
        sheet_from_plain({"format": 1, "machine": raw, "complaint": visit.sheet.complaint}).machine
    )
    return True
