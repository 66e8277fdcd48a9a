"""The one table of keys: what terminals deliver, and nothing that a line to type would swallow."""

import pytest

from tui.keys import SCREENS, key_line, keys_of

# measured with Textual's parser and named in terminal documentation; see the module's docstring
DELIVERED = {f"f{n}" for n in range(2, 10)} | {f"ctrl+{c}" for c in "noqrtlg"}
DELIVERED |= {
    "enter",
    "escape",
    "tab",
    "up",
    "down",
    "left",
    "right",
    "pageup",
    "pagedown",
    "space",
    "slash",
    "question_mark",
}


@pytest.mark.parametrize("screen", SCREENS)
def test_every_key_is_one_that_terminals_deliver_or_a_letter(screen: str):
    for key in keys_of(screen):
        for name in key.keys.split(","):
            assert name in DELIVERED or (len(name) == 1 and name.isalpha()), name


@pytest.mark.parametrize("screen", SCREENS)
def test_no_key_means_two_things_on_a_screen(screen: str):
    names = [name for key in keys_of(screen) for name in key.keys.split(",")]
    assert len(names) == len(set(names))


@pytest.mark.parametrize("screen", SCREENS)
def test_escape_is_never_the_only_way(screen: str):
    for key in keys_of(screen):
        names = set(key.keys.split(","))
        assert "escape" not in names or len(names) > 1


@pytest.mark.parametrize("screen", SCREENS)
def test_a_letter_always_has_a_key_beside_it_that_works_while_typing(screen: str):
    lists = {"ask", "tick"}  # nothing is typed there
    for key in keys_of(screen):
        names = key.keys.split(",")
        assert screen in lists or any(
            len(name) > 1 and name not in {"slash", "question_mark"} for name in names
        )


@pytest.mark.parametrize("screen", SCREENS)
@pytest.mark.parametrize("width", [29, 69, 109])
def test_the_key_line_fits_and_names_the_way_back(screen: str, width: int):
    line = key_line(screen, width)
    assert len(line) <= width
    assert "back" in line or "leave" in line


@pytest.mark.parametrize("screen", SCREENS)
def test_every_key_is_explained_in_a_sentence(screen: str):
    assert all(key.help.endswith(".") for key in keys_of(screen))
