"""Text from files and keyboards can never steer a terminal."""

from hypothesis import given
from hypothesis import strategies as st

from tui.columns import columns, paragraph
from tui.harmless import UNSEEN, ascii_only, harmless, width


def test_an_escape_code_is_shown_as_its_code():
    assert harmless("\x1b[31mred\x07") == "\\x1b[31mred\\x07"


def test_marks_that_reverse_the_text_are_shown_as_their_code():
    assert "\u202e" not in harmless("P-\u202e401")


def test_line_ends_become_spaces():
    assert harmless("a\nb\r\tc") == "a b  c"


def test_a_long_text_is_cut_with_a_mark():
    assert harmless("retort basket hoist", limit=8) == "retort …"


@given(st.text())
def test_nothing_unseen_is_left_whatever_comes(text):
    assert not UNSEEN.search(harmless(text))


@given(st.text())
def test_ascii_is_always_ascii(text):
    assert ascii_only(harmless(text)).isascii()


def test_trade_symbols_become_words_in_ascii():
    assert ascii_only("0.4 Ω ± 2 µF at 24 °C") == "0.4 ohm +/- 2 uF at 24 deg C"


@given(st.lists(st.lists(st.text(max_size=12), min_size=3, max_size=3), min_size=1, max_size=6))
def test_columns_begin_at_the_same_cell_in_every_row(rows):
    lines = columns([[*row, "|"] for row in rows])
    assert len({width(line) for line in lines}) == 1


@given(st.text(max_size=400))
def test_a_paragraph_keeps_to_its_width(text):
    assert all(len(line) <= 60 for line in paragraph(text, first="  stop  ", width=60))
