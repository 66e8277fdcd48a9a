"""A list of ruled lines with a bar that shows on every terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual.style import Style
from textual.widgets import OptionList

from tui.steady import Steady

if TYPE_CHECKING:
    from collections.abc import Iterable

    from textual.content import Content


class Lines(Steady, OptionList):
    """Lines to choose from. The bar is reverse video: Textual drops that from a component's style."""

    def __init__(self) -> None:
        super().__init__(id="list", markup=False, compact=True)

    def get_visual_style(self, *component_classes: str, partial: bool = False) -> Style:
        """Return the style of a part; that of the bar is reverse."""
        style = super().get_visual_style(*component_classes, partial=partial)
        if "option-list--option-highlighted" in component_classes:
            return style + Style(reverse=True)
        return style

    def show(self, lines: Iterable[Content], *, at: int | None = 0) -> None:
        """Show other lines, the bar on one of them, or on none."""
        self.clear_options()
        self.add_options(list(lines))
        self.highlighted = min(at, self.option_count - 1) if at is not None and self.option_count else None
