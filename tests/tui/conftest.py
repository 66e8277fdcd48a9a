"""What the tests of commands share."""

from pathlib import Path
from typing import NamedTuple

import pytest

from tui.cli import main

SHEETS = Path(__file__).resolve().parent.parent / "sheets"


class Ran(NamedTuple):
    """What a command gave."""

    status: int
    out: str
    err: str


@pytest.fixture
def casebook(tmp_path, monkeypatch):
    """A casebook of its own; the user's is never touched."""
    path = tmp_path / "book" / "casebook.db"
    monkeypatch.setenv("PLATESIDE_CASEBOOK", str(path))
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    monkeypatch.delenv("PLATESIDE_RULES", raising=False)
    return path


@pytest.fixture
def run(capsys, casebook):
    """Run a command in this process."""

    def run_it(*argv: str) -> Ran:
        capsys.readouterr()
        status = main([str(word) for word in argv])
        out, err = capsys.readouterr()
        return Ran(status, out, err)

    return run_it


@pytest.fixture
def sheet():
    """Return the path of an example sheet by its name."""
    return lambda name: str(SHEETS / f"{name}.yaml")
