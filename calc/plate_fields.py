"""Fields of a nameplate out of plain data: single values, letters, and the rating in use."""

from __future__ import annotations

from typing import Any

from calc import vocabulary as words
from calc.errors import clip
from calc.fields import Fields
from calc.sheet import Supply, Value


def single(fields: Fields, name: str, dimension: str) -> Value | None:
    """Return a plate or context value: exact, or a range where plates print one."""
    value = fields.value(name, dimension)
    if value is None or value.kind == "exact" or (value.kind == "range" and name in words.RANGE_FIELDS):
        return value
    fields.wrong(
        name,
        clip(value.text),
        "one value; of several on the plate write the one in use, the others under ratings",
    )
    return None


def letter(fields: Fields, name: str, allowed: tuple[str, ...]) -> str | None:
    """Return a letter of the plate, in capitals."""
    found = fields.text(name, longest=16)
    if found is None or found.strip().upper() in allowed:
        return found if found is None else found.strip().upper()
    fields.wrong(name, clip(found), f"one of {', '.join(allowed)}")
    return None


def insulation_class(fields: Fields) -> str | None:
    """Return the class letter of "F", "155" or "155 (F)"."""
    found = fields.text("insulation_class", longest=16)
    if found is None:
        return None
    parts = found.upper().replace("(", " ").replace(")", " ").split()
    letters = {
        name
        for name, degrees in words.INSULATION_CLASSES.items()
        for part in parts
        if part in {name, degrees}
    }
    if len(letters) == 1:
        return letters.pop()
    fields.wrong("insulation_class", clip(found), f"one of {', '.join(words.INSULATION_CLASSES)}")
    return None


def fill_rating_in_use(fields: Fields, found: dict[str, Any], supply: Supply) -> None:
    """Put the values of the rating in use into the plate's own fields."""
    in_use = found["in_use"] or found["voltage"]
    if in_use is None and len(found["ratings"]) > 1:
        in_use = supply.nominal_voltage
    fitting = [r for r in found["ratings"] if in_use is None or (r.voltage and _near(r.voltage, in_use))]
    if len(fitting) > 1 and (wanted := found["frequency"] or supply.nominal_frequency):
        fitting = [r for r in fitting if r.frequency is None or _near(r.frequency, wanted)]
    if len(fitting) != 1:
        voltages = " or ".join(r.voltage.text for r in found["ratings"] if r.voltage)
        fields.wrong("in_use", in_use.text if in_use else "nothing", f"the rating in use: {voltages}")
        return
    for name in words.RATING_FIELDS:
        value, own = getattr(fitting[0], name), found[name]
        if own is None:
            found[name] = value
        elif value is not None and _differ(value, own):
            given = own if isinstance(own, str) else own.text
            other = value if isinstance(value, str) else value.text
            fields.wrong(
                name, clip(given), f"{other} as the rating in use says, or no {name} outside ratings"
            )


def _near(one: Value, other: Value) -> bool:
    return abs(one.number - other.number) <= 0.01 * abs(other.number)


def _differ(one: Value | str, other: Value | str) -> bool:
    if isinstance(one, str) or isinstance(other, str):
        return one != other
    return not _near(one, other)
