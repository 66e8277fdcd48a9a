"""What was typed but not yet entered, and what a technician is asked only once.

Small JSON files beside the casebook, readable by their owner only: a draft per
form and person, so that a dropped line loses nothing, and one file of what is
remembered (the person, the kit).
"""

from __future__ import annotations

import contextlib
import json
import os
import re
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pathlib import Path

LARGEST = 256 * 1024


class Drafts:
    """The drafts and remembered answers beside one casebook file."""

    def __init__(self, casebook: Path) -> None:
        self.folder = casebook.with_name(casebook.name + ".drafts")

    def save(self, name: str, fields: dict[str, Any]) -> None:
        """Put a draft on disk; an empty one removes it. Usable from a signal handler's last moments."""
        if not any(fields.values()):
            self.drop(name)
            return
        self.folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        target = self._path(name)
        beside = target.with_name(f"{target.name}.{os.getpid()}")
        handle = os.open(beside, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
        with os.fdopen(handle, "w", encoding="utf-8") as file:
            json.dump(fields, file, ensure_ascii=False)
            file.flush()
            os.fsync(file.fileno())
        beside.replace(target)

    def load(self, name: str) -> dict[str, Any]:
        """Return a draft, or nothing where there is none that can be read."""
        with contextlib.suppress(OSError, ValueError):
            path = self._path(name)
            if path.stat().st_size <= LARGEST:
                fields = json.loads(path.read_text(encoding="utf-8"))
                return fields if isinstance(fields, dict) else {}
        return {}

    def drop(self, name: str) -> None:
        """Remove a draft."""
        with contextlib.suppress(OSError):
            self._path(name).unlink()

    def names(self) -> list[str]:
        """Return the names of the drafts that wait, newest first."""
        with contextlib.suppress(OSError):
            files = [path for path in self.folder.glob("*.json") if path.stem != "remembered"]
            return [path.stem for path in sorted(files, key=lambda path: -path.stat().st_mtime)]
        return []

    def remember(self, key: str, value: object) -> None:
        """Keep an answer that is asked only once, such as the kit."""
        self.save("remembered", {**self.load("remembered"), key: value})

    def recall(self, key: str) -> object:
        """Return a remembered answer, or None."""
        return self.load("remembered").get(key)

    def _path(self, name: str) -> Path:
        """Return the file of a draft; the name can never lead out of the folder."""
        return self.folder / (re.sub(r"[^A-Za-z0-9_-]", "_", name)[:80] + ".json")
