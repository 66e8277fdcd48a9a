"""Text from files and keyboards made harmless for a terminal."""

from __future__ import annotations

import re
import unicodedata
from typing import Final

# C0 and C1 controls, and the marks that reverse or hide what follows them
UNSEEN: Final = re.compile(
    "[\x00-\x1f\x7f-\x9f\u061c\u200b-\u200f\u2028-\u202e\u2060-\u2069\ufeff\ud800-\udfff]"
)

# What to write where the terminal knows no more than ASCII
PLAIN: Final = str.maketrans(
    {
        "\u2126": "ohm", "\u03a9": "ohm", "\u00b5": "u", "\u03bc": "u",
        "°": "deg ", "±": "+/-", "×": "x", "·": ".", "–": "-",
        "—": "-",
        "…": "...",
        "≥": ">=", "≤": "<=", "≈": "~", "√": "sqrt ", "η": "eta", "φ": "phi", "²": "^2", "³": "^3",
        "“": '"', "”": '"', "„": '"', "‘": "'", "’": "'", "→": "->", "−": "-", "\u00a0": " ", "\u202f": " ",
    }
)  # fmt: skip


def harmless(text: str, *, limit: int = 0) -> str:
    r"""Return text in which nothing can steer a terminal; a control is written as its code: \x1b."""
    shown = UNSEEN.sub(lambda found: " " if found[0] in "\t\n\r" else f"\\x{ord(found[0]):02x}", text)
    return shown if not limit or len(shown) <= limit else shown[: limit - 1] + "…"


def ascii_only(text: str) -> str:
    """Return text in ASCII: trade symbols as words, other letters without their marks, the rest as ?."""
    plain = unicodedata.normalize("NFKD", text.translate(PLAIN))
    return (
        "".join(c for c in plain if not unicodedata.combining(c)).encode("ascii", "replace").decode("ascii")
    )


def width(text: str) -> int:
    """Return how many cells a text takes in a terminal."""
    wide = sum(unicodedata.east_asian_width(character) in "WF" for character in text)
    return len(text) + wide - sum(map(bool, map(unicodedata.combining, text)))
