"""The cell-diffing driver: the same picture as without it, in fewer bytes."""

import pyte
from hypothesis import given, settings
from hypothesis import strategies as st

from tui.driver import Cells

SIZE = (20, 6)
STYLES = ["", "1", "7", "1;31", "39;49", "0"]


def screen_after(*writes: str) -> list[tuple[object, ...]]:
    """What a terminal shows after the writes: pyte is the outside witness."""
    screen = pyte.Screen(*SIZE)
    stream = pyte.Stream(screen)
    for write in writes:
        stream.feed(write.replace("\n", "\r\n"))
    return [tuple(screen.buffer[y][x] for x in range(SIZE[0])) for y in range(SIZE[1])]


@st.composite
def frames(draw: st.DrawFn) -> str:
    """A frame as Textual writes it: moves, styled runs that stay inside the line, a last move."""
    parts = []
    for _ in range(draw(st.integers(1, 5))):
        row, column = draw(st.integers(1, SIZE[1])), draw(st.integers(1, SIZE[0] - 8))
        parts.append(f"\x1b[{row};{column}H")
        for _ in range(draw(st.integers(1, 2))):
            style = draw(st.sampled_from(STYLES))
            text = draw(st.text(st.sampled_from("abΩ─ 1"), min_size=1, max_size=4))
            parts.append(f"\x1b[{style}m{text}\x1b[0m" if style else text)
    row, column = draw(st.integers(1, SIZE[1])), draw(st.integers(1, SIZE[0]))
    return "".join(parts) + f"\x1b[{row};{column}H"


@settings(max_examples=300, deadline=None)
@given(st.lists(frames(), min_size=1, max_size=6))
def test_the_difference_draws_the_same_screen_as_the_whole_frame(sequence: list[str]):
    cells = Cells()
    sent = [cells.difference(frame, SIZE) for frame in sequence]
    assert None not in sent
    assert screen_after(*[text or "" for text in sent]) == screen_after(*sequence)


@settings(max_examples=100, deadline=None)
@given(st.lists(frames(), max_size=3), st.text(st.sampled_from("abΩ─ 1"), min_size=1, max_size=12))
def test_a_frame_that_is_already_shown_costs_nothing(before: list[str], text: str):
    cells = Cells()
    last = f"\x1b[2;3H\x1b[1m{text}\x1b[0m\x1b[2;3H"
    for frame in [*before, last]:
        cells.difference(frame, SIZE)
    assert cells.difference(last, SIZE) == ""


def test_one_changed_letter_costs_one_letter_and_two_moves():
    cells = Cells()
    cells.difference("\x1b[2;3Hwinding\x1b[2;10H", SIZE)
    assert cells.difference("\x1b[2;3Hwindinx\x1b[2;10H", SIZE) == "\x1b[2;9Hx\x1b[2;10H"


def test_wide_characters_keep_their_two_cells():
    frames_ = ["\x1b[1;1H漢字\x1b[1;1H", "\x1b[1;1Hab字\x1b[1;1H", "\x1b[1;1Hab漢\x1b[1;1H"]
    cells = Cells()
    sent = [cells.difference(frame, SIZE) or "" for frame in frames_]
    assert screen_after(*sent) == screen_after(*frames_)


def test_what_cannot_be_read_is_passed_on_and_the_copy_is_forgotten():
    cells = Cells()
    cells.difference("\x1b[1;1Habc\x1b[1;1H", SIZE)
    assert cells.difference("\x1b]52;c;QQ==\x07", SIZE) is None
    assert cells.difference("\x1b[1;1Habc\x1b[1;1H", SIZE) == "\x1b[1;1Habc\x1b[1;1H"


def test_a_new_size_makes_the_next_frame_whole():
    cells = Cells()
    cells.difference("\x1b[1;1Habc\x1b[1;1H", SIZE)
    assert cells.difference("\x1b[1;1Habc\x1b[1;1H", (40, 12)) == "\x1b[1;1Habc\x1b[1;1H"
