"""The worksheet: the gate, the likely faults, the readings, and the one thing to do next."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, ClassVar

from textual import work
from textual.containers import Horizontal
from textual.widgets import Static
from textual.worker import get_current_worker

from rules.answer import NextItem
from tui.context import values_wanted
from tui.keys import bindings
from tui.look import FAINT, STOP, STRONG, WATCH
from tui.screens import worksheet_lines as blocks
from tui.screens.reasons import reason_lines
from tui.screens.worksheet_room import share_out, whole_rows
from tui.screens.worksheet_typing import WorksheetTyping
from tui.shift import gate_now
from tui.widgets.ruled import Ruled, fill, row, rows
from tui.widgets.typed import TypedLine

if TYPE_CHECKING:
    from textual.content import Content
    from textual.widget import Widget

    from rules.answer import Diagnosis
    from rules.gate import GateState
    from tui.compose import Visit, Weighed

BELOW = 4
"""Lines below the blocks: two for what was understood, the line to type, the keys."""


HIGH, MOST_REASONS = 32, 6
"""Screens from this height on also say why, in so many lines."""


class Worksheet(WorksheetTyping):
    """One case at work. Enter stores what is understood; on an empty line it does what comes first."""

    KEYS = "worksheet"
    BINDINGS: ClassVar = bindings("worksheet")

    def __init__(self, visit: Visit) -> None:
        super().__init__()
        self.visit = visit
        self.weighed: Weighed | None = None
        self.chosen: NextItem | None = None
        """Another reading than the proposed one, picked by hand."""
        self.correcting = ""
        """The entry that the typed reading replaces."""
        self.sure_of = ""
        """The text that was asked about once."""
        self.said: tuple[str, str] = ("", "")
        self.older = 0
        self.again = False
        self.is_weighing = False
        self.gate_now: GateState | None = None
        self.was_read: set[str] = set()
        """States behind the shut gate that were read before, as the technician said."""

    def body(self) -> list[Widget]:
        """Return the blocks, what was understood, and the line to type."""
        return [
            Ruled(id="blocks", classes="page"),
            Ruled(id="said"),
            Horizontal(Static(row("type"), id="mark", markup=False), TypedLine(), id="entry"),
        ]

    def on_mount(self) -> None:
        """Take up a draft, put the focus on the line to type, and weigh."""
        typed = self.query_one(TypedLine)
        draft = self.plateside.desk.drafts.load(self.draft_name)
        typed.put(str(draft.get("typed", "")))
        if typed.value:
            self.say("From your draft; Enter stores it.", "")
        self.set_focus(typed)
        self.weigh()

    # what the screen shows

    @property
    def diagnosis(self) -> Diagnosis | None:
        """The answer that is shown."""
        return self.weighed.diagnosis if self.weighed else None

    @property
    def target(self) -> NextItem | None:
        """What the typed line is for: picked by hand, or the first proposal that was not skipped."""
        if self.chosen is not None:
            return self.chosen
        return next(iter(self.proposals), None)

    @property
    def proposals(self) -> list[NextItem]:
        """What is proposed and was not skipped."""
        return (
            [item for item in self.diagnosis.next if item.key not in self.visit.skipped]
            if self.diagnosis
            else []
        )

    def show(self) -> None:
        """Show every block at the present size."""
        super().show()
        self.show_blocks()
        self.show_said()

    def show_blocks(self) -> None:
        """Show the blocks above the line to type."""
        height = max(int(self.app.size.height) - BELOW, 1)
        self.query_one("#blocks", Ruled).show(fill(self.block_lines(height), height))
        self.query_one(TypedLine).placeholder = self.placeholder()

    def block_lines(self, height: int) -> list[Content]:
        """Return the lines of all blocks, shared out over the height."""
        visit, room, sheet = self.visit, self.room, self.visit.sheet
        head = blocks.machine_lines(sheet, visit.number, visit.knowledge, room)
        stop = blocks.stop_lines(sheet, visit.knowledge, room)
        if self.weighed is None:
            waits = "weighing ..." if self.is_weighing else "not weighed; readings are stored all the same"
            return [*head, *stop, row("gate", ("SHUT", STRONG)), row("", (waits, FAINT))]
        answer = self.weighed.diagnosis
        findings = blocks.finding_lines(answer, visit.knowledge, room)
        reads = blocks.reading_lines(blocks.readings_of(sheet, answer, visit.knowledge)[self.older :], room)
        proposed = blocks.next_lines(self.target, self.first_words(), visit.knowledge, room)
        shared = share_out(
            [
                (head, 2, 1),
                (stop, 2, 1),
                (blocks.gate_lines(answer, room), 2, 1),
                (proposed, 4, 2),
                (blocks.fault_lines(answer, self.weighed.moved, visit.knowledge, room), 3, 1),
                (reads, 3, 1),
                (findings, 2, 1),
                (self.why_lines(height), 0, 0),
            ],
            height,
        )
        shared[3] = whole_rows(proposed, shared[3])
        order = (0, 1, 2, 6, 4, 7, 5, 3)
        lines = [shared[index] for index in order]
        spare = height - sum(map(len, lines))
        return self.spread(lines, spare)

    def why_lines(self, height: int) -> list[Content]:
        """Return what speaks for and against the likeliest fault, on screens that have the room."""
        if height < HIGH or self.diagnosis is None or not self.diagnosis.faults:
            return []
        return reason_lines(self.diagnosis.faults[0], self.room)[:MOST_REASONS]

    @staticmethod
    def spread(lines: list[list[Content]], spare: int) -> list[Content]:
        """Join the blocks, a free line between them as long as there is room."""
        out: list[Content] = []
        filled = [block for block in lines if block]
        for index, block in enumerate(filled):
            if index and spare > 0:
                out.append(row(""))
                spare -= 1
            out += block
        return out

    def first_words(self) -> tuple[str, str]:
        """Return what must come before the reading, in words, with its style."""
        first = self.wanted_first()
        if first == "shut":
            return "GATE SHUT for this state. Enter only what was read before; energise nothing for it.", STOP
        lapse = self.visit.isolation_lapse
        words = {
            "isolation": "Enter: the isolation record comes first"
            + (f"; the last is {lapse}" if lapse else ""),
            "acknowledge": "Enter: hazards of this state to read and accept first",
        }
        return words.get(first, ""), WATCH

    def wanted_first(self) -> str:
        """Return what must come before the reading: shut, isolation, acknowledge, or nothing."""
        item = self.target
        if item is None:
            return ""
        if item.state is None:
            by_hand = self.visit.is_by_hand(str(item.observation))
            return self.visit.wants_first("isolated", ()) if by_hand else ""
        if (
            self.gate_now is not None
            and self.gate_now.forbids(item.state)
            and item.state not in self.was_read
        ):
            return "shut"
        return self.visit.wants_first(item.state, item.hazards, item.measure)

    def placeholder(self) -> str:
        """Return what the line to type expects."""
        if self.weighed is None and self.chosen is None:
            return ""
        return self.asks_for(self.target)

    def say(self, text: str, style: str = WATCH) -> None:
        """Say something above the line to type."""
        self.said = (text, style)
        if self.is_mounted:
            self.show_said()

    def show_said(self) -> None:
        """Show what was understood or said last."""
        text, style = self.said
        self.query_one("#said", Ruled).show(self.said_lines(text, style))

    def said_lines(self, text: str, style: str) -> list[Content]:
        """Return always two lines, so that nothing jumps while it is typed."""
        return fill(rows("heard" if text else "", text, self.room, style=style, most=2), 2)

    # weighing

    def weigh(self) -> None:
        """Weigh what stands, off the event loop; once more if something came in meanwhile."""
        self.older = 0
        if self.is_weighing:
            self.again = True
            return
        self.is_weighing = True
        self.weigh_in_thread()

    @work(thread=True, group="weigh", exit_on_error=False)
    def weigh_in_thread(self) -> None:
        """Work the answer out."""
        worker = get_current_worker()
        try:
            weighed, trouble = self.visit.weigh(), None
        except Exception as error:
            weighed, trouble = None, error
        if not worker.is_cancelled:
            self.app.call_from_thread(self.weighed_now, weighed, trouble)

    def weighed_now(self, weighed: Weighed | None, trouble: Exception | None) -> None:
        """Show a new answer."""
        self.is_weighing = False
        if not self.stands:
            return
        if self.again:
            self.again = False
            self.weigh()
            return
        if trouble is not None:
            self.say(self.plateside.trouble(trouble))
        self.weighed = weighed or self.weighed
        if self.weighed is not None:
            odds = {fault.id: fault.probability for fault in self.weighed.diagnosis.faults}
            self.gate_now = gate_now(self.visit.case, self.visit.knowledge, suspects=odds)
        self.show_blocks()

    # drafts

    @property
    def draft_name(self) -> str:
        """The draft of this case and person."""
        return f"case-{self.visit.case.id}-{self.visit.person}"

    def draft(self) -> tuple[str, dict[str, Any]] | None:
        """Keep what stands in the line, or was taken out of it and waits for what must come first."""
        typed = next(iter(self.query(TypedLine)), None)
        text = (typed.value if typed is not None else "") or self.under_way
        return self.draft_name, {"typed": text, "case": self.visit.case.id} if text.strip() else {}

    def unsaved(self) -> str:
        """Say that there is something typed."""
        return f"'{self.query_one(TypedLine).value}'" if self.query_one(TypedLine).value.strip() else ""

    def asks_for(self, item: NextItem | None) -> str:
        """Return what belongs into the line for an item."""
        if item is None:
            return "Enter closes the case; a word finds another reading"
        if item.observation is not None:
            return "y or n"
        measure = str(item.measure)
        return values_wanted(measure, self.visit.kind, self.visit.context_of(measure))
