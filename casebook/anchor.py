"""Whether an open casebook still is the file of its name.

A file that is removed or replaced while it is open goes on working for whoever has it open, and all that is
written to it vanishes with the last of them. So each change looks first.
"""

from __future__ import annotations

import contextlib
import os
import sqlite3
from datetime import UTC, datetime
from pathlib import Path
from typing import Final, Literal

from casebook.errors import CasebookError, CasebookGone
from casebook.opening import copy_whole
from casebook.place import make_folder

_BESIDE: Final = ("", "-wal", "-shm")

State = Literal["here", "removed", "replaced"]
_Identity = tuple[int, int]


class Anchor:
    """Remembers which files a casebook and its journal were when they were seen first."""

    def __init__(self, path: Path) -> None:
        self._paths = [Path(f"{path}{end}") for end in _BESIDE]
        self._seen: dict[Path, _Identity] = {}
        self.mode = path.stat().st_mode & 0o777
        self.look()

    def look(self) -> State:
        """Return whether the file is still there, is gone, or is another one; the journal counts with it."""
        now = {path: found for path in self._paths if (found := _identity(path)) is not None}
        if self._paths[0] not in now:
            return "removed"
        if any(now.get(path) != before for path, before in self._seen.items()):
            return "replaced"
        self._seen = now | self._seen
        return "here"

    def clear_away(self, connection: sqlite3.Connection) -> None:
        """Where another file has the name, bring the journal home to the old one and take it away.

        A journal that stays behind would be played into the file that has the name now.
        """
        main = self._paths[0]
        if _identity(main) == self._seen.get(main):
            return
        with contextlib.suppress(sqlite3.Error):
            connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")
        for path in self._paths[1:]:
            if _identity(path) == self._seen.get(path):
                with contextlib.suppress(OSError):
                    path.unlink(missing_ok=True)


def _identity(path: Path) -> _Identity | None:
    try:
        found = path.stat()
    except OSError:
        return None
    return found.st_dev, found.st_ino


def put_back(connection: sqlite3.Connection, path: Path, mode: int) -> None:
    """Write a removed casebook anew from what its connection still holds, under its old name.

    Raises ``CasebookError`` where that cannot be, or where a file has come there meanwhile.
    """
    beside = path.with_name(f"{path.name}.{os.getpid()}")
    try:
        make_folder(path.parent, group=False)
        copy_whole(connection, beside)
        beside.chmod(mode)
        for end in _BESIDE[1:]:  # a journal of the removed file would be played into the new one
            if not path.exists():
                Path(f"{path}{end}").unlink(missing_ok=True)
        os.link(beside, path)
    except (OSError, sqlite3.Error, CasebookError) as error:
        why = error.strerror if isinstance(error, OSError) else error
        raise CasebookGone(f"{path} was removed while it was open, and cannot be put back ({why})") from error
    finally:
        with contextlib.suppress(OSError):
            beside.unlink(missing_ok=True)


def set_aside(connection: sqlite3.Connection, path: Path) -> CasebookGone:
    """Copy what a connection holds of a replaced casebook beside the new file; return what to say."""
    moment = datetime.now(UTC).strftime("%Y%m%dT%H%M%SZ")
    aside = path.with_name(f"{path.stem}-set-aside-{moment}-{os.getpid()}{path.suffix}")
    what = f"{path}, or its journal, was replaced by another file while it was open"
    try:
        copy_whole(connection, aside)
    except (sqlite3.Error, CasebookError):
        return CasebookGone(what)
    return CasebookGone(
        what,
        advice="Nothing was written; what was typed stays as a draft. All that was stored here before is in "
        f"{aside.name}: leave, start again, and take it in with `plateside merge`",
    )
