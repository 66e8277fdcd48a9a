"""Where a command writes: results to standard output, everything else to standard error."""

from __future__ import annotations

import json
import sys
from typing import TYPE_CHECKING, Any, TextIO

from tui.harmless import ascii_only, harmless

if TYPE_CHECKING:
    from collections.abc import Iterable


def say(lines: str | Iterable[str] = "", *, end: str = "\n") -> None:
    """Write lines of a result."""
    _write(sys.stdout, [lines] if isinstance(lines, str) else lines, end)


def warn(text: str) -> None:
    """Write one diagnostic line or more."""
    _write(sys.stderr, [f"plateside: {harmless(line)}" for line in text.splitlines() or [""]])


def say_json(answer: dict[str, Any]) -> None:
    """Write one object on one line, at once, so that a reader need not wait for the last."""
    print(json.dumps(answer, ensure_ascii=True, allow_nan=False), flush=True)


def screen_stream() -> TextIO | None:
    """Return the stream that screens are drawn on; None where its owner has closed it."""
    return sys.__stdout__ if sys.platform == "win32" else sys.__stderr__


def _write(stream: TextIO, lines: Iterable[str], end: str = "\n") -> None:
    """Write lines in what the stream can show."""
    encoding = (getattr(stream, "encoding", None) or "ascii").lower().replace("-", "")
    for line in lines:
        shown = line if encoding.startswith("utf") else ascii_only(line)
        print(shown.encode("utf-8", "replace").decode("utf-8"), file=stream, end=end)
