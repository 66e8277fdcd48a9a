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
from itertools import chain, count
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pathlib import Path

LARGEST = 256 * 1024


class Drafts:
    """The drafts and remembered answers beside one casebook file."""

    def __init__(self, casebook: Path) -> None:
        self.folder = casebook.with_name(casebook.name + ".drafts")

    def save(self, name: str, fields: dict[str, Any], *, sync: bool = True) -> str:
        """Put a draft on disk; an empty one removes it. Usable from a signal handler's last moments.

        Without ``sync`` it outlives the end of the program, but perhaps not that of the power. Return why
        it could not be, such as a full disk (the draft before stays then); nothing where it is done.
        """
        if not any(fields.values()):
            self.drop(name)
            return ""
        target = self._path(name)
        beside = target.with_name(f"{target.name}.{os.getpid()}")
        try:
            self._write(beside, json.dumps(fields, ensure_ascii=False), sync=sync)
            beside.replace(target)
        except OSError as error:
            with contextlib.suppress(OSError):
                beside.unlink(missing_ok=True)
            return error.strerror or str(error)
        return ""

    def _write(self, path: Path, text: str, *, sync: bool) -> None:
        """Write a file that is its owner's own."""
        self.folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
        with os.fdopen(handle, "w", encoding="utf-8", errors="replace") as file:
            file.write(text)
            file.flush()
            if sync:
                os.fsync(file.fileno())

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

    def free_name(self, name: str) -> str:
        """Return a name for a new draft that is not one of those that wait."""
        taken = set(self.names())
        numbered = (f"{name}-{number}" for number in count(2))
        return next(one for one in chain((name,), numbered) if one not in taken)

    def remember(self, key: str, value: object) -> str:
        """Keep an answer that is asked only once, such as the kit; return why that could not be, if so."""
        return self.save("remembered", {**self.load("remembered"), key: value})

    def recall(self, key: str) -> object:
        """Return a remembered answer, or None."""
        return self.load("remembered").get(key)

    def _path(self, name: str) -> Path:
        """Return the file of a draft; the name can never lead out of the folder."""
        return self.folder / (re.sub(r"[^A-Za-z0-9_-]", "_", name)[:80] + ".json")
