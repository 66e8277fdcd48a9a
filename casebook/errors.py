"""Why the casebook could not do what was asked, and what to do about it."""

from __future__ import annotations

from calc.errors import PlatesideError


class CasebookError(PlatesideError):
    """Base of every error of the casebook; ``advice`` says what the person can do."""

    advice = ""

    def __init__(self, what: str, *, advice: str = "") -> None:
        self.what = what
        self.advice = advice or self.advice
        super().__init__(f"{what}. {self.advice}" if self.advice else what)


class NotACasebook(CasebookError):  # noqa: N818  (it names what was found)
    """The file is something else."""

    advice = "Name a casebook file, or a new file name to start one"


class NewerCasebook(CasebookError):  # noqa: N818
    """The file was written by a newer program."""

    advice = "Update Plateside here; nothing in the file was changed"


class DamagedCasebook(CasebookError):  # noqa: N818
    """The file cannot be read in full."""

    advice = "Save what can be read into a new file with the salvage command, and keep the damaged file"


class CasebookBusy(CasebookError):  # noqa: N818
    """Another process holds the file for longer than one waits."""

    advice = "Nothing was written. Try again; if it stays so, find the program that holds the file"


class DiskFull(CasebookError):  # noqa: N818
    """There is no room for the entry."""

    advice = "Nothing was written. Free some space and press Enter again"


class DiskFails(CasebookError):  # noqa: N818
    """The disk gives an error, is gone, or takes no larger file."""

    advice = "Nothing was written. See that the disk is there and has room, then try again"


class NoPermission(CasebookError):  # noqa: N818
    """The file or its folder may not be written, or not be read."""

    advice = "Nothing was written. Ask its owner for write permission to the file and its folder"


class CasebookGone(CasebookError):  # noqa: N818
    """The file was removed or replaced while it was open."""

    advice = "Nothing was written; what was typed stays as a draft. Leave and start again"


class UnknownCase(CasebookError):  # noqa: N818
    """No case has this number."""

    advice = "List the cases to see their numbers"


class AmbiguousCase(CasebookError):  # noqa: N818
    """Several cases begin with what was given; ``candidates`` holds their ids."""

    def __init__(self, what: str, *, candidates: tuple[str, ...]) -> None:
        self.candidates = candidates
        super().__init__(what, advice="Give more characters of the number")


class BadEntry(CasebookError):  # noqa: N818
    """An entry that the casebook does not take; ``field`` names what is wrong with it."""

    def __init__(self, field: str, given: object, allowed: str) -> None:
        self.field = field
        self.given = given
        self.allowed = allowed
        super().__init__(f"{field} is {given!r:.80}; it must be {allowed}")


class BadRow(ValueError):  # noqa: N818
    """A row of a casebook file holds what no program wrote there: the file is damaged."""
