"""A closed case to read: what was read, what was shown, what was found."""

from __future__ import annotations

from typing import TYPE_CHECKING

from tui.keys import bindings
from tui.look import FAINT, STRONG, VERDICT_STYLE, VERDICT_WORD
from tui.screens.page import TextPage
from tui.screens.sheet import SheetPage
from tui.screens.worksheet_lines import machine_lines
from tui.widgets.ruled import blank, row, rows
from tui.words import fault_name, key_words, percent, plain, question, reading_text

if TYPE_CHECKING:
    from datetime import datetime

    from textual.content import Content

    from casebook.bodies import Closed, ReadingTaken, ShownFinding
    from rules.knowledge import Knowledge
    from tui.compose import Visit


class ClosedCase(TextPage):
    """Shows the log of a closed case as it was then; F8 opens it again."""

    KEYS = "closed"
    BINDINGS = bindings("closed")

    def __init__(self, visit: Visit) -> None:
        super().__init__()
        self.visit = visit
        self.wants_reopening = False

    def lines(self) -> list[Content]:
        """Return the whole case."""
        case, knowledge, room = self.visit.case, self.visit.knowledge, self.room
        out = machine_lines(self.visit.sheet, case.number, knowledge, room)
        out += rows("opened", f"{when(case.opened_utc)} by {case.persons[0]}", room)
        if case.closed is not None:
            out += [blank(), *self.closed_lines(case.closed.what)]
        out.append(blank())
        for logged in case.readings:
            text = f"{key_words(logged.what.reading.key, knowledge)}: {reading_text(logged.what.reading)}"
            text += f"   expected {logged.what.expected}" if logged.what.expected else ""
            out += rows(logged.time_utc.astimezone().strftime("%H:%M"), text, room)
            if logged.what.limit:
                out += rows("limit", f"{logged.what.limit} ({logged.what.source})", room, style=STRONG)
        for name, seen in case.observations.items():
            out += rows("yes" if seen else "no", question(name, knowledge), room)
        if case.shown is not None:
            out += [blank(), row("shown", ("when it was closed:", FAINT))]
            for fault in case.shown.what.faults[:5]:
                out.append(
                    row("", f"{percent(fault.probability)}  {fault.name or fault_name(fault.id, knowledge)}")
                )
            for finding in case.shown.what.findings:
                out += finding_rows(finding, room)
        for note in case.notes:
            out += rows("note", f"{note.what.text} ({note.person})", room)
        return out

    def closed_lines(self, closed: Closed) -> list[Content]:
        """Return what was found and done."""
        room = self.room
        found = fault_name(closed.found, self.visit.knowledge)
        out = rows("found", f"{found}; known by: {plain(closed.confirmed)}", room, style=STRONG)
        for word, text in (
            ("done", closed.done),
            ("parts", ", ".join(closed.parts)),
            ("remark", closed.note),
        ):
            out += rows(word, text, room) if text else []
        if closed.minutes is not None:
            out += rows("minutes", f"{closed.minutes:g}", room)
        for taken in closed.retested:
            out += rows("re-test", retest_text(taken, self.visit.knowledge), room)
        again = {taken.reading.key for taken in closed.retested}
        if left := [key_words(key, self.visit.knowledge) for key in closed.retest if key not in again]:
            out += rows("to read", f"after the repair: {'; '.join(left)}", room)
        return out

    def action_sheet(self) -> None:
        """Show the printed sheet."""
        self.app.push_screen(SheetPage(self.visit))

    def action_shop_tag(self) -> None:
        """Show the tag for the repair shop."""
        self.app.push_screen(SheetPage(self.visit, shop_tag=True))

    def action_reopen(self) -> None:
        """Go on with the case."""
        self.wants_reopening = True
        self.dismiss(None)


def retest_text(taken: ReadingTaken, knowledge: Knowledge) -> str:
    """Return a reading after the repair, with the band that was expected."""
    band = f"   expected {taken.expected}" if taken.expected else ""
    return f"{key_words(taken.reading.key, knowledge)}: {reading_text(taken.reading)}{band}"


def when(moment: datetime) -> str:
    """Return day and time of a moment."""
    return moment.astimezone().strftime("%Y-%m-%d %H:%M")


def finding_rows(finding: ShownFinding, room: int) -> list[Content]:
    """Return a crossed limit as it was shown."""
    word = VERDICT_WORD.get(finding.verdict, finding.verdict)
    text = f"{word}: {finding.says} ({finding.source})"
    return rows("limit", text, room, style=VERDICT_STYLE.get(finding.verdict, ""))
