"""What the tests of commands share."""

import io
from pathlib import Path
from typing import NamedTuple

import pytest

from casebook.book import open_casebook
from rules.loading import load_knowledge
from tui.cli import main
from tui.drafts import Drafts

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


@pytest.fixture(scope="session")
def knowledge():
    """The shipped rules, loaded once."""
    return load_knowledge()


@pytest.fixture
def book(casebook):
    """That casebook, open."""
    with open_casebook(casebook) as opened:
        yield opened


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


@pytest.fixture
def talk(run, monkeypatch):
    """Hold a visit with typed lines; the input ends after the last."""

    def talk_it(*lines):
        monkeypatch.setattr("sys.stdin", io.StringIO("".join(f"{line}\n" for line in lines)))
        return run("--plain")

    return talk_it


@pytest.fixture
def known(run, sheet):
    """A casebook that knows the wash-water pump."""
    run("log", sheet("pump_overload"), "--person", "Ines")


@pytest.fixture
def kit(casebook):
    """A kit that was asked for on an earlier visit."""
    carried = ["multimeter", "clamp_meter", "insulation_tester", "tachometer"]
    Drafts(casebook).remember("kit", carried)
    return carried
