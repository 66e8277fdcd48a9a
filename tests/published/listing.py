"""Every check of this folder as a row, gathered by collecting the tests; and the page that lists them."""

from __future__ import annotations

import io
from collections import Counter
from contextlib import redirect_stderr, redirect_stdout
from dataclasses import dataclass, field
from itertools import groupby
from pathlib import Path

import pytest

from tests.published.sources import KNOWN, Source

FOLDER = Path(__file__).parent
PAGE = FOLDER.parent.parent / "docs" / "published.md"
FEW = 3  # names of what is checked that a row shows before it only counts


@dataclass
class Row:
    """One published statement: what it checks, in how many cases, and which of them are expected to fail."""

    file: str
    title: str
    source: Source
    cases: int = 0
    checks: set[str] = field(default_factory=set)
    failing: Counter[str] = field(default_factory=Counter)


class Collector:
    """A plugin that keeps what pytest collects."""

    items: list[pytest.Item]

    def pytest_collection_finish(self, session: pytest.Session) -> None:
        """Keep the items."""
        self.items = list(session.items)


def collected() -> list[Row]:
    """Return a row per statement and file, in the order of the files.

    Raises
    ------
    LookupError
        If the tests cannot be collected, or one names no source.

    """
    keeper, said = Collector(), io.StringIO()
    with redirect_stdout(said), redirect_stderr(said):
        status = pytest.main(
            ["--collect-only", "-q", "-m", "", "-p", "no:cacheprovider", str(FOLDER)], [keeper]
        )
    if status != pytest.ExitCode.OK:
        raise LookupError(said.getvalue())
    rows: dict[tuple[str, ...], Row] = {}
    for item in keeper.items:
        mark = item.get_closest_marker("published")
        if mark is None:
            raise LookupError(f"{item.nodeid} names no source")
        one: Source = mark.args[0]
        key = (item.path.name, one.standard, one.clause, one.says, one.known)
        row = rows.setdefault(key, Row(item.path.name, title_of(item), one))
        row.cases += 1
        row.checks.update(one.checks)
        failure = item.get_closest_marker("xfail")
        if failure is not None:
            row.failing[failure.kwargs["reason"]] += 1
    return sorted(rows.values(), key=lambda row: row.file)


def title_of(item: pytest.Item) -> str:
    """Return the first line of the module's docstring."""
    module = item.getparent(pytest.Module)
    assert module is not None
    return (module.obj.__doc__ or "").strip().splitlines()[0]


def page(rows: list[Row]) -> str:
    """Return the page as Markdown."""
    parts = [HEAD, *counts(rows), *failures(rows), *usages(rows)]
    for _, group in groupby(rows, key=lambda row: row.file):
        several = list(group)
        parts += [f"\n## {several[0].title.rstrip('.')}", f"\n`tests/published/{several[0].file}`\n", TABLE]
        parts += [line(row) for row in several]
    return "\n".join(parts) + "\n"


HEAD = """# What Plateside is held against

Written by `tools/published` from the tests in `tests/published/`; a test compares it. A row is one published
statement, with the number of cases that check it. The numbers stand in the tests and their data, never in the
rules and tables that they check.
"""
TABLE = "| published by | what it says | checks | state | cases |\n|---|---|---|---|---|"


def counts(rows: list[Row]) -> list[str]:
    """Count the statements and cases of each state."""
    lines = ["| state | means | statements | cases |", "|---|---|---|---|"]
    for known, means in KNOWN.items():
        mine = [row for row in rows if row.source.known == known]
        lines.append(f"| {known} | {means} | {len(mine)} | {sum(row.cases for row in mine)} |")
    failing = [row for row in rows if row.failing]
    cases = sum(sum(row.failing.values()) for row in failing)
    lines.append(f"| expected failure | among the above: it does not hold yet | {len(failing)} | {cases} |")
    return [*lines, f"| all | | {len(rows)} | {sum(row.cases for row in rows)} |"]


def failures(rows: list[Row]) -> list[str]:
    """List the statements that are known not to hold, with the reason; the suite fails once one holds."""
    lines = ["\n## Expected failures\n", "| published by | what it says | cases | why |", "|---|---|---|---|"]
    for row in rows:
        for reason, count in sorted(row.failing.items()):
            lines.append(f"| {by(row)} | {cell(row.source.says)} | {count} of {row.cases} | {cell(reason)} |")
    return lines


def usages(rows: list[Row]) -> list[str]:
    """Name what no standard gives a number for."""
    named = sorted({name for row in rows if row.source.known == "common practice" for name in row.checks})
    return ["\n## Common practice, no published number\n", ", ".join(f"`{name}`" for name in named)]


def line(row: Row) -> str:
    """Write one row."""
    held = sum(row.failing.values())
    state = row.source.known + (f"; expected failure {held} of {row.cases}" if held else "")
    return f"| {by(row)} | {cell(row.source.says)} | {what(row.checks)} | {state} | {row.cases} |"


def by(row: Row) -> str:
    """Name standard and clause."""
    return cell(", ".join(part for part in (row.source.standard, row.source.clause) if part))


def what(checks: set[str]) -> str:
    """Name what is checked, or the first and how many."""
    named = [f"`{name}`" for name in sorted(checks)]
    return ", ".join(named) if len(named) <= FEW else f"{named[0]} and {len(named) - 1} more"


def cell(text: str) -> str:
    """Make a text fit for a cell of a table."""
    return text.replace("|", "\\|").replace("\n", " ")
