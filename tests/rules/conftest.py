"""What the tests of rules share."""

import pytest

from rules.knowledge import Knowledge

from .makers import shipped


@pytest.fixture(scope="session")
def knowledge() -> Knowledge:
    """The shipped rules."""
    return shipped()


@pytest.fixture(autouse=True)
def own_cache(tmp_path, monkeypatch):
    """A cache folder of its own for every test."""
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "cache"))
