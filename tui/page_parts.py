"""What a printed sheet is made of: titled blocks of rows, sentences and pictures. No layout."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tui.curve_pictures import Picture
    from tui.page_history import Chart

DEFERRAL = (
    "This sheet records readings and what they make likely. It replaces no standard, no local code and no "
    "site rule; limits are quoted with their source, the edition at hand decides. Work on and near "
    "electrical equipment, and the decision to energise, belong to qualified persons under licensed practice."
)


@dataclass(frozen=True)
class Scale:
    """A reading beside its band, in the unit of the band."""

    low: float
    high: float
    read: tuple[float, ...]


@dataclass(frozen=True)
class Row:
    """One line of a table; ``scale`` may be drawn beside it."""

    cells: tuple[str, ...]
    scale: Scale | None = None


@dataclass(frozen=True)
class Block:
    """A titled part of the sheet: a table, or sentences."""

    title: str
    head: tuple[str, ...] = ()
    rows: tuple[Row, ...] = ()
    sentences: tuple[str, ...] = ()
    charts: tuple[Chart, ...] = ()
    """Drawn on the page; in the text their sentences must do."""
    pictures: tuple[Picture, ...] = ()
    """Curves of the machine, drawn on the page only."""

    def __bool__(self) -> bool:
        """Whether there is anything to show."""
        return bool(self.rows or self.sentences or self.charts or self.pictures)


@dataclass(frozen=True)
class Page:
    """The whole sheet."""

    title: str
    facts: tuple[tuple[str, str], ...]
    blocks: tuple[Block, ...]
    deferral: str = DEFERRAL
    warning: str = ""
