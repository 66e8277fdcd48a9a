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


def stacked(rows: Mapping[str, Floats], changes: Sequence[Mapping[str, Floats]]) -> Mapping[str, Floats]:
    """The same attributes once per state, one after the other, with what each state changes in them."""
    places = {name: place for place, name in enumerate(rows)}
    one = np.array(list(rows.values()))
    size = one.shape[1]
    grid = np.concatenate([one] * len(changes), axis=1)
    for k, changed in enumerate(changes):
        for name, values in changed.items():
            grid[places[name], k * size : (k + 1) * size] = values
    return dict(zip(rows, grid, strict=True))
