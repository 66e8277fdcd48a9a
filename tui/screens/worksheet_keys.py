"""What the keys of the worksheet do, apart from typing."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual import work

from rules.answer import NextItem
from tui.look import FAINT, WATCH
from tui.picked import item_of
from tui.screens.closing import ClosingPage
from tui.screens.gate import Gate, Hazards, IsolationPage, hazards_text, isolation_text
from tui.screens.note import Note
from tui.screens.page import Page
from tui.screens.pick import Choice, Pick
from tui.screens.reasons import Reasons
from tui.screens.tick import Tick
from tui.screens.worksheet_choices import (
    closing_of,
    found_choices,
    only_one_meant,
    other_choices,
    shut_question,
    stored_choices,
    tick_questions,
)
from tui.shift import before_isolated
from tui.words import answer_words, key_words

if TYPE_CHECKING:
    from collections.abc import Collection

    from rules.answer import Diagnosis
    from tui.compose import Visit, Weighed


class WorksheetKeys(Page[None]):
    """Other reading, reasons, gate, tick list, correct, curves, close."""

    visit: Visit
    chosen: NextItem | None
    correcting: str
    older: int
    was_read: set[str]
    sure_of: str
    is_weighing: bool
    weighed: Weighed | None

    @property
    def target(self) -> NextItem | None:
        """What the typed line is for."""
        raise NotImplementedError

    @property
    def proposals(self) -> list[NextItem]:
        """What is proposed and was not skipped."""
        raise NotImplementedError

    @property
    def diagnosis(self) -> Diagnosis | None:
        """The answer that is shown."""
        raise NotImplementedError

    @property
    def draft_name(self) -> str:
        """The draft of this case and person."""
        raise NotImplementedError

    def say(self, text: str, style: str = WATCH) -> None:
        """Say something above the line to type."""
        raise NotImplementedError

    def stored(self, words: str) -> None:
        """Go on after something is on disk."""
        raise NotImplementedError

    def show_blocks(self) -> None:
        """Show the blocks above the line to type."""
        raise NotImplementedError

    def weigh(self) -> None:
        """Weigh what stands."""
        raise NotImplementedError

    def wanted_first(self) -> str:
        """Return what must come before the reading."""
        raise NotImplementedError

    def asks_for(self, item: NextItem | None) -> str:
        """Return what belongs into the line for an item."""
        raise NotImplementedError

    # other reading

    @work(group="enter")
    async def action_other(self) -> None:
        """Pick another reading."""
        await self.pick_other("")

    async def pick_other(self, typed: str) -> bool:
        """Pick a reading from all that suit the machine; return whether one was picked."""
        choices = other_choices(self.visit, [item.key for item in self.proposals])
        key: str | None
        key = meant = only_one_meant(choices, typed)
        if meant is None:
            key = await self.app.push_screen_wait(Pick("reading", "Which reading?", choices, typed=typed))
        if key is None:
            return False
        self.chosen = self.picked(key)
        self.say(f"picked: {key_words(key, self.visit.knowledge)}; F3 shows the others" if meant else "", "")
        self.show_blocks()
        return True

    def picked(self, key: str) -> NextItem:
        """Return what a key names, with its hazards on this machine."""
        return item_of(key, self.visit.sheet, self.visit.knowledge, self.proposals)

    def action_cursor_up(self) -> None:
        """Show older readings."""
        self.action_older()

    def action_cursor_down(self) -> None:
        """Show newer readings."""
        self.action_newer()

    def action_older(self) -> None:
        """Show older readings."""
        self.older = min(self.older + 3, max(len(self.visit.sheet.readings) - 1, 0))
        self.show_blocks()

    def action_newer(self) -> None:
        """Show newer readings."""
        self.older = max(self.older - 3, 0)
        self.show_blocks()

    # what protects

    async def come_first(self, item: NextItem) -> bool:
        """Ask for what must come before a reading; return whether it is there."""
        first = self.wanted_first()
        if first == "shut":
            if not await self.app.push_screen_wait(shut_question(str(item.state))):
                return False
            self.was_read.add(str(item.state))
            self.show_blocks()
            first = self.wanted_first()
        if first == "isolation":
            return await self.isolate()
        if first == "acknowledge":
            page = Hazards(str(item.state), item.hazards, self.visit.knowledge)
            if not await self.app.push_screen_wait(page):
                return False
            shown = hazards_text(item.hazards, self.visit.knowledge)
            self.visit.acknowledge(str(item.state), item.hazards, shown)
            self.show_blocks()
        return True

    async def comes_first_for(self, key: str) -> bool:
        """Ask for what must come before the reading with a key; return whether it is there."""
        self.chosen = self.picked(key)
        return await self.come_first(self.chosen)

    async def comes_first_for_answers(self, observations: Collection[str]) -> bool:
        """Ask for the isolation record where one of the answers is made by hand and it is not there."""
        by_hand = any(self.visit.is_by_hand(name) for name in observations)
        return not by_hand or not self.visit.wants_first("isolated", ()) or await self.isolate()

    async def isolate(self) -> bool:
        """Ask for the isolation record and store it."""
        also = before_isolated(self.visit.case, self.visit.knowledge)
        page = IsolationPage(self.visit.person, self.visit.sheet.machine.tag or "", also)
        shown = [name for line in also for name in line.asks]
        page.store = lambda record: self.visit.isolate(record, shown=shown)
        if await self.app.push_screen_wait(page) is None:
            return False
        self.say("stored: isolation record", FAINT)
        self.weigh()
        return True

    @work(group="enter")
    async def action_gate(self) -> None:
        """Show the list before energising, and take the isolation record from there."""
        if self.diagnosis is None:
            return
        page = Gate(self.diagnosis.energise, self.visit.knowledge, self.isolation_words())
        await self.app.push_screen_wait(page)
        if page.wants_isolation:
            await self.isolate()
        elif page.wants_lifting and self.visit.isolation is None:
            self.say("No isolation is recorded that holds now.", "")
        elif page.wants_lifting:
            self.visit.lift()
            self.say("stored: isolation lifted", FAINT)
            self.weigh()

    def isolation_words(self) -> list[str]:
        """Return the isolation records in words."""
        return isolation_text(self.visit.case, self.visit.isolation_lapse)

    # looking

    def action_reasons(self) -> None:
        """Show for and against."""
        if self.diagnosis is None:
            return
        used = self.visit.use_learned

        def back(_: None) -> None:
            if self.visit.use_learned != used:
                self.weigh()

        self.app.push_screen(Reasons(self.visit, self.diagnosis), back)

    def action_curves(self) -> None:
        """Show the curves of this machine and its history."""
        from tui.screens.curves import Curves

        self.app.push_screen(Curves(self.visit))

    def action_machine(self) -> None:
        """Show the machine's page."""
        from tui.screens.machine import MachinePage

        self.app.push_screen(MachinePage(self.visit.sheet.machine.tag or "", self.visit))

    @work(group="enter")
    async def action_tick(self) -> None:
        """Tick what was seen."""
        questions = tick_questions(self.visit, [item.observation for item in self.proposals])
        page = Tick(questions, dict(self.visit.sheet.observations))
        page.first, page.store = self.comes_first_for_answers, self.visit.observe_all
        new = await self.app.push_screen_wait(page)
        if new:
            knowledge = self.visit.knowledge
            self.stored("; ".join(answer_words(*answer, knowledge) for answer in new.items()))

    @work(group="enter")
    async def action_note(self) -> None:
        """Store a remark."""
        page = Note()
        page.draft_name = f"note-{self.draft_name}"
        page.store = self.visit.note
        if await self.app.push_screen_wait(page):
            self.say("stored: remark", FAINT)

    # correct, close

    @work(group="enter")
    async def action_correct(self) -> None:
        """Pick something stored, then take it back or type it anew."""
        stored = stored_choices(self.visit)
        if not stored:
            self.say("Nothing is stored yet that could be corrected.", "")
            return
        entry = await self.app.push_screen_wait(Pick("correct", "What was wrong?", list(stored.values())))
        if entry is None:
            return
        keys = {entry: key for entry, key, _ in self.visit.correctable() if "@" in key}
        ways = [
            Choice("anew", "type it anew; the log keeps both"),
            Choice("back", "take it back; the log keeps it"),
        ]
        fitting = ways if entry in keys else ways[1:]
        way = await self.app.push_screen_wait(Pick("correct", stored[entry].text, fitting))
        if way == "back":
            self.visit.correct(entry)
            self.stored(f"taken back: {stored[entry].text}")
        elif way == "anew":
            self.chosen, self.correcting = self.picked(keys[entry]), entry
            self.show_blocks()
            self.say("Type the right values; Enter stores the correction.", "")

    @work(group="enter")
    async def action_close(self) -> None:
        """Close the case."""
        await self.close_case()

    async def close_case(self) -> None:
        """Ask what was found and done, and close."""
        knowledge, kind = self.visit.knowledge, self.visit.kind
        odds = {fault.id: fault.probability for fault in self.diagnosis.faults} if self.diagnosis else {}
        names = {f.id: f.name for f in knowledge.faults.values() if kind in f.odds or "any" in f.odds}
        names |= {part.id: part.name for f in knowledge.faults.values() if f.id in names for part in f.within}
        names |= {"other": "another fault than those listed"}
        choices = found_choices(names, odds)
        found = await self.app.push_screen_wait(Pick("found", "What was it really?", choices))
        if found is None:
            return
        whole = knowledge.faults.get(found)
        retest = whole.for_kind(kind).retest if whole else ()
        page = ClosingPage(self.visit, found, names, retest)
        page.first = self.comes_first_for
        page.draft_name = f"closing-{self.draft_name}"
        page.store = lambda answer: self.visit.close(closing_of(answer, retest, self.visit))
        if await self.app.push_screen_wait(page) is None:
            self.chosen = None
            return
        self.plateside.desk.drafts.drop(self.draft_name)
        self.dismiss(None)
