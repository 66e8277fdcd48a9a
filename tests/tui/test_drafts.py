"""Drafts: what was typed and not entered is there again, for its owner only."""

import os
import stat
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tui.drafts import Drafts


@pytest.fixture
def drafts(tmp_path):
    return Drafts(tmp_path / "casebook.db")


def test_a_draft_comes_back_as_it_was_typed(drafts):
    drafts.save("case-7", {"typed": "15.2 15.9 Ω", "case": "x"})
    assert Drafts(drafts.folder.with_name("casebook.db")).load("case-7") == {
        "typed": "15.2 15.9 Ω",
        "case": "x",
    }


def test_an_empty_draft_leaves_nothing_behind(drafts):
    drafts.save("case-7", {"typed": "1"})
    drafts.save("case-7", {"typed": ""})
    assert drafts.names() == []


@pytest.mark.skipif(os.name == "nt", reason="modes are a matter of POSIX")
def test_only_the_owner_may_read_a_draft(drafts):
    drafts.save("case-7", {"typed": "1"})
    (path,) = drafts.folder.glob("*.json")
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    assert stat.S_IMODE(drafts.folder.stat().st_mode) == 0o700


def test_a_damaged_draft_is_no_draft(drafts):
    drafts.save("case-7", {"typed": "1"})
    (path,) = drafts.folder.glob("*.json")
    path.write_text("{ not JSON")
    assert drafts.load("case-7") == {}


@given(st.text(min_size=1, max_size=60))
def test_the_name_of_a_draft_never_leads_out_of_its_folder(name):
    drafts = Drafts(Path("/somewhere/casebook.db"))
    assert drafts._path(name).resolve().parent == drafts.folder.resolve()


def test_the_kit_is_remembered(drafts):
    drafts.remember("kit", ["multimeter"])
    drafts.remember("person", "Ines")
    assert drafts.recall("kit") == ["multimeter"]
    assert drafts.names() == []
