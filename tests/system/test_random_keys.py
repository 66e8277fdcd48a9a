"""Random keys for minutes: the program lives, leaves only by its own key, and harms nothing.

``PLATESIDE_FUZZ_S`` sets the seconds of each run, ``PLATESIDE_FUZZ_SEED`` the seed.
"""

from __future__ import annotations

import os
import shutil
import sqlite3
from collections.abc import Iterator
from pathlib import Path

import pytest

from casebook.book import open_casebook
from rules.loading import load_knowledge
from tests.system.monkey import Monkey, PlainMonkey
from tests.tui.helpers import remember
from tui.demo.build import build

SHORT_S, LONG_S = 20.0, 600.0
SEED = int(os.environ.get("PLATESIDE_FUZZ_SEED", "7"))
MOST_MB = 300


def seconds(usual: float) -> float:
    """Return how long a run lasts."""
    return float(os.environ.get("PLATESIDE_FUZZ_S", usual))


@pytest.fixture(scope="module")
def plant(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The casebook of the invented plant, built once."""
    path = tmp_path_factory.mktemp("plant") / "plant.db"
    build(path, load_knowledge())
    return path


@pytest.fixture
def home(tmp_path: Path, plant: Path) -> Iterator[Path]:
    """A home with that casebook; the technician is known."""
    home = tmp_path / "home"
    (home / "tmp").mkdir(parents=True)
    shutil.copyfile(plant, home / "plant.db")
    remember(home / "plant.db")
    yield home


def survives(home: Path, *, usual_s: float, kind: type[Monkey] = Monkey) -> None:
    """Type for a while; then see that nothing was harmed."""
    casebook = home / "plant.db"
    with open_casebook(casebook) as book:
        before = {entry.id: entry for entry in book.store.all_entries()}
    monkey = kind(home, casebook, seed=SEED)
    try:
        outcome = monkey.run(seconds(usual_s))
    finally:
        monkey.kill()
    print(f"seed {SEED}: {outcome}")
    mishaps = list(home.rglob("mishaps.log"))
    assert not mishaps, mishaps[0].read_text(encoding="utf-8")
    outside = monkey.log.read_text(encoding="utf-8", errors="replace") if monkey.log.exists() else ""
    assert outside == ""
    assert outcome.peak_mb < MOST_MB
    with open_casebook(casebook) as book:
        after = {entry.id: entry for entry in book.store.all_entries()}
        assert {name: after.get(name) for name in before} == before
        for row in book.cases(limit=100_000):
            assert book.case(row.id).lines
    connection = sqlite3.connect(casebook)
    assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    connection.close()


@pytest.mark.system
def test_random_keys_for_a_short_while_harm_nothing(home: Path):
    survives(home, usual_s=SHORT_S)


@pytest.mark.long
def test_random_keys_for_ten_minutes_harm_nothing(home: Path):
    survives(home, usual_s=LONG_S)


@pytest.mark.system
def test_random_answers_to_plain_questions_for_a_short_while_harm_nothing(home: Path):
    survives(home, usual_s=SHORT_S, kind=PlainMonkey)


@pytest.mark.long
def test_random_answers_to_plain_questions_for_minutes_harm_nothing(home: Path):
    survives(home, usual_s=LONG_S / 4, kind=PlainMonkey)
