"""A new case that was begun and is not stored yet: what is told of it so far, and its draft."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Final

from casebook.entry import clean_line

if TYPE_CHECKING:
    from tui.drafts import Drafts
    from tui.plate_lines import Raw

DRAFT: Final = "new_case"


def waiting(drafts: Drafts) -> list[str]:
    """Return the drafts of new cases that wait, newest first."""
    return [name for name in drafts.names() if name.startswith(DRAFT)]


@dataclass
class Begun:
    """A new case as far as it is told; going back keeps all of it."""

    tag: str | None = None
    complaint: str = ""
    kind: str = ""
    lines: dict[str, str] = field(default_factory=dict)
    name: str = DRAFT
    """Its draft; each case that is begun has its own."""
    machine: Raw | None = None
    """The machine as it goes into the sheet: known, or from its plate."""

    @classmethod
    def of(cls, draft: dict[str, Any], name: str) -> Begun:
        """Take up a draft; what somebody else wrote into its file is left out."""
        tag, complaint, kind = (
            clean_line(text) if isinstance(text := draft.get(key), str) else None
            for key in ("tag", "complaint", "kind")
        )
        lines = draft.get("lines")
        typed = {str(key): str(text) for key, text in lines.items()} if isinstance(lines, dict) else {}
        return cls(tag, complaint or "", kind or "", typed, name)

    @property
    def step(self) -> int:
        """The question to go on with: the plate once its kind is told, else complaint or machine."""
        if self.tag is None:
            return 0
        return 3 if self.complaint and self.kind else 1

    def kept(self) -> dict[str, Any]:
        """Return what a draft must hold."""
        return {"tag": self.tag, "complaint": self.complaint, "kind": self.kind, "lines": self.lines}

    def draft(self) -> tuple[str, dict[str, Any]] | None:
        """Return the draft of what is told, once there is a machine."""
        return (self.name, self.kept()) if self.tag is not None else None
