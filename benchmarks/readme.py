"""The places in README.md where measurements are quoted, with the day and the machine."""

from __future__ import annotations

import os
import platform
import re
from datetime import UTC, datetime
from pathlib import Path

README = Path(__file__).resolve().parent.parent / "README.md"


def machine() -> str:
    """Return the day, and what a figure may hang on: cores, system, Python, and what else runs."""
    day = datetime.now(UTC).date().isoformat()
    cores = f"{os.cpu_count()} cores ({platform.machine()})"
    python = f"Python {platform.python_version()}"
    return f"{day}, {cores}, {platform.system()}, {python}, load {os.getloadavg()[0]:.1f}"


def put(part: str, text: str, measured: str, file: Path = README) -> bool:
    """Put the text of a part between its marks; False where the file has none."""
    old = file.read_text(encoding="utf-8")
    place = re.compile(rf"(<!-- measured: {part} -->\n```text\n).*?(```\n)", re.DOTALL)
    new, found = place.subn(lambda at: f"{at[1]}{measured}\n{text.rstrip()}\n{at[2]}", old)
    if found:
        file.write_text(new, encoding="utf-8")
    return bool(found)
