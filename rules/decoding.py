"""Decode plain data into the types of ``knowledge.py``, and name every fault of form.

The quick road is one ``msgspec.convert``. Only where that refuses is the data
walked beside the type, so that all problems of an entry are found, not the first.
"""

from __future__ import annotations

import difflib
import math
from collections.abc import Iterable, Iterator
from typing import TypeAlias, TypeVar

import msgspec
from msgspec import inspect

from calc.safe_yaml import Step

T = TypeVar("T")

Steps: TypeAlias = tuple[Step, ...]
"""Where a part stands inside an entry: ``("bands", 1, "verdict")``."""

_WORDS = {"yes": "true", "on": "true", "no": "false", "off": "false"}


class Mistake(msgspec.Struct, frozen=True):
    """One thing that is wrong inside an entry: where, what was given, what is allowed."""

    path: Steps
    given: str
    allowed: str


def decode(plain: object, kind: type[T]) -> tuple[T | None, list[Mistake]]:
    """Return the entry, or None and everything that keeps it from being one."""
    try:
        return msgspec.convert(_plain_bools(plain, inspect.type_info(kind)), kind, strict=False), []
    except msgspec.ValidationError as error:
        mistakes = list(_walk(plain, inspect.type_info(kind), ()))
        return None, mistakes or [Mistake((), "", str(error))]


def did_you_mean(given: str, allowed: Iterable[str]) -> str:
    """Return the sentence on what is allowed: the nearest word, or all of them where they are few."""
    words = sorted(allowed)
    near = difflib.get_close_matches(given, words, n=1, cutoff=0.6)
    if near:
        return f"did you mean {near[0]}?"
    return f"allowed: {', '.join(words)}" if len(words) <= 12 else "no such word in the vocabulary"


def _plain_bools(plain: object, info: inspect.Type) -> object:
    """Turn yes and no into true and false, only where the type asks for a truth value."""
    if isinstance(info, inspect.BoolType):
        return _WORDS.get(plain.lower(), plain) if isinstance(plain, str) else plain
    if isinstance(info, inspect.StructType) and isinstance(plain, dict):
        types = {field.encode_name: field.type for field in info.fields}
        return {k: _plain_bools(v, types[k]) if k in types else v for k, v in plain.items()}
    if isinstance(info, inspect.VarTupleType) and isinstance(plain, list):
        return [_plain_bools(part, info.item_type) for part in plain]
    if isinstance(info, inspect.DictType) and isinstance(plain, dict):
        return {k: _plain_bools(v, info.value_type) for k, v in plain.items()}
    return plain


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
    try:
        return math.isfinite(float(plain))
    except ValueError:
        return False


def _none(info: inspect.Type) -> bool:
    return isinstance(info, inspect.NoneType)


def _show(plain: object) -> str:
    if plain is None:
        return "nothing"
    if isinstance(plain, dict):
        return "a mapping"
    return "a list" if isinstance(plain, list) else str(plain)[:80]
