"""The printed sheet, or the shop tag, as pages; a key writes it to a file."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual import work
from textual.content import Content

from calc.errors import PlatesideError
from tui.harmless import harmless
from tui.keys import bindings
from tui.screens.note import Note
from tui.screens.page import TextPage
from tui.widgets.ruled import INDENT

if TYPE_CHECKING:
    from tui.compose import Visit
    from tui.page_parts import Page


class SheetPage(TextPage):
    """Shows the sheet as it is printed; put together off the event loop."""

    KEYS = "sheet"
    BINDINGS = bindings("sheet")

    def __init__(self, visit: Visit, *, shop_tag: bool = False) -> None:
        super().__init__()
        self.visit, self.is_tag = visit, shop_tag
        self.made: Page | None = None
        self.text: list[str] = ["putting it together ..."]

    def on_mount(self) -> None:
        """Put the sheet together."""
        self.make()

    @work(thread=True, exit_on_error=False)
    def make(self) -> None:
        """Weigh the case where that is due, and put the sheet together."""
        from tui import printing, report

        try:
            made = printing.printed(self.visit, shop_tag=self.is_tag)
        except Exception as error:
            self.app.call_from_thread(self.say, self.plateside.trouble(error))
            return
        self.app.call_from_thread(self.made_now, made, report.as_text(made))

    def made_now(self, made: Page, text: list[str]) -> None:
        """Show the sheet."""
        self.made, self.text = made, text
        if self.stands:
            self.show()

    def lines(self) -> list[Content]:
        """Return the sheet's own lines, without the margin."""
        return [Content(harmless(line)) for line in self.text]

    @work(group="enter")
    async def action_write(self) -> None:
        """Ask for a name and write the sheet to a new file."""
        from tui import printing

        if self.made is None:
            return
        hint = f"in {printing.FOLDER}/ beside the casebook"
        usual = printing.usual_name(self.visit, shop_tag=self.is_tag)
        name = await self.app.push_screen_wait(Note("write to", hint, start=usual, width=36))
        if not name:
            return
        try:
            path = printing.write(self.made, self.plateside.desk.casebook, name)
        except PlatesideError as error:
            self.say(str(error))
        else:
            whole = f"written: {path}"
            near = f"written: {printing.FOLDER}/{path.name} beside the casebook"
            self.say(whole if len(whole) <= self.room - INDENT else near)
