"""The worksheet: the gate, the likely faults, the readings, and the one thing to do next."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, ClassVar

from textual import work
from textual.containers import Horizontal
from textual.widgets import Input, Static
from textual.worker import get_current_worker

from calc.errors import PlatesideError
from rules.answer import NextItem
from tui.keys import bindings
from tui.look import FAINT, STRONG, WATCH
from tui.screens import worksheet_lines as blocks
from tui.screens.worksheet_keys import WorksheetKeys, values_wanted
from tui.widgets.ruled import Ruled, fill, row, rows
from tui.words import question

if TYPE_CHECKING:
    from textual.content import Content
    from textual.widget import Widget

    from rules.answer import Diagnosis
    from tui.compose import Visit, Weighed

BELOW = 3
"""Lines below the blocks: what was understood, the line to type, the keys."""
YES_WORDS = {"y": True, "yes": True, "n": False, "no": False}


class Worksheet(WorksheetKeys):
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

    def body(self) -> list[Widget]:
        """Return the blocks, what was understood, and the line to type."""
        typed = Input(compact=True, id="typed")
        return [
            Ruled(id="blocks", classes="page"),
            Ruled(id="said"),
            Horizontal(Static(row("type"), id="mark", markup=False), typed, id="entry"),
        ]

    def on_mount(self) -> None:
        """Take up a draft, put the focus on the line to type, and weigh."""
        typed = self.query_one(Input)
        typed.cursor_blink = False
        draft = self.plateside.desk.drafts.load(self.draft_name)
        with self.prevent(Input.Changed):
            typed.value = str(draft.get("typed", ""))
        if typed.value:
            self.say("From your draft; Enter stores it.", "")
        typed.focus()
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
        self.query_one(Input).placeholder = self.placeholder()

    def block_lines(self, height: int) -> list[Content]:
        """Return the lines of all blocks, shared out over the height."""
        visit, room, sheet = self.visit, self.room, self.visit.sheet
        head = blocks.machine_lines(sheet, visit.number, visit.knowledge, room)
        stop = blocks.stop_lines(sheet, visit.knowledge, room)
        if self.weighed is None:
            return [*head, *stop, row("gate", ("SHUT", STRONG)), row("", ("weighing ...", FAINT))]
        answer = self.weighed.diagnosis
        findings = blocks.finding_lines(answer, visit.knowledge, room)
        reads = blocks.reading_lines(blocks.readings_of(sheet, answer)[self.older :], room)
        shared = blocks.share_out(
            [
                (head, 2),
                (stop, 2),
                (blocks.gate_lines(answer, room), 2),
                (blocks.next_lines(self.target, self.first_words(), visit.knowledge, room), 4),
                (blocks.fault_lines(answer, self.weighed.moved, visit.knowledge, room), 3),
                (reads, 3),
                (findings, 2),
            ],
            height,
        )
        order = (0, 1, 2, 6, 4, 5, 3)
        lines = [shared[index] for index in order]
        spare = height - sum(map(len, lines))
        return self.spread(lines, spare)

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

    def first_words(self) -> str:
        """Return what must come before the reading, in words."""
        first = self.wanted_first()
        return {
            "isolation": "Enter: the isolation record comes first",
            "acknowledge": "Enter: hazards of this state to read and accept first",
            "": "",
        }[first]

    def wanted_first(self) -> str:
        """Return what must come before the reading: isolation, acknowledge, or nothing."""
        item = self.target
        if item is None or item.state is None:
            return ""
        return self.visit.wants_first(item.state, item.hazards)

    def placeholder(self) -> str:
        """Return what the line to type expects."""
        if self.is_weighing and self.weighed is None:
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
        self.query_one("#said", Ruled).show(
            rows("" if not text else "heard", text, self.room, style=style, most=1)
        )

    # typing

    def on_input_changed(self, event: Input.Changed) -> None:
        """Say in words what is understood, while it is typed."""
        text, item = event.value.strip(), self.target
        self.sure_of = "" if self.sure_of != text else self.sure_of
        if not text or item is None or item.state is None or text[:1].isalpha():
            self.say("")
            return
        try:
            understood = self.visit.understand(str(item.measure), item.state, text)
        except PlatesideError as error:
            self.say(str(error), FAINT)
        else:
            self.say(understood.echo, "")

    def on_input_submitted(self, _event: Input.Submitted) -> None:
        """Enter: store, or do what comes first."""
        self.enter()

    def action_enter(self) -> None:
        """Enter, where the line to type has lost the focus."""
        self.enter()

    @work(exclusive=True, group="enter")
    async def enter(self) -> None:
        """Do the obvious with what stands in the line."""
        text, item = self.query_one(Input).value.strip(), self.target
        if item is None:
            await self.enter_without_target(text)
        elif item.observation is not None:
            await self.enter_answer(item, text)
        elif text and self.is_a_word(text):
            await self.pick_other(text)
        elif await self.come_first(item) and text:
            self.enter_reading(item, text)
        elif not text:
            self.say(f"Type {self.asks_for(item)}; F4 where it cannot be taken.", "")

    async def enter_without_target(self, text: str) -> None:
        """Nothing is proposed: pick another reading, or go on to closing."""
        if self.weighed is None:
            self.say("Still weighing; what is typed stays.", "")
        elif text:
            await self.pick_other(text)
        else:
            await self.close_case()

    @staticmethod
    def is_a_word(text: str) -> bool:
        """Whether the text is no value but the beginning of another reading's name."""
        first = text.split(maxsplit=1)[0].lower()
        return len(first) > 1 and first.isalpha() and first not in {"ol", "open", "inf", "nan", "none"}

    async def enter_answer(self, item: NextItem, text: str) -> None:
        """Store a yes or no."""
        answer = YES_WORDS.get(text.lower())
        if answer is None:
            if text and self.is_a_word(text):
                await self.pick_other(text)
            else:
                self.say("y or n; F4 where it cannot be told.", "")
            return
        self.visit.observe(str(item.observation), answer)
        self.stored(f"{question(str(item.observation), self.visit.knowledge)} {'yes' if answer else 'no'}")

    def enter_reading(self, item: NextItem, text: str) -> None:
        """Understand a reading, ask once about what is hardly possible, and store it."""
        try:
            understood = self.visit.understand(str(item.measure), str(item.state), text)
        except PlatesideError as error:
            self.say(str(error))
            return
        if understood.asks and self.sure_of != text:
            self.sure_of = text
            self.say(f"{understood.asks} Enter again keeps it.")
            return
        if self.correcting:
            self.visit.correct(self.correcting, understood)
        else:
            self.visit.record(understood)
        self.stored(understood.echo)

    def stored(self, words: str) -> None:
        """Go on after something is on disk."""
        self.clear_line()
        self.say(f"stored: {words}", FAINT)
        self.weigh()

    def clear_line(self) -> None:
        """Make the line ready for the next thing."""
        self.chosen, self.correcting, self.sure_of = None, "", ""
        with self.prevent(Input.Changed):
            self.query_one(Input).value = ""
        self.plateside.desk.drafts.drop(self.draft_name)

    # weighing

    def weigh(self) -> None:
        """Weigh what stands, off the event loop; once more if something came in meanwhile."""
        self.older = 0
        if self.is_weighing:
            self.again = True
            return
        self.is_weighing = True
        self.show_blocks()
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
        if self.again:
            self.again = False
            self.weigh()
            return
        if trouble is not None:
            self.say(self.plateside.trouble(trouble))
        self.weighed = weighed or self.weighed
        if self.is_mounted:
            self.show_blocks()

    # drafts

    @property
    def draft_name(self) -> str:
        """The draft of this case and person."""
        return f"case-{self.visit.case.id}-{self.visit.person}"

    def draft(self) -> tuple[str, dict[str, Any]] | None:
        """Keep what stands in the line."""
        return self.draft_name, {"typed": self.query_one(Input).value, "case": self.visit.case.id}

    def unsaved(self) -> str:
        """Say that there is something typed."""
        return f"'{self.query_one(Input).value}'" if self.query_one(Input).value.strip() else ""

    def asks_for(self, item: NextItem | None) -> str:
        """Return what belongs into the line for an item."""
        if item is None:
            return "Enter closes the case; a word finds another reading"
        if item.observation is not None:
            return "y or n"
        return values_wanted(str(item.measure), self.visit.kind)
