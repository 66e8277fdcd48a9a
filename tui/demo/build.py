"""Build the casebook of the invented plant from its case sheets."""

from __future__ import annotations

from datetime import datetime, timedelta
from pathlib import Path
from typing import TYPE_CHECKING

import msgspec
import yaml

from calc.sheet_io import read_sheet
from casebook import bodies
from casebook.book import Casebook, open_casebook
from tui.compose import weigh
from tui.version import VERSION

if TYPE_CHECKING:
    from calc.sheet import CaseSheet
    from rules.knowledge import Knowledge

PLAN = Path(__file__).with_name("plan.yaml")
SHEETS = Path(__file__).with_name("sheets")
STEP = timedelta(minutes=4)  # between two entries of one case


class Planned(msgspec.Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """One case of the plan."""

    sheet: str
    days_ago: int
    at: str
    person: str
    found: str | None = None
    confirmed: bodies.Confirmed = "believed"
    done: str = ""
    parts: tuple[str, ...] = ()
    minutes: float | None = None
    retest: tuple[str, ...] = ()


def plan() -> tuple[Planned, ...]:
    """Return the cases of the plant, oldest first."""
    text = PLAN.read_text(encoding="utf-8")
    return msgspec.convert(yaml.safe_load(text), tuple[Planned, ...])


def sheet_of(planned: Planned) -> CaseSheet:
    """Return the case sheet of one planned case."""
    return read_sheet(SHEETS / f"{planned.sheet}.yaml")


def build(path: Path, knowledge: Knowledge) -> int:
    """Write the plant's casebook to a new file; return the number of cases."""
    now = datetime.now().astimezone()
    planned = plan()
    with open_casebook(path) as book, book.store.atomic():
        for one in planned:
            _case(book, one, knowledge, now)
    return len(planned)


def _case(book: Casebook, planned: Planned, knowledge: Knowledge, today: datetime) -> None:
    """Log one case as it went: opened, read step by step, isolated, weighed, and closed if it was."""
    sheet = sheet_of(planned)
    hour, minute = map(int, planned.at.split(":"))
    opened = (today - timedelta(days=planned.days_ago)).replace(
        hour=hour, minute=minute, second=0, microsecond=0
    )
    first, *others = _steps(sheet, planned, knowledge)
    case = book.open_case(first, person=planned.person, at=opened)
    for place, step in enumerate(others, 1):
        book.record(case, *step, person=planned.person, at=opened + place * STEP)


def _steps(sheet: CaseSheet, planned: Planned, knowledge: Knowledge) -> list[list[bodies.Body]]:
    """Return what is entered at each step of a case."""
    entries = bodies.bodies_of_sheet(sheet)
    head = [body for body in entries if not isinstance(body, bodies.ReadingTaken | bodies.Observed)]
    steps: list[list[bodies.Body]] = [head]
    if any(reading.state == "isolated" for reading in sheet.readings):
        steps.append([_isolation(planned)])
    steps += [[body] for body in entries if body not in head]
    steps.append([bodies.Shown.of(weigh(sheet, knowledge), program=VERSION)])
    return [*steps, [_closing(planned)]] if planned.found else steps


def _isolation(planned: Planned) -> bodies.Isolation:
    """Return the isolation record that stands before the isolated readings."""
    return bodies.Isolation(
        by=planned.person,
        points="feeder in the motor control centre",
        locked_out=True,
        proved_dead=True,
        tester="two-pole voltage tester",
        tester_proved_before=True,
        tester_proved_after=True,
    )


def _closing(planned: Planned) -> bodies.Closed:
    """Return how a case ended."""
    return bodies.Closed(
        found=planned.found or "",
        confirmed=planned.confirmed,
        done=planned.done,
        parts=planned.parts,
        minutes=planned.minutes,
        retest=planned.retest,
    )
