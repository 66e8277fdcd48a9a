"""Decode plain data into the types of ``knowledge.py``, and name every fault of form.

The quick road is one ``msgspec.convert``. Only where that refuses is the data
walked beside the type, so that all problems of an entry are found, not the first.
"""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Callable, Iterable, Iterator
from itertools import islice
from typing import Final, TypeAlias, TypeVar

import msgspec
from msgspec import inspect

from calc.safe_yaml import Step

T = TypeVar("T")

Steps: TypeAlias = tuple[Step, ...]
"""Where a part stands inside an entry: ``("bands", 1, "verdict")``."""

_ANY = inspect.AnyType()
_NUMBER = re.compile(r"[+-]?(0|[1-9][0-9]*)(\.[0-9]+)?([eE][+-]?[0-9]+)?")
_WORDS = {"yes": "true", "on": "true", "no": "false", "off": "false"}


MOST_MISTAKES: Final = 50
"""Mistakes of one entry that are told."""


class Mistake(msgspec.Struct, frozen=True):
    """One thing that is wrong inside an entry: where, what was given, what is allowed."""

    path: Steps
    given: str
    allowed: str


def decode(plain: object, kind: type[T]) -> tuple[T | None, list[Mistake]]:
    """Return the entry, or None and everything that keeps it from being one."""
    try:
        return msgspec.convert(_prepared(plain, _info(kind)), kind, strict=False), []
    except msgspec.ValidationError as error:
        mistakes = list(islice(_walk(plain, _info(kind), ()), MOST_MISTAKES))
        return None, mistakes or [Mistake((), "", str(error))]


def did_you_mean(given: str, allowed: Iterable[str]) -> str:
    """Return the sentence on what is allowed: the nearest word, or all of them where they are few."""
    words = sorted(allowed)
    near = difflib.get_close_matches(given, words, n=1, cutoff=0.6)
    if near:
        return f"did you mean {near[0]}?"
    return f"allowed: {', '.join(words)}" if len(words) <= 12 else "no such word in the vocabulary"


_INFO: dict[type, inspect.Type] = {}


def _info(kind: type) -> inspect.Type:
    """Return what msgspec knows of a type, looked at once."""
    if kind not in _INFO:
        _INFO[kind] = inspect.type_info(kind)
    return _INFO[kind]


def _prepared(plain: object, info: inspect.Type) -> object:
    """Turn yes and no into true and false where a truth value is asked for, and nan into no number."""
    if isinstance(info, inspect.UnionType):
        info = next(choice for choice in info.types if not _none(choice))
    if isinstance(plain, str):
        if isinstance(info, inspect.BoolType):
            return _WORDS.get(plain.lower(), plain)
        return "no number" if isinstance(info, inspect.FloatType) and not _is_finite(plain) else plain
    if isinstance(plain, dict):
        part = _part_of(info)
        return {key: _prepared(value, part(key)) for key, value in plain.items()}
    if isinstance(plain, list):
        part = _part_of(info)
        return [_prepared(value, part(index)) for index, value in enumerate(plain)]
    return plain


def _part_of(info: inspect.Type) -> Callable[[Step], inspect.Type]:
    """Return a look-up of the types of the parts of a mapping or list; any where there is no such part."""
    types: dict[Step, inspect.Type] = {}
    other: inspect.Type = _ANY
    if isinstance(info, inspect.StructType):
        types = {field.encode_name: field.type for field in info.fields}
    elif isinstance(info, inspect.DictType):
        other = info.value_type
    elif isinstance(info, inspect.VarTupleType):
        other = info.item_type
    elif isinstance(info, inspect.TupleType):
        types = dict(enumerate(info.item_types))
    return lambda step: types.get(step, other)


def _walk(plain: object, info: inspect.Type, path: Steps) -> Iterator[Mistake]:
    """Yield every mistake in plain data beside its type."""
    if isinstance(info, inspect.StructType):
        yield from _walk_struct(plain, info, path)
    elif isinstance(info, inspect.DictType):
        if not isinstance(plain, dict):
            yield Mistake(path, _show(plain), "a mapping of names to values")
            return
        for key, value in plain.items():
            yield from _walk(value, info.value_type, (*path, key))
    elif isinstance(info, inspect.VarTupleType | inspect.TupleType):
        yield from _walk_tuple(plain, info, path)
    else:
        yield from _walk_scalar(plain, info, path)


def _walk_struct(plain: object, info: inspect.StructType, path: Steps) -> Iterator[Mistake]:
    if not isinstance(plain, dict):
        yield Mistake(path, _show(plain), "a mapping of fields")
        return
    fields = {field.encode_name: field for field in info.fields}
    for key, value in plain.items():
        if key not in fields:
            yield Mistake((*path, key), "unknown field", did_you_mean(key, fields))
        else:
            yield from _walk(value, fields[key].type, (*path, key))
    for name, field in fields.items():
        if field.required and name not in plain:
            yield Mistake((*path, name), "missing", "it must be given")


def _walk_tuple(
    plain: object, info: inspect.VarTupleType | inspect.TupleType, path: Steps
) -> Iterator[Mistake]:
    if not isinstance(plain, list):
        yield Mistake(path, _show(plain), "a list")
        return
    if isinstance(info, inspect.VarTupleType):
        types: tuple[inspect.Type, ...] = (info.item_type,) * len(plain)
    else:
        types = info.item_types
        if len(plain) != len(types):
            yield Mistake(path, f"{len(plain)} values", f"a list of {len(types)} values")
            return
    for index, (part, kind) in enumerate(zip(plain, types, strict=True)):
        yield from _walk(part, kind, (*path, index))


def _walk_scalar(plain: object, info: inspect.Type, path: Steps) -> Iterator[Mistake]:
    if isinstance(info, inspect.AnyType):
        return
    if isinstance(info, inspect.UnionType):
        choices = [list(_walk(plain, choice, path)) for choice in info.types]
        if all(choices):
            yield next(found for found, choice in zip(choices, info.types, strict=True) if not _none(choice))[
                0
            ]
        return
    if isinstance(info, inspect.LiteralType):
        words = [str(value) for value in info.values]
        if plain not in words:
            yield Mistake(path, _show(plain), did_you_mean(str(plain), words))
    elif not _is_a(plain, info):
        yield Mistake(path, _show(plain), _NAMES.get(type(info), "another type"))


_NAMES: dict[type[inspect.Type], str] = {
    inspect.FloatType: "it must be a number",
    inspect.IntType: "it must be a whole number",
    inspect.BoolType: "it must be yes or no",
    inspect.StrType: "it must be text",
}


def _is_a(plain: object, info: inspect.Type) -> bool:
    """Whether a scalar fits: text must spell a finite number, a truth value, or be text."""
    if isinstance(info, inspect.NoneType) or not isinstance(plain, str):
        return isinstance(info, inspect.NoneType) and plain is None
    if isinstance(info, inspect.BoolType):
        return plain.lower() in {*_WORDS, "true", "false"}
    if isinstance(info, inspect.IntType):
        return plain.lstrip("+-").isdigit()
    return isinstance(info, inspect.StrType) or _is_finite(plain)


def _is_finite(plain: str) -> bool:
    """Whether a text spells a finite number, without a leading zero that might mean octal."""
    return _NUMBER.fullmatch(plain) is not None and math.isfinite(float(plain))


def _none(info: inspect.Type) -> bool:
    return isinstance(info, inspect.NoneType)


def _show(plain: object) -> str:
    if plain is None:
        return "nothing"
    if isinstance(plain, dict):
        return "a mapping"
    return "a list" if isinstance(plain, list) else str(plain)[:80]
