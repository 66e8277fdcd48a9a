"""The way from the casebook to the worksheet: who, machine, complaint, plate."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calc.errors import PlatesideError
from calc.quantities import KINDS
from tui.begun import DRAFT, Begun
from tui.people import USUAL_KIT
from tui.plate_lines import raw_of, typed_of
from tui.screens.ask import Ask
from tui.screens.nameplate import NameplatePage
from tui.screens.page import refusal
from tui.screens.person import Person
from tui.screens.pick import Choice, Pick
from tui.screens.worksheet import Worksheet
from tui.widgets.ruled import tagged
from tui.words import kind_name

if TYPE_CHECKING:
    from collections.abc import Callable

    from tui.application import PlatesideApp
    from tui.compose import Visit
    from tui.plate_lines import Raw

NO_TAG = "-"
PLATE_STEPS = 2
"""Where the questions begin that a known machine answers by itself."""
OFFERED_KINDS = tuple(kind for kind in KINDS if kind not in {"dc_generator", "alternator"})


async def ask_person(app: PlatesideApp) -> bool:
    """Ask for name and kit; return whether they were given."""
    desk = app.desk
    tools = {tool for rule in desk.knowledge.readings.values() for tool in rule.instruments} - {"eyes"}
    instruments = sorted(tools, key=lambda tool: (tool not in USUAL_KIT, tool))
    answer = await app.push_screen_wait(Person(desk.person, desk.kit, instruments))
    if answer is None:
        return False
    why = desk.remember(answer["person"], answer["kit"].split())
    if why:
        app.pages()[-1].say(f"Name and kit hold until you leave; they could not be kept ({why}).")
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


async def new_case(app: PlatesideApp, draft: dict[str, Any] | None = None, name: str = "") -> None:
    """Go from the machine to the worksheet; back goes one question back and keeps what was told."""
    if not app.desk.knows_person and not await ask_person(app):
        return
    drafts = app.desk.drafts
    begun = Begun.of(draft or {}, name or drafts.free_name(DRAFT))
    steps = (tell_machine, tell_complaint, tell_kind, tell_plate)
    step = begun.step
    while step >= 0:
        if begun.machine is None or step not in {PLATE_STEPS, len(steps)}:
            step += 1 if await steps[step](app, begun) else -1
        elif await start(app, begun):
            return
        else:  # nothing of it is stored: back to the last question, with all that was told
            step -= 1
    if not begun.lines:
        drafts.drop(begun.name)


async def tell_machine(app: PlatesideApp, begun: Begun) -> bool:
    """Ask for the machine; return whether it was told."""
    tag = await pick_machine(app, begun.tag)
    if tag is None:
        return False
    if tag != begun.tag:
        begun.kind, begun.lines = "", {}
    begun.tag = tag
    return True


async def tell_complaint(app: PlatesideApp, begun: Begun) -> bool:
    """Ask what is wrong; return whether it was told."""
    known = app.desk.machine(begun.tag) if begun.tag and not begun.lines else None
    begun.machine = raw_of(known) if known else None
    complaint = await pick_complaint(app, begun, known.kind if known else "")
    begun.complaint = complaint or begun.complaint
    return complaint is not None


async def tell_kind(app: PlatesideApp, begun: Begun) -> bool:
    """Ask for the kind of machine; return whether it was told."""
    choices = [Choice(kind, KINDS[kind]) for kind in OFFERED_KINDS]
    page = Pick(*tagged(begun.tag or "", "What kind of machine?"), choices, at=begun.kind, draft=begun.draft)
    kind = await app.push_screen_wait(page)
    begun.kind = kind or begun.kind
    return kind is not None


async def tell_plate(app: PlatesideApp, begun: Begun) -> bool:
    """Ask for the plate; going back, or for another kind, keeps what is typed."""
    check, extra = check_of(begun.complaint), {"complaint": begun.complaint}
    page = NameplatePage(begun.kind, begun.tag or "", check, begun.lines, extra)
    page.begun_as = begun.name
    machine = await app.push_screen_wait(page)
    begun.machine = machine if machine and machine["kind"] else None
    begun.lines = {name: text for name, text in page.values.items() if text}
    if begun.machine is None and begun.lines:
        app.desk.drafts.save(begun.name, begun.kept())
    return begun.machine is not None


async def start(app: PlatesideApp, begun: Begun) -> bool:
    """Open the case on disk and go to its worksheet; return whether it could be stored."""
    from calc.sheet_io import sheet_from_plain

    told = {"machine": begun.machine, "complaint": begun.complaint, "kit": list(app.desk.kit or ())}
    try:
        sheet = sheet_from_plain({"format": 1, **told})
        visit = app.desk.open_case(sheet)
    except PlatesideError as error:
        await app.push_screen_wait(
            Ask("The case could not be stored. Go back to what was typed?", refusal(error))
        )
        return False
    app.desk.drafts.drop(begun.name)
    await app.push_screen_wait(Worksheet(visit))
    return True


async def pick_machine(app: PlatesideApp, before: str | None = None) -> str | None:
    """Ask for the tag: a known machine, or a new one as typed. Returns "" for a machine without a tag."""
    known = app.desk.book.machines(limit=500)
    choices = [
        Choice(
            m.tag,
            m.tag,
            word="known",
            more=f"{kind_name(m.kind)}, {m.cases} case{'' if m.cases == 1 else 's'}",
        )
        for m in known
    ]

    def fresh(text: str) -> Choice:
        if not text:
            return Choice(NO_TAG, "a machine without a tag", word="new")
        return Choice(text, f"{text}: a machine that the casebook does not know", word="new")

    page = Pick(
        "machine",
        "Which machine? Type its tag.",
        choices,
        typed=before or "",
        fresh=fresh,
        asks="Type a tag, or move to a machine.",
    )
    answer = await app.push_screen_wait(page)
    return "" if answer == NO_TAG else answer


async def pick_complaint(app: PlatesideApp, begun: Begun, kind: str) -> str | None:
    """Ask what is wrong; what means stop stands first."""
    complaints = app.desk.knowledge.complaints.values()
    fitting = [c for c in complaints if not kind or {"any", kind} & set(c.kinds)]
    fitting.sort(key=lambda complaint: not complaint.stop)
    choices = [
        Choice(
            c.id,
            c.name,
            word="STOP" if c.stop else "",
            style="bold" if c.stop else "",
            also=" ".join(c.also),
        )
        for c in fitting
    ]
    page = Pick(
        *tagged(begun.tag or "", "What is wrong?"),
        choices,
        at=begun.complaint,
        asks="Type or move to a complaint.",
        draft=begun.draft,
    )
    return await app.push_screen_wait(page)


def check_of(complaint: str) -> Callable[[Raw], list[str]]:
    """Return what finds contradictions in a machine as typed."""
    from calc.nameplate import check_plate
    from calc.sheet_io import sheet_from_plain

    def check(machine: Raw) -> list[str]:
        sheet = sheet_from_plain({"format": 1, "machine": machine, "complaint": complaint or "routine_check"})
        return [str(remark) for remark in check_plate(sheet.machine)]

    return check


async def edit_plate(app: PlatesideApp, visit: Visit) -> bool:
    """Correct the plate of a case; return whether something was stored."""
    from calc.sheet_io import sheet_from_plain

    machine = visit.sheet.machine
    page = NameplatePage(
        machine.kind, machine.tag or "", check_of(visit.sheet.complaint), typed_of(raw_of(machine))
    )

    def store(raw: Raw) -> None:
        sheet = {"format": 1, "machine": raw, "complaint": visit.sheet.complaint}
        if raw["kind"]:
            visit.set_machine(sheet_from_plain(sheet).machine)

    page.store = store
    raw = await app.push_screen_wait(page)
    return raw is not None and bool(raw["kind"])
