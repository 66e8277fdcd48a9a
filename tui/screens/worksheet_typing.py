"""What happens with the line that is typed on the worksheet."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from textual import work
from textual.widgets import Input

from calc.errors import PlatesideError
from rules.answer import NextItem
from tui.look import FAINT
from tui.screens.page import refusal
from tui.screens.worksheet_keys import WorksheetKeys
from tui.widgets.typed import TypedLine
from tui.words import answer_words, key_words

if TYPE_CHECKING:
    from textual.timer import Timer

    from tui.typed import Understood

REST_S: Final = 0.12
"""How long the typing must rest before it is said in words what is understood."""
NOT_KNOWN: Final = frozenset({"-", "?"})
YES_WORDS: Final = {"y": True, "yes": True, "n": False, "no": False}


class WorksheetTyping(WorksheetKeys):
    """Understands while it is typed; Enter stores, or does what comes first."""

    resting: Timer | None = None
    under_way = ""
    """The text that was taken out of the line and is not stored yet."""
    answered = ""
    """The text that Enter was pressed on last: what was said of it stays."""

    def on_input_changed(self, _event: Input.Changed) -> None:
        """Wait until the typing rests; every key before costs nothing but its own cell."""
        if self.resting is not None:
            self.resting.stop()
        self.resting = self.set_timer(REST_S, self.rest)

    def rest(self) -> None:
        """Say in words what is understood; an empty line leaves what was said."""
        text, item = self.query_one(TypedLine).value.strip(), self.target
        if not text or text == self.answered:
            return
        self.sure_of = "" if self.sure_of != text else self.sure_of
        if item is None or item.state is None or text[:1].isalpha():
            self.say("")
            return
        try:
            understood = self.visit.understand(str(item.measure), item.state, text)
        except PlatesideError as error:
            self.say(refusal(error), FAINT)
        else:
            self.say(understood.echo, "")

    def entered(self, text: str) -> None:
        """Enter: take the text out of the line at once, then do the obvious with it."""
        text = text.strip()
        if self.resting is not None:
            self.resting.stop()
        if self.is_weighing and self.chosen is None:
            self.say("Weighing what was stored; Enter once more when it says what comes next.", "")
            return
        self.answered = text
        self.query_one(TypedLine).put("")
        self.enter(text)

    def action_enter(self) -> None:
        """Enter, where the line to type has lost the focus."""
        self.entered(self.query_one(TypedLine).value)

    def give_back(self, text: str) -> None:
        """Put text that was not stored back in the line, unless something else is typed there by now."""
        typed = next(iter(self.query(TypedLine)), None)  # the page may be gone
        if typed is not None and not typed.value:
            is_question = self.target is not None and self.target.observation is not None
            typed.put(text, chosen=is_question)  # no answer is mended by adding to it

    @work(group="enter")
    async def enter(self, text: str) -> None:
        """Do the obvious with what stood in the line."""
        item = self.target
        stored = False
        self.under_way = text
        try:
            stored = await self.enter_for(item, text)
        finally:
            self.under_way = ""
            if not stored:
                self.give_back(text)

    async def enter_for(self, item: NextItem | None, text: str) -> bool:
        """Do the obvious with a text for an item; return whether the text is done with."""
        if item is None:
            return await self.enter_without_target(text)
        if item.observation is not None:
            return await self.enter_answer(item, text)
        if text and self.is_a_word(text):
            return await self.pick_other(text)
        if (text and self.understood(item, text) is None) or not await self.come_first(item):
            return False
        if text:
            return self.enter_reading(item, text)
        self.say(f"Type {self.asks_for(item)}; F4 where it cannot be taken.", "")
        return True

    async def enter_without_target(self, text: str) -> bool:
        """Nothing is proposed: pick another reading, or go on to closing."""
        if text and not text[0].isalpha():
            self.say("No reading is asked for: F3 or a word picks one, then its values; Ctrl+R corrects.")
            return False
        if text:
            return await self.pick_other(text)
        await self.close_case()
        return True

    @staticmethod
    def is_a_word(text: str) -> bool:
        """Whether the text is no value but the beginning of another reading's name."""
        first = text.split(maxsplit=1)[0].lower()
        return len(first) > 1 and first.isalpha() and first not in {"ol", "open", "inf", "nan", "none"}

    async def enter_answer(self, item: NextItem, text: str) -> bool:
        """Store a yes or no."""
        answer = YES_WORDS.get(text.lower())
        if answer is None:
            if text and self.is_a_word(text):
                return await self.pick_other(text)
            if text in NOT_KNOWN:
                await self.skip()
                return True
            if not text and not await self.come_first(item):
                return False
            self.say("y or n; - or F4 where it cannot be told; a word picks a reading.", "")
            return False
        if not await self.come_first(item):
            return False
        self.visit.observe(str(item.observation), answer)
        self.stored(answer_words(str(item.observation), answer, self.visit.knowledge))
        return True

    @work(group="enter")
    async def action_skip(self) -> None:
        """Remember that the reading cannot be taken."""
        await self.skip()

    async def skip(self) -> None:
        """Put what the line is for aside."""
        item = self.target
        if item is None:
            self.say("There is nothing to skip.", "")
            return
        self.visit.skip(item.key)
        self.stored(f"cannot be taken now: {key_words(item.key, self.visit.knowledge)}")

    def understood(self, item: NextItem, text: str) -> Understood | None:
        """Understand a reading; say what is wrong with it where it is none."""
        try:
            return self.visit.understand(str(item.measure), str(item.state), text)
        except PlatesideError as error:
            self.say(refusal(error))
            return None

    def enter_reading(self, item: NextItem, text: str) -> bool:
        """Understand a reading, ask once about what is hardly possible, and store it."""
        understood = self.understood(item, text)
        if understood is None:
            return False
        if understood.asks and self.sure_of != text:
            self.sure_of = text
            self.say(f"{understood.asks.rstrip('.?')}. Is it so? Enter again keeps it.")
            return False
        if self.correcting:
            self.visit.correct(self.correcting, understood)
        else:
            self.visit.record(understood)
        self.stored(understood.echo)
        return True

    def stored(self, words: str) -> None:
        """Go on after something is on disk."""
        self.clear_line()
        self.say(f"stored: {words}", FAINT)
        self.weigh()

    def clear_line(self) -> None:
        """Make the line ready for the next thing."""
        self.chosen, self.correcting, self.sure_of = None, "", ""
        self.plateside.desk.drafts.drop(self.draft_name)
