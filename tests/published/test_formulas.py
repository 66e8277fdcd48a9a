"""Formulas of calc/ against published values, which stand in ``data/formulas.yaml``."""

from importlib import import_module

import numpy as np
import pytest

from tests.published.sources import entries, of_entry


def function(name):
    module, _, attribute = name.rpartition(".")
    return getattr(import_module(module), attribute)


def argument(value):
    return np.array(value, dtype=np.float64) if isinstance(value, list) else value


def result(entry):
    """What the function says: of several results the one that "take" counts, of phasors the modulus."""
    found = function(entry["call"])(**{name: argument(value) for name, value in entry["given"].items()})
    found = found[entry["take"]] if "take" in entry else found
    return np.abs(found) if entry.get("part") == "modulus" else found


FORMULAS = [
    pytest.param(entry, marks=of_entry(entry, entry["call"]), id=f"{entry['call']}: {entry['says']}")
    for entry in entries("formulas")
]


@pytest.mark.parametrize("entry", FORMULAS)
def test_a_formula_gives_the_published_value(entry):
    found = result(entry)
    if "between" in entry:
        low, high = entry["between"]
        assert low <= found <= high
    elif "within" in entry:
        assert np.ravel(found) == pytest.approx(np.ravel(entry["gives"]), abs=entry["within"], rel=0.0)
    else:
        assert found == entry["gives"]
