"""What stands behind all screens: the casebook, the rules, who works here and what they carry."""

from __future__ import annotations

import threading
from typing import TYPE_CHECKING

from casebook.book import Casebook
from casebook.sqlite_store import SqliteStore
from tui.drafts import Drafts

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from calc.sheet import CaseSheet, Machine
    from casebook.store import CaseRow
    from rules.knowledge import Knowledge
    from tui.compose import Visit


class Desk:
    """Opened with the first screen; the rules come later, from a thread."""

    def __init__(self, casebook: Path, *, rules: Sequence[Path] = (), person: str = "") -> None:
        self.casebook = casebook
        self.book = Casebook(SqliteStore(casebook))
        self.drafts = Drafts(casebook)
        self.rules = tuple(rules)
        self.use_learned = True
        """Whether the shop's own confirmed cases shift the odds."""
        self.person = person or str(self.drafts.recall("person") or "")
        kit = self.drafts.recall("kit")
        self.kit: tuple[str, ...] | None = tuple(kit) if isinstance(kit, list) else None
        self._knowledge: Knowledge | None = None
        self._loading = threading.Lock()

    def load(self) -> None:
        """Load the rules, then the engine; meant for a thread."""
        if self.knowledge:
            import tui.compose  # noqa: F401

    @property
    def knowledge(self) -> Knowledge:
        """The rules; waits for them where they are not loaded yet."""
        with self._loading:
            if self._knowledge is None:
                from rules.loading import load_knowledge

                self._knowledge = load_knowledge(extra_folders=self.rules)
            return self._knowledge

    @property
    def knows_person(self) -> bool:
        """Whether name and kit were asked."""
        return bool(self.person) and self.kit is not None

    def remember(self, person: str, kit: Sequence[str]) -> str:
        """Keep who works here and what they carry; return why that could not be put on disk, if so."""
        self.person, self.kit = person, tuple(kit)
        return self.drafts.remember("person", person) or self.drafts.remember("kit", list(kit))

    def rows(self, typed: str, *, limit: int) -> list[CaseRow]:
        """Return the newest cases, or those that hold what is typed."""
        return self.book.search(typed, limit=limit) if typed.strip() else self.book.cases(limit=limit)

    def machine(self, tag: str) -> Machine | None:
        """Return a machine as the casebook knows it."""
        return self.book.machine(tag)

    def visit(self, case: str) -> Visit:
        """Take up a case."""
        from tui.compose import Visit

        return self._set_up(Visit(self.book, case, person=self.person, knowledge=self.knowledge))

    def open_case(self, sheet: CaseSheet) -> Visit:
        """Open a new case."""
        from tui.compose import Visit

        return self._set_up(Visit.new(self.book, sheet, person=self.person, knowledge=self.knowledge))

    def _set_up(self, visit: Visit) -> Visit:
        """Weigh as this desk was told to."""
        visit.use_learned = self.use_learned
        return visit

    def close(self) -> None:
        """Let the casebook go."""
        self.book.close()
