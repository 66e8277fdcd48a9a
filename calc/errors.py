"""The ways in which input can be wrong, each with what was given and what is allowed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

SAID: Final = 20
"""Problems of one input that are said; the others are counted."""


@dataclass(frozen=True)
class Problem:
    """One thing that is wrong with an input, and where.

    ``where`` is a path inside the document such as ``machine.nameplate.current``;
    ``line`` counts from 1 and is None where the input has no lines.
    """

    file: str
    where: str
    given: str
    allowed: str
    line: int | None = None

    def __str__(self) -> str:
        """Say it in one line: file, line, field, what was given, what is allowed."""
        place = self.file if self.line is None else f"{self.file}, line {self.line}".lstrip(", ")
        return f"{': '.join(part for part in (place, self.where, self.given) if part)}; {self.allowed}"


class PlatesideError(Exception):
    """Base of every error that Plateside raises on purpose."""


class InputError(PlatesideError):
    """The input is wrong; ``problems`` says where, what was given and what is allowed.

    The text says the first of them, and how many more there are.
    """

    def __init__(self, problems: list[Problem]) -> None:
        self.problems = problems
        said = [str(problem) for problem in problems[:SAID]]
        if len(problems) > SAID:
            said.append(f"{problems[0].file}: and {len(problems) - SAID} more".lstrip(": "))
        super().__init__("\n".join(said))


class RangeError(PlatesideError, ValueError):
    """A quantity handed to a formula lies outside what the formula allows."""

    def __init__(self, name: str, given: object, allowed: str) -> None:
        self.name = name
        self.given = given
        self.allowed = allowed
        super().__init__(f"{name} is {given}; it must be {allowed}")


def clip(text: object, length: int = 60) -> str:
    """Show input in a message: control characters escaped, cut to a length."""
    shown = "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in str(text)[: length + 1])
    return shown if len(shown) <= length else shown[: length - 1] + "…"
