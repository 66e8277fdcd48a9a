"""The command line: finds the command, and turns every way of failing into a message and an exit status."""

from __future__ import annotations

import contextlib
import importlib
import os
import sys
import time
from datetime import datetime, timedelta
from pathlib import Path
from typing import TYPE_CHECKING

from tui import parser
from tui.version import VERSION

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Sequence

FARTHEST = timedelta(hours=14)
"""How far local time is from UTC at most, on either side."""
DONE, FAILED, WRONG_INPUT, INTERRUPTED = 0, 1, 2, 130


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command; return 0 done, 1 could not be done, 2 the input is wrong."""
    _open_closed_streams()
    _mend_zone()
    try:
        words = sys.argv[1:] if argv is None else list(argv)
        status = run(parser.build(words).parse_args(words))
        sys.stdout.flush()
    except BrokenPipeError:
        status = _finish(DONE)  # whoever reads the results has seen enough
    except OSError as error:
        status = _finish(_told(_os_words(error), FAILED))
    except KeyboardInterrupt:
        return INTERRUPTED
    except SystemExit as leaving:  # argparse has said what it had to say
        return leaving.code if isinstance(leaving.code, int) else FAILED
    return status


def run(arguments: Namespace) -> int:
    """Run a parsed command line; what goes wrong is told in one line each."""
    if arguments.version:
        print(f"plateside {VERSION}")
        return DONE
    from calc.errors import InputError, PlatesideError

    try:
        return _command(arguments)
    except InputError as error:
        return _told(str(error), WRONG_INPUT)
    except PlatesideError as error:
        return _told(str(error), FAILED)
    except OSError:
        raise
    except Exception as error:  # nothing unexpected may reach a person as a traceback
        return _told(unexpected(error), FAILED)


def unexpected(error: Exception) -> str:
    """Keep the details of a mistake of the program in a log file; return the one line to show."""
    from tui import mishaps

    return mishaps.keep(error)


def _command(arguments: Namespace) -> int:
    """Load the module of the command and run it."""
    modules = {command.word: command.module for command in parser.COMMANDS}
    name = modules.get(arguments.command, "visit")
    status: int = importlib.import_module(f"tui.commands.{name}").run(arguments)
    return status


def _told(text: str, status: int) -> int:
    """Write a message to standard error; return the exit status."""
    from tui.output import warn

    warn(text)
    return status


def _os_words(error: OSError) -> str:
    """Return what the operating system refused, in words."""
    place = f"{error.filename}: " if error.filename else ""
    return f"{place}{error.strerror or error}"


def _open_closed_streams() -> None:
    """Let a command run whose standard streams were closed by its caller."""
    if sys.stdin is None:
        sys.stdin = Path(os.devnull).open(encoding="utf-8")  # noqa: SIM115  (lives on)
    if sys.stdout is None:
        sys.stdout = Path(os.devnull).open("w", encoding="utf-8")  # noqa: SIM115
    if sys.stderr is None:
        sys.stderr = Path(os.devnull).open("w", encoding="utf-8")  # noqa: SIM115


def _mend_zone() -> None:
    """Go on in UTC where the zone is one that no place on earth has: no moment could be shown or stored."""
    with contextlib.suppress(ValueError, OverflowError):
        if abs(datetime.now().astimezone().utcoffset() or timedelta()) <= FARTHEST:
            return
    zone, os.environ["TZ"] = os.environ.get("TZ", ""), "UTC0"
    if hasattr(time, "tzset"):
        time.tzset()
    _told(f"there is no time zone {zone}: times are shown in UTC", FAILED)


def _finish(status: int) -> int:
    """Write what is still held back; throw it away where it cannot be written, lest it be tried again."""
    try:
        sys.stdout.flush()
    except OSError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    return status
