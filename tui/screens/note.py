"""One remark for the log."""

from __future__ import annotations

from tui.keys import bindings
from tui.screens.form import FormPage, Line


class Note(FormPage[str]):
    """Dismisses with the text; ``start`` stands there first."""

    KEYS = "note"
    BINDINGS = bindings("note")

    def __init__(
        self, word: str = "note", hint: str = "for the log", *, start: str = "", width: int = 56
    ) -> None:
        super().__init__()
        self.word, self.hint, self.start, self.width = word, hint, start, width

    def form_lines(self) -> list[Line]:
        """Return the one line."""
        return [
            Line(
                "text",
                self.word,
                self.hint,
                self.start,
                width=self.width,
                hear=lambda _text: (self.hint, True),
            )
        ]

    def done(self) -> None:
        """Store what stands there."""
        text = self.values["text"]
        if text:
            self.finish(text)
        else:
            self.dismiss(None)
