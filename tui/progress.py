"""How far a long piece of work is, as one line that is drawn over itself; on a terminal only."""

from __future__ import annotations

import shutil
import sys
import time
from typing import Final

from tui.harmless import ascii_only, harmless, width

CELLS: Final = 16
EVERY_S: Final = 0.1


class Bar:
    """One line on standard error; where that is no terminal nothing is drawn."""

    def __init__(self, name: str) -> None:
        self._name = ascii_only(harmless(name, limit=20))
        self._stream = sys.stderr
        self.is_seen = self._stream.isatty()
        self._next = 0.0
        self._drawn = 0
        self._stage = ""

    def show(self, stage: str, done: int, of: int) -> None:
        """Draw how far a stage is, a few times a second; ``of`` 0 is not known."""
        is_news = stage != self._stage or done >= of > 0
        if not self.is_seen or (time.monotonic() < self._next and not is_news):
            return
        self._stage, self._next = stage, time.monotonic() + EVERY_S
        self._draw(f"{self._name}: {stage} {_gauge(done, of)}")

    def end(self) -> None:
        """Clear the line, so that the result stands alone."""
        if self._drawn:
            self._draw("")
            print("\r", end="", file=self._stream, flush=True)
            self._drawn = 0

    def _draw(self, line: str) -> None:
        """Draw over what stands there; never to the last column, where some terminals go on to a new line."""
        line = line[: max(10, shutil.get_terminal_size().columns - 1)]
        print("\r" + line.ljust(self._drawn), end="", file=self._stream, flush=True)
        self._drawn = width(line)


def _gauge(done: int, of: int) -> str:
    """Return a bar, the share in per cent and the count; the count alone where the whole is not known."""
    if of <= 0:
        return str(done)
    share = min(done / of, 1.0)
    full = int(share * CELLS)
    return f"[{'#' * full}{'.' * (CELLS - full)}] {int(100 * share):3d} %  {done} of {of}"
