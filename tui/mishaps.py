"""Where the details of a mistake of the program go: a log file, never the screen."""

from __future__ import annotations

import traceback
from datetime import UTC, datetime
from pathlib import Path


def keep(error: BaseException) -> str:
    """Append the details to the log file; return the one line that a person sees."""
    what = f"a mistake of the program ({type(error).__name__})"
    try:
        path = log_file()
        path.parent.mkdir(parents=True, exist_ok=True, mode=0o700)
        with path.open("a", encoding="utf-8", errors="replace") as file:
            file.write(f"{datetime.now(UTC).isoformat(timespec='seconds')}\n")
            file.write("".join(traceback.format_exception(error)) + "\n")
        path.chmod(0o600)
    except OSError:
        return f"{what}: {error}"
    return f"{what}; nothing that was entered is lost; the details are in {path}"


def log_file() -> Path:
    """Return the log file in the user's own folder for such things."""
    import platformdirs

    return Path(platformdirs.user_state_dir("plateside", appauthor=False)) / "mishaps.log"
