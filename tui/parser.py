"""The words that the command line understands."""

from __future__ import annotations

import argparse
import sys
from dataclasses import dataclass
from typing import TYPE_CHECKING, NoReturn

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence


@dataclass(frozen=True)
class Command:
    """One command: its word, what it does, the module in ``tui.commands`` that does it, and its arguments."""

    word: str
    does: str
    module: str
    arguments: Callable[[argparse.ArgumentParser], object]


def _sheets(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "sheets", nargs="+", metavar="SHEET", help="case sheet (YAML); - reads standard input"
    )


def _diagnose(parser: argparse.ArgumentParser) -> None:
    _sheets(parser)
    parser.add_argument(
        "--json", action="store_true", help="one JSON object per line, in the order of the sheets"
    )


def _cases(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("words", nargs="*", metavar="WORD", help="show only cases with all of these words")
    parser.add_argument("--json", action="store_true", help="one JSON object per line, newest first")
    parser.add_argument(
        "--limit", type=_one_or_more, default=50, metavar="N", help="at most N cases (default 50)"
    )


def _one_or_more(text: str) -> int:
    """Return a whole number from 1 on, at most what a list can hold; argparse tells what else was given."""
    try:
        number = int(text)
    except ValueError:
        number = 0
    if number < 1:
        raise argparse.ArgumentTypeError(f"{text}: give a whole number, 1 or more")
    return min(number, sys.maxsize)


def _expect(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("sheet", metavar="SHEET", help="case sheet (YAML); - reads standard input")
    parser.add_argument("--json", action="store_true", help="as one JSON object")


def _log(parser: argparse.ArgumentParser) -> None:
    _sheets(parser)
    parser.add_argument("--person", metavar="NAME", help="who enters it (default: the login name)")


def _report(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help="case number, as `plateside cases` shows it")
    parser.add_argument("--html", action="store_true", help="one HTML page, to print or to mail")
    parser.add_argument(
        "--tag", action="store_true", help="only the tag that goes with the motor to the repair shop"
    )
    _no_learned(parser, default=argparse.SUPPRESS)


def _merge(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "files", nargs="+", metavar="FILE", help="another casebook, exported JSON lines, or case sheets"
    )


def _export(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("cases", nargs="*", metavar="CASE", help="case numbers; none means all")
    form = parser.add_mutually_exclusive_group()
    form.add_argument("--json-lines", action="store_true", help="every entry, one JSON object per line")
    form.add_argument("--csv", action="store_true", help="the readings as a table")
    form.add_argument("--to", metavar="FOLDER", help="one sheet a file in this folder; none is written over")


def _learned(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("kind", nargs="?", metavar="KIND", help="one machine kind, such as induction_3ph")
    parser.add_argument("--json", action="store_true", help="one JSON object per line: groups, then scores")


def _copy(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="where the copy goes; it must not exist yet")


def _salvage(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="DAMAGED", help="the casebook that cannot be read in full")
    parser.add_argument("target", metavar="NEW", help="where to save what can be read; it must not exist yet")


def _check_rules(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "folders", nargs="*", metavar="FOLDER", help="a shop's own rules, checked with the shipped ones"
    )


def _demo(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--build", metavar="FILE", help="only write the example casebook to FILE")
    parser.add_argument(
        "--plain", action="store_true", default=argparse.SUPPRESS, help="plain questions and answers"
    )
    _ascii(parser, default=argparse.SUPPRESS)
    _no_learned(parser, default=argparse.SUPPRESS)


COMMANDS = (
    Command("demo", "try it on a throw-away casebook of an invented plant", "demo", _demo),
    Command("diagnose", "weigh case sheets: findings, likely faults, next reading", "diagnose", _diagnose),
    Command("expect", "what a healthy machine with this nameplate should read", "expect", _expect),
    Command("log", "put case sheets into the casebook; prints the case numbers", "log", _log),
    Command("cases", "list cases, or search them", "cases", _cases),
    Command("report", "the printed sheet of one case", "report", _report),
    Command("merge", "take in another casebook, exported entries, or case sheets", "merge", _merge),
    Command("export", "cases as YAML sheets, JSON lines or CSV", "export", _export),
    Command("learned", "what confirmed cases do to the odds, and how well the odds did", "learned", _learned),
    Command("copy", "a whole copy of the casebook, taken while others write", "copy", _copy),
    Command("salvage", "save what can be read of a damaged casebook", "salvage", _salvage),
    Command("check-rules", "check the rules, and a shop's own with them", "check_rules", _check_rules),
)


class Parser(argparse.ArgumentParser):
    """An argument parser that refuses in one line."""

    def error(self, message: str) -> NoReturn:
        """Say what is wrong and where help is; exit status 2."""
        self.exit(2, f"plateside: {message}; `{self.prog} --help` shows what is understood\n")


def build(argv: Sequence[str] | None = None) -> argparse.ArgumentParser:
    """Return the parser of the whole command line.

    With ``argv`` only the commands that it names get their arguments: the screens start sooner.
    """
    parser = Parser(
        prog="plateside",
        description="Troubleshoot electric motors from the nameplate and a handful of field readings. "
        "Without a command: the terminal interface.",
        epilog="Exit status: 0 done, 1 could not be done, 2 the input is wrong.",
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="store_true", help="print the version")
    parser.add_argument(
        "--plain", action="store_true", help="the visit as plain questions and answers, no full screen"
    )
    _ascii(parser, default=False)
    _no_learned(parser, default=False)
    _shared(parser, default=None)
    words = parser.add_subparsers(dest="command", metavar="COMMAND", parser_class=Parser)
    for command in COMMANDS:
        child = words.add_parser(
            command.word, help=command.does, description=command.does, allow_abbrev=False
        )
        if argv is None or command.word in argv:
            command.arguments(child)
            _shared(child, default=argparse.SUPPRESS)
    return parser


def _ascii(parser: argparse.ArgumentParser, *, default: object) -> None:
    parser.add_argument(
        "--ascii",
        action="store_true",
        default=default,
        help="draw the screens in ASCII (else only where the terminal shows no UTF-8)",
    )


def _no_learned(parser: argparse.ArgumentParser, *, default: object) -> None:
    parser.add_argument(
        "--no-learned",
        action="store_true",
        default=default,
        help="weigh with the shipped odds, not shifted by the shop's confirmed cases",
    )


def _shared(parser: argparse.ArgumentParser, *, default: str | None) -> None:
    """Add what every command understands, before or after its word."""
    parser.add_argument(
        "--casebook",
        metavar="FILE",
        default=default,
        help="casebook file (else $PLATESIDE_CASEBOOK, else the user's own)",
    )
    parser.add_argument(
        "--rules",
        metavar="FOLDER",
        default=default,
        help="a folder of a shop's own rules (else $PLATESIDE_RULES)",
    )
