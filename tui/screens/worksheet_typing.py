"""What happens with the line that is typed on the worksheet."""

from __future__ import annotations

from textual import work
from textual.widgets import Input

from calc.errors import PlatesideError
from rules.answer import NextItem
from tui.look import FAINT
from tui.screens.worksheet_keys import WorksheetKeys
from tui.words import question

YES_WORDS = {"y": True, "yes": True, "n": False, "no": False}


class WorksheetTyping(WorksheetKeys):
    """Understands while it is typed; Enter stores, or does what comes first."""

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
