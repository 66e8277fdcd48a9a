"""Values as they are typed: "7.5 kW", "0.42 ohm", "open", ">5 Gohm", "161-193 uF".

``parse_value`` keeps the text, and gives the number in the inner unit of its
dimension (``calc.quantities.INNER_UNIT``) with the worth of the last digit typed.
What can be read in two ways is refused with both ways named.
"""

from __future__ import annotations

import math
import re
import unicodedata
from fractions import Fraction
from functools import cache
from typing import Final, NamedTuple

from calc.errors import PlatesideError, clip
from calc.lookup import rows
from calc.sheet import Value
from calc.units import Unit, dimension_of, find_unit, usual_units

MAX_VALUE_LENGTH: Final = 60
MAX_EXPONENT: Final = 30

_FRACTIONS: Final = {
    "½": "1/2",
    "¼": "1/4",
    "¾": "3/4",
    "⅓": "1/3",
    "⅔": "2/3",
    "⅛": "1/8",
    "⅙": "1/6",
    "⅕": "1/5",
}
_NUMBER: Final = r"[0-9]+(?:[.,][0-9]+)*[.]?|[.,][0-9]+"
_ONE: Final = re.compile(
    rf"(?P<sign>[+-]?)\s*(?P<digits>{_NUMBER})(?P<exp>[eE][+-]?[0-9]+)?\s*(?P<unit>[^0-9\s.,+-].*)?"
)
_GROUPED: Final = re.compile(r"(?<![0-9.,])([0-9]{1,3})((?: [0-9]{3})+)(?![0-9])")
_FRACTION: Final = re.compile(
    r"(?:(?P<whole>[0-9]{1,3})(?: |-| - )?)??(?P<top>[0-9]{1,2})/(?P<bottom>[0-9]{1,2})\s*(?P<unit>\D.*)"
)
_RANGE: Final = re.compile(
    rf"(?P<low>{_NUMBER})\s*(?P<low_unit>[^0-9\s.,+-][^0-9+-]*?)?\s*(?:-|to|\.\.\.?)\s*(?P<high>[0-9.,]+.*)"
)
_LIMIT: Final = re.compile(r"(?P<sign>>=?|<=?|≥|≤)\s*(?P<rest>.+)")
_OPEN: Final = re.compile(r"(?:open(?: circuit)?|o\.?/?l\.?|0l|∞)(?:\s*[a-zΩ]+)?", re.IGNORECASE)


class Dimension(NamedTuple):
    """What a value of one dimension is called, and how far it can go in the inner unit."""

    called: str
    example: str
    lowest: float
    highest: float
    bare: bool


@cache
def dimension_facts(dimension: str) -> Dimension:
    """Return what ``tables/dimensions.csv`` says of a dimension."""
    row = next(row for row in rows("dimensions") if row["dimension"] == dimension)
    return Dimension(
        row["called"], row["example"], float(row["lowest"]), float(row["highest"]), row["bare"] == "yes"
    )


class ValueTextError(PlatesideError, ValueError):
    """A text is no value of the wanted dimension: ``given`` was typed, ``allowed`` says what to write."""

    def __init__(self, given: str, allowed: str) -> None:
        self.given = clip(given)
        self.allowed = allowed
        super().__init__(f"{self.given}: {allowed}")


def parse_value(text: str, *, dimension: str) -> Value:
    """Read one value with its unit.

    Parameters
    ----------
    text : str
        As typed. A decimal comma is understood where it can be nothing else.
    dimension : str
        A key of ``calc.quantities.INNER_UNIT``.

    Returns
    -------
    Value
        Number and resolution in the inner unit of the dimension; ``inf`` for open.

    Raises
    ------
    ValueTextError
        If the text is no value of that dimension, has no unit where one is needed,
        can be read in two ways, or lies beyond any plate or meter.

    Examples
    --------
    >>> parse_value("350 Mohm", dimension="resistance").number
    350000000.0
    >>> parse_value("0.42 ohm", dimension="resistance").resolution
    0.01

    """
    if len(text) > MAX_VALUE_LENGTH:
        raise ValueTextError(text, f"{_wanted(dimension)}, in at most {MAX_VALUE_LENGTH} characters")
    clean = _clean(text)
    if not clean:
        raise ValueTextError(text, f"{_wanted(dimension)}; leave the field out where it was not read")
    if _OPEN.fullmatch(clean):
        return _open(text, dimension)
    if limit := _LIMIT.fullmatch(clean):
        value = _number(limit["rest"], text, dimension)
        return _rebuilt(value, text, "above" if limit["sign"] in ">=≥" else "below")
    if dimension == "power" and (fraction := _FRACTION.fullmatch(clean)):
        return _fraction(fraction, text, dimension)
    if (span := _RANGE.fullmatch(clean)) and not _is_one(clean, dimension):
        return _range(span, text, dimension)
    return _number(clean, text, dimension)


MISSING: Final = Value(text="", number=math.nan, kind="missing")


def _clean(text: str) -> str:
    """Unify spaces, signs and fractions; join digits that are grouped by spaces."""
    for sign, spelled in _FRACTIONS.items():
        text = text.replace(sign, f" {spelled}")
    text = unicodedata.normalize("NFKC", text)
    for dash in "‐‑‒–—−":
        text = text.replace(dash, "-")
    text = re.sub(r" 1/(?=min|h\b|s\b)", " /", " ".join(text.split()))
    return _GROUPED.sub(lambda found: found[1] + found[2].replace(" ", ""), text)


def _is_one(clean: str, dimension: str) -> bool:
    """Whether a text is one number with a unit: 1e-3 A is no range, and min-1 no end of one."""
    found = _ONE.fullmatch(clean)
    return found is not None and (
        not found["unit"] or find_unit(found["unit"], dimension=dimension) is not None
    )


def _open(text: str, dimension: str) -> Value:
    if dimension != "resistance":
        beyond = f"beyond the meter: write its range, such as >{dimension_facts(dimension).example}"
        raise ValueTextError(text, f"{_wanted(dimension)}; only a resistance can be open ({beyond})")
    return Value(text=text.strip(), number=math.inf, unit="ohm", kind="open")


def _rebuilt(value: Value, text: str, kind: str, high: float | None = None) -> Value:
    return Value(
        text=text.strip(), number=value.number, unit=value.unit, resolution=value.resolution,
        kind=kind, high=high,  # type: ignore[arg-type]
    )  # fmt: skip


def _fraction(found: re.Match[str], text: str, dimension: str) -> Value:
    unit = _unit(found["unit"], text, dimension)
    if int(found["bottom"]) == 0:
        raise ValueTextError(text, _wanted(dimension))
    number = int(found["whole"] or 0) + Fraction(int(found["top"]), int(found["bottom"]))
    return Value(text=text.strip(), number=_inner(number, unit, text, dimension), unit=unit.name)


def _range(found: re.Match[str], text: str, dimension: str) -> Value:
    high = _number(found["high"], text, dimension)
    low = _number(f"{found['low']} {found['low_unit'] or high.unit}", text, dimension)
    if not low.number < high.number:
        raise ValueTextError(text, "a range from the lower to the higher value, such as 161-193 uF")
    return _rebuilt(low, text, "range", high.number)


def _number(clean: str, text: str, dimension: str) -> Value:
    """Read "number unit" and nothing else."""
    found = _ONE.fullmatch(clean)
    if found is None:
        raise ValueTextError(text, _why_no_number(clean, dimension))
    unit = _unit(found["unit"] or "", text, dimension)
    digits = _decimal_point(found["digits"], text, f" {unit.name}".rstrip())
    exponent = int((found["exp"] or "e0")[1:])
    if abs(exponent) > MAX_EXPONENT:
        raise ValueTextError(text, f"{_wanted(dimension)}; this one is beyond any plate or meter")
    number = Fraction(found["sign"] + digits.rstrip(".") + (found["exp"] or ""))
    if number < 0 and dimension_facts(dimension).lowest == 0:
        raise ValueTextError(text, f"{_wanted(dimension)}, zero or more")
    if dimension == "count" and number.denominator != 1:
        raise ValueTextError(text, "a whole number")
    step = unit.factor * Fraction(10) ** (exponent - len(digits.partition(".")[2]))
    inner = _inner(number, unit, text, dimension)
    return Value(text=text.strip(), number=inner, unit=unit.name, resolution=float(step))


def _inner(number: Fraction, unit: Unit, text: str, dimension: str) -> float:
    """Convert exactly, and refuse what no plate or meter shows."""
    inner = float(number * unit.factor + unit.offset)
    facts = dimension_facts(dimension)
    if not facts.lowest <= inner <= facts.highest:
        raise ValueTextError(text, f"{_wanted(dimension)}; this one is beyond any plate or meter")
    return inner


def _unit(word: str, text: str, dimension: str) -> Unit:
    """Return the unit that stands behind a number, or say what is wrong with it."""
    word = word.strip()
    if not word and dimension_facts(dimension).bare:
        word = "1/h" if dimension == "rate" else ""
    elif not word:
        raise ValueTextError(text, f"the unit is missing: {_wanted(dimension)}")
    unit = find_unit(word, dimension=dimension)
    if unit is None:
        raise ValueTextError(text, _why_no_unit(word, dimension))
    return unit


def _why_no_unit(word: str, dimension: str) -> str:
    other = dimension_of(word)
    if other == "apparent_power":
        return f"{_wanted(dimension)}; {clip(word)} is apparent power, not output"
    if other is not None and other != dimension:
        return f"{_wanted(dimension)}; {clip(word)} is the unit of {dimension_facts(other).called}"
    if "/" in word or any(c.isdigit() for c in word):
        return f"one value: {_wanted(dimension)} (several ratings go under ratings, three values into a list)"
    return f"{_wanted(dimension)}; {clip(word)} is no unit that Plateside knows"


def _why_no_number(clean: str, dimension: str) -> str:
    if re.match(r"[+-]?\.?(nan|inf)", clean, re.IGNORECASE):
        return f"{_wanted(dimension)}; not a number (an open circuit is written open, a value not read null)"
    return _wanted(dimension)


def _wanted(dimension: str) -> str:
    facts = dimension_facts(dimension)
    units = [name for name in usual_units(dimension)[:5] if name]
    choice = f" ({', '.join(units)})" if len(units) > 1 else ""
    return f"{facts.called} such as {facts.example}{choice}"


def _decimal_point(digits: str, text: str, unit: str) -> str:
    """Return the digits with a decimal point, or refuse where a comma can be read in two ways."""
    if "," not in digits:
        if digits.count(".") < 2:
            return digits
        return _ungrouped(digits, ".", text)
    whole, _, rest = digits.rpartition(",")
    if "." in digits:
        if digits.rindex(".") > digits.rindex(","):  # 1,455.0
            head, _, tail = digits.rpartition(".")
            return f"{_ungrouped(head, ',', text)}.{tail}"
        return f"{_ungrouped(whole, '.', text)}.{rest}"  # 1.455,0
    if "," in whole:  # 1,455,000
        return _ungrouped(digits, ",", text)
    if len(rest) == 3 and whole not in {"", "0"} and len(whole) <= 3 and whole[0] != "0":
        meanings = f"{digits} can be {whole}{rest}{unit} or {whole}.{rest}{unit}"
        raise ValueTextError(text, f"{meanings}: write it without the comma, or with a decimal point")
    return f"{whole or '0'}.{rest}"


def _ungrouped(digits: str, mark: str, text: str) -> str:
    """Take thousands marks out of a number whose groups are all of three digits."""
    groups = digits.split(mark)
    if len(groups) > 1 and not (1 <= len(groups[0]) <= 3 and all(len(group) == 3 for group in groups[1:])):
        raise ValueTextError(text, "one number, with one decimal point")
    return "".join(groups)
