"""Two thousand sheets of nonsense: an answer or a refusal, never a traceback, a warning, or no number."""

import math
import warnings

import pytest

from calc.errors import InputError
from calc.sheet_io import sheet_from_plain

from .cases import answer, nonsense, numbers_of

SHEETS = 2000


def outcome(seed: int) -> str:
    """``refused``, ``answered``, or what went wrong."""
    try:
        sheet = sheet_from_plain(nonsense(seed))
    except InputError as error:
        return (
            "refused" if error.problems and all(str(p) for p in error.problems) else "refused without a word"
        )
    try:
        found = answer(sheet)
    except InputError:
        return "refused"
    except Exception as error:
        return f"seed {seed}, {sheet.machine.kind}: {type(error).__name__}: {error}"
    if not all(math.isfinite(number) for number in numbers_of(found)):
        return f"seed {seed}, {sheet.machine.kind}: a number that is none"
    total = sum(fault.probability for fault in found.faults)
    if found.faults and not abs(total - 1.0) < 1e-9:
        return f"seed {seed}, {sheet.machine.kind}: odds add to {total}"
    return "answered"


def outcomes(seeds):
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        return [outcome(seed) for seed in seeds]


def test_forty_sheets_of_nonsense_are_answered_or_refused():
    found = outcomes(range(40))
    assert set(found) == {"answered", "refused"}


@pytest.mark.long
def test_two_thousand_sheets_of_nonsense_are_answered_or_refused():
    found = outcomes(range(SHEETS))
    assert not [said for said in found if said not in {"answered", "refused"}]
    assert found.count("answered") > SHEETS / 2
    assert found.count("refused") > SHEETS / 20
