"""What typed words find: beginnings, other words, one slip of the keys; never another machine."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rules.loading import load_knowledge
from tests.tui.helpers import SMALL, keys, known_machine, new_app, settled, until
from tests.tui.visit import to_complaint
from tui.screens.pick import Choice, Pick
from tui.searching import begins, found, nearly_begins

COMPLAINTS = load_knowledge().complaints
LETTERS = "abcdefghijklmnopqrstuvwxyz"


@pytest.mark.parametrize("typed", ["overload", "trips overlod", "trip relay", "tripps overload", "oevrload"])
def test_words_of_the_trade_find_the_complaints_that_they_mean(typed: str):
    names = [(one.id, f"{one.id} {one.name} {' '.join(one.also)}") for one in COMPLAINTS.values()]
    assert set(found(typed, names)) == {"trips_at_start", "trips_under_load"}


@pytest.mark.parametrize("complaint", COMPLAINTS)
def test_every_other_word_of_a_complaint_finds_it(complaint: str):
    one = COMPLAINTS[complaint]
    assert one.also
    names = [(c.id, f"{c.id} {c.name} {' '.join(c.also)}") for c in COMPLAINTS.values()]
    assert all(complaint in found(words, names) for words in one.also)


@given(st.text(LETTERS, min_size=4, max_size=12), st.data())
def test_one_letter_wrong_missing_too_many_or_swapped_is_forgiven(word: str, data: st.DataObject):
    at = data.draw(st.integers(0, len(word) - 1))
    letter = data.draw(st.sampled_from(LETTERS))
    slips = [word[:at] + letter + word[at:], word[:at] + letter + word[at + 1 :]]
    slips += [word[:at] + word[at + 1 :]] if len(word) > 4 else []
    slips += [word[:at] + word[at : at + 2][::-1] + word[at + 2 :]]
    assert all(nearly_begins([slip], f"runs, {word}") for slip in slips)


@pytest.mark.parametrize("typed", ["ovarloat", "oload", "zzzz", "hpt"])
def test_two_slips_or_one_in_a_short_word_are_not_forgiven(typed: str):
    assert not nearly_begins([typed], "overload hot")


def test_what_is_found_as_typed_is_not_mixed_with_what_is_nearly_so():
    assert found("starts", [("a", "starts slowly"), ("b", "smarts")]) == ["a"]
    assert begins(["star"], "starts slowly")


def test_a_line_without_other_words_forgives_no_slip_since_a_tag_nearly_alike_is_another_machine():
    assert not Choice("P-104", "P-104 pump").nearly_matches(["p 105", "pumq"])
    assert Choice("runs_hot", "runs hot", also="overheats").nearly_matches(["overhaets"])


@pytest.mark.parametrize("typed", ["overload", "trips overlod"])
async def test_the_complaint_list_shows_what_other_words_and_a_slip_find(tmp_path: Path, typed: str):
    app = known_machine(new_app(tmp_path))
    async with app.run_test(size=SMALL) as pilot:
        await to_complaint(pilot)
        await keys(pilot, *typed)
        await until(pilot, f"type {typed}")
        await settled(pilot)
        page = app.screen
        assert isinstance(page, Pick)
        assert {choice.key for choice in page.shown} == {"trips_at_start", "trips_under_load"}
