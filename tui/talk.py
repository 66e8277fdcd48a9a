"""Questions and answers in plain lines, for dumb terminals, pipes and screen readers."""

from __future__ import annotations

import io
import sys
from typing import TYPE_CHECKING, Final

from tui.columns import paragraph
from tui.harmless import harmless
from tui.output import say
from tui.searching import found as searched

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from calc.errors import InputError

LONGEST: Final = 4000
"""Characters that one line may have: a long remark."""
YES, NO = ("y", "yes"), ("n", "no")


class Left(Exception):  # noqa: N818 - nothing is wrong when a person leaves
    """The person has left: end of input."""


class Back(Exception):  # noqa: N818 - nothing is wrong when a person goes back
    """The person leaves a question without an answer."""


def ask(prompt: str, default: str = "") -> str:
    """Ask for one line; Enter alone gives the default. Raises Left at the end of input, Back at ``back``."""
    shown = harmless(f"{prompt} [{harmless(default, limit=60)}]: " if default else f"{prompt}: ")
    while True:
        say(shown, end="")
        sys.stdout.flush()
        line = _line()
        if not line:
            say()
            raise Left
        if line.strip().lower() == "back":
            raise Back
        if len(line) > LONGEST:
            say(f"That line is longer than {LONGEST} characters: type it shorter.")
        elif not any("\ud800" <= sign <= "\udfff" for sign in line):
            return line.strip() or default
        else:
            say(f"That line is no {sys.stdin.encoding}: type it again, or without accents.")


def _line() -> str:
    """Read one line, "" at the end; bytes that are not of the stream's encoding come as lone surrogates."""
    if isinstance(sys.stdin, io.TextIOWrapper) and sys.stdin.errors != "surrogateescape":
        sys.stdin.reconfigure(errors="surrogateescape")
    line = sys.stdin.readline(LONGEST + 1)
    while line and not line.endswith("\n") and (more := sys.stdin.readline(LONGEST)):
        line = line[:LONGEST] + more[-2:]  # of a longer line no more is held than shows that it is one
    return line


def ask_yes(prompt: str) -> bool:
    """Ask until the answer is yes or no."""
    while True:
        answer = ask(f"{prompt} yes/no").lower()
        if answer in YES + NO:
            return answer in YES
        say("Answer yes or no.")


def ask_choice(prompt: str, choices: Mapping[str, str], *, also: Mapping[str, str] | None = None) -> str:
    """Show numbered choices and return the id of the one that is named by number, id or unique beginning.

    What names none of them is looked for among ``also``, other words for each; that is said.
    """
    ids = list(choices)
    say(f"{place:>3}  {choices[one]}" for place, one in enumerate(ids, 1))
    while True:
        answer = ask(prompt)
        found = (
            [ids[int(answer) - 1]]
            if answer.isdecimal() and 0 < int(answer) <= len(ids)
            else match(answer, choices)
        )
        if not found and also:
            found = searched(answer, [(one, f"{one} {choices[one]} {also[one]}") for one in ids])
            if len(found) == 1:
                tell(f"Taken: {choices[found[0]]}.")
        if len(found) == 1:
            return found[0]
        tell(f"Which one: {', '.join(found)}?" if found else "Give a number from the list, or its name.")


def ask_several(prompt: str, choices: Mapping[str, str], usual: Iterable[str] = ()) -> list[str]:
    """Show numbered choices and return the ids that are named by numbers, or by names with commas between."""
    ids = list(choices)
    say(f"{place:>3}  {choices[one]}" for place, one in enumerate(ids, 1))
    default = ", ".join(choices[one] for one in ids if one in set(usual))
    while True:
        answer = ask(f"{prompt} (numbers, or names with commas)", default)
        words = answer.replace(",", " ").split()
        if all(word.isdecimal() for word in words):
            found = [ids[int(word) - 1 : int(word)] if int(word) else [] for word in words]
        else:
            words = [part.strip() for part in answer.split(",") if part.strip()]
            found = [match(word, choices) for word in words]
        wrong = [word for word, named in zip(words, found, strict=True) if len(named) != 1]
        if not wrong:
            return [one for one in ids if [one] in found]
        tell(f"Which are: {', '.join(wrong)}? Give numbers from the list, or names.")


def match(text: str, choices: Mapping[str, str] | Iterable[str]) -> list[str]:
    """Return the ids that a text names: exactly, else by beginning, else by a word of the name."""
    wanted = text.lower().replace(" ", "_").replace("-", "_")
    ids = list(choices)
    if not wanted or wanted in ids:
        return [wanted] if wanted else []
    names = {one: choices[one] if isinstance(choices, dict) else one for one in ids}
    begins = [one for one in ids if one.startswith(wanted)]
    return begins or [one for one in ids if text.lower() in names[one].lower()]


def tell_problems(error: InputError) -> None:
    """Say what is wrong with something typed, and what is allowed."""
    for problem in error.problems:
        tell(f"{problem.given}; {problem.allowed}")


def tell(text: str) -> None:
    """Say one sentence, wrapped."""
    say(paragraph(text))
