"""The one line that is typed into takes pastes as data."""

from pathlib import Path

from hypothesis import given
from hypothesis import strategies as st
from textual.events import Key, Paste

from tests.tui.helpers import SMALL, new_app, screen_text, until
from tui.harmless import width
from tui.widgets.ruled import cut
from tui.widgets.typed import LONGEST, TypedLine


async def pasted(folder: Path, *pastes: str) -> tuple[str, str]:
    """Paste into the search line; return what stands in it, and the screen."""
    app = new_app(folder)
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "No case yet")
        await pilot.press("f3")
        for text in pastes:
            app.post_message(Paste(text))
            await pilot.pause()
        return app.screen.query_one(TypedLine).value, screen_text(app)


async def test_nothing_pasted_steers_the_terminal(tmp_path: Path):
    value, screen = await pasted(tmp_path, "a\x1b]0;t\x07b\x9b31m\u202ec\u200bd\x00e")
    assert value == "a ]0;t b 31m c d e"
    assert not {"\x1b", "\x07", "\x9b", "\u202e", "\u200b"} & set(screen)


async def test_several_lines_are_pasted_as_one(tmp_path: Path):
    value, _ = await pasted(tmp_path, "15.2\r\n15.9\n14.8\n", " A")
    assert value == "15.2 15.9 14.8 A"


async def test_a_paste_of_ten_megabytes_is_cut_to_what_a_line_takes(tmp_path: Path):
    value, _ = await pasted(tmp_path, "x" * 10_000_000, "y")
    assert value == "x" * LONGEST


@given(st.text(alphabet="ab技é\u0301ｗ ", max_size=30), st.integers(-2, 20))
def test_a_cut_text_is_the_longest_beginning_that_fits(text: str, room: int):
    fitting = [text[:length] for length in range(len(text) + 1) if width(text[:length]) <= room]
    assert width(cut(text, room)) <= max(room, 0)
    assert text.startswith(cut(text, room))
    if fitting:
        assert width(cut(text, room)) == max(map(width, fitting))


async def test_a_long_text_in_the_line_narrows_a_list_at_once(tmp_path: Path):
    app = new_app(tmp_path)
    async with app.run_test(size=SMALL) as pilot:
        await until(pilot, "No case yet")
        await pilot.press("n")
        await until(pilot, "Which machine")
        app.post_message(Paste("技" * LONGEST))
        for _ in range(300):
            app.post_message(Key("backspace", None))
        await until(pilot, "技技技")
        await pilot.press("f9")
        await until(pilot, "No case yet")
