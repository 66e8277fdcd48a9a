"""Rows of several states one after the other, so that one solution of the network serves all of them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import fields, replace
from typing import TYPE_CHECKING, TypeVar

import numpy as np

from calc.twin import Floats

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

Arrays = TypeVar("Arrays", bound="DataclassInstance")


def repeated(arrays: Arrays, count: int) -> Arrays:
    """Every array of a dataclass so many times after itself."""
    if count == 1:
        return arrays
    return replace(
        arrays,
        **{field.name: np.concatenate([getattr(arrays, field.name)] * count) for field in fields(arrays)},
    )


def part(arrays: Arrays, rows: slice) -> Arrays:
    """Some rows of every array of a dataclass."""
    return replace(arrays, **{field.name: getattr(arrays, field.name)[rows] for field in fields(arrays)})


def joined(parts: Sequence[Mapping[str, Floats]]) -> Mapping[str, Floats]:
    """The same attributes of several states one after the other."""
    if len(parts) == 1:
        return parts[0]
    names = list(parts[0])
    grid = np.concatenate([np.array([part[name] for name in names]) for part in parts], axis=1)
    return dict(zip(names, grid, strict=True))
