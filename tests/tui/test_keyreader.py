"""Keys out of bytes: what a person typed comes through, whatever stands around it."""

from hypothesis import given, settings
from hypothesis import strategies as st
from textual.events import Key, Paste

from tui.keyreader import NOT_ASKED_FOR, KeyReader

SIGNS = [
    "\x1b",
    "[",
    "O",
    "M",
    "<",
    ";",
    "?",
    "$y",
    "200~",
    "201~",
    "48;",
    "9" * 20,
    "0",
    "R",
    "u",
    "t",
    "~",
    "é",
    "a",
]


def typed(*pieces: bytes) -> str:
    """Return the printable characters among the keys."""
    reader = KeyReader()
    found = [message for piece in pieces for message in reader.feed(piece)]
    return "".join(key.character or "" for key in found if isinstance(key, Key) and key.is_printable)


def test_a_byte_that_is_no_text_becomes_a_replacement_character_and_what_follows_is_read():
    assert typed(b"15\xe9.2") == "15\ufffd.2"
    assert typed(b"\xff\xfe\x80ok") == "\ufffd\ufffd\ufffdok"


def test_a_letter_torn_between_two_reads_is_whole():
    assert typed("é".encode()[:1], "é".encode()[1:]) == "é"


def test_a_paste_is_one_message():
    (paste,) = [
        one for one in KeyReader().feed("\x1b[200~15.2 é\x1b[201~x".encode()) if isinstance(one, Paste)
    ]
    assert paste.text == "15.2 é"


def test_sizes_and_mouse_events_that_a_terminal_was_not_asked_for_are_left_out():
    told = b"\x1b[48;60000;60000;0;0t\x1b[<0;10;10M\x1b[M !!\x1b[?2048;1$y\x1b[<35;99999999999999999999;1M"
    assert [one for one in KeyReader().feed(told + b"x") if not isinstance(one, Key)] == []
    assert typed(told + b"x").endswith("x")


def test_an_escape_that_nothing_follows_is_the_key(monkeypatch):
    reader = KeyReader()
    assert list(reader.feed(b"\x1b")) == []
    monkeypatch.setattr("textual._parser.get_time", lambda: 1e12)
    assert [key.key for key in reader.tick() if isinstance(key, Key)] == ["escape"]


@settings(max_examples=300, deadline=None)
@given(
    st.lists(
        st.binary(max_size=40)
        | st.lists(st.sampled_from(SIGNS), max_size=12).map(lambda s: "".join(s).encode())
    )
)
def test_no_bytes_end_the_keyboard(pieces: list[bytes]):
    reader = KeyReader()
    for piece in pieces:
        assert not any(isinstance(message, NOT_ASKED_FOR) for message in reader.feed(piece))
        list(reader.tick())
    # the end of a paste, a key that ends any code, then what is typed is read again
    after = [key for key in reader.feed(b"\x1b[201~" + b"~" * 40 + b"42") if isinstance(key, Key)]
    assert [key.character for key in after[-2:]] == ["4", "2"]
