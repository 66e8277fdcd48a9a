"""Random keys, seeded, so that a run can be had again.

Digits, words of the trade, the letters of the key table, function keys and arrows in all their spellings,
torn escape codes, pastes, bytes that are no text, answers of a terminal that were never asked for.
"""

from __future__ import annotations

import random

from tui.keys import SCREENS

SMALLEST, LARGEST = (20, 5), (200, 60)
SIZES = ((80, 24), (120, 40), (40, 12), SMALLEST, LARGEST)
LEAVING = ("\x03", "\x07", "\x11", "\x1b[20~")  # Ctrl+C, Ctrl+G, Ctrl+Q, F9

FUNCTION = [f"\x1b[{code}~" for code in (*range(11, 16), *range(17, 22), 23, 24)]
MOVES = [
    "\x1b[A", "\x1b[B", "\x1b[C", "\x1b[D", "\x1bOA", "\x1bOB", "\x1bOC", "\x1bOD", "\x1b[H", "\x1b[F",
    "\x1b[1~", "\x1b[4~", "\x1b[5~", "\x1b[6~", "\x1b[2~", "\x1b[3~", "\t", "\x1b[Z", "\x7f", "\x08", " ",
]  # fmt: skip
VALUES = [
    "15.2 15.9 14.8", "0.42", "1.2k", ">5G", "open", "-", "400 398 402 V", "350 at 24 C 500 V", "1455",
    "0.21 0.22 0.21 ohm at 31 C", "1e999", "-1e-999", "nan", "0", "-5", "9" * 40, "1/0", "1,5", "1.2.3",
    "50 Hz", "y", "n", "ol ol ol", "12:30", "1e308 1e308 1e308", "10 hp", "230/460", "7.5 kW", "F",
]  # fmt: skip
WORDS = [
    "P-104", "fire pump", "runs hot", "hums", "trips", "routine", "bearing", "line current loaded",
    "insulation", "winding", "C-", "none", "help", "R. Varga", "overload", "[bold]x[/bold]", "[/]",
    "%s %d {0}", "../../x",
    "'; DROP TABLE entry; --", "$(touch x)", "`id`", "yes", "no", "believed", "teardown", "mine.txt",
]  # fmt: skip
ODD_TEXT = [
    "\u202eevil\u202c", "a\u200bb\u200d", "\u0301\u0301\u0301", "技師の手", "👩‍🔧🏽", "עברית", "\ufeff",
    "Ω µ ° ×", "\u2028\u2029", "ﷺ" * 5, "\U000e0001", "é" * 300, "e\u0301" * 50, "\x9b31m", "\x85",
]  # fmt: skip
STRAY = [
    "\x1b]0;title\x07", "\x1b]52;c;QUJD\x07", "\x1b]11;rgb:0000/0000/0000\x1b\\", "\x1bP1$r0m\x1b\\",
    "\x1b[24;80R", "\x1b[?2026;2$y", "\x1b[?1;2c", "\x1b[I", "\x1b[O", "\x1b[<0;10;10M", "\x1b[<35;500;500m",
    "\x1b[M !!", "\x1b[97;5u", "\x1b[27;5;65~", "\x1b[48;10;40;0;0t", "\x1b[48;60;200;900;1600t", "\x1b[999~",
    "\x1b[31m", "\x1b[2J", "\x1b[?1049l", "\x1bc", "\x1b[1;2A", "\x1b[1;5C", "\x1bx", "\x1b\x1b",
    "\x1b[", "\x1bO",
]  # fmt: skip
NO_TEXT = [b"\xff\xfe", b"\xc3", b"\xed\xa0\x80", b"\xf8\x88\x80\x80\x80", b"\x80" * 20, b"\xe2\x82", b"\0"]
LETTERS = sorted(
    {key for keys in SCREENS.values() for one in keys for key in one.keys.split(",") if len(key) == 1}
    | {"/", "?"}
)
CONTROLS = [chr(code) for code in range(1, 32) if chr(code) not in {*LEAVING, "\x1b"}]


class Keys:
    """What is typed next, in pieces that go out one after the other with the pause before each."""

    def __init__(self, seed: int) -> None:
        self.chance = random.Random(seed)

    def size(self) -> tuple[int, int]:
        """Return columns and rows of a window."""
        if self.chance.random() < 0.5:
            return self.chance.choice(SIZES)
        return (
            self.chance.randint(SMALLEST[0], LARGEST[0]),
            self.chance.randint(SMALLEST[1], LARGEST[1]),
        )

    def burst(self) -> list[tuple[float, bytes]]:
        """Return one burst: pieces with the pause before each, in seconds."""
        chance = self.chance
        way = chance.choices(
            ("enter", "function", "move", "letter", "value", "word", "odd", "stray", "torn", "paste", "bytes",
             "control", "leave", "visit"),
            (14, 14, 12, 10, 14, 10, 3, 4, 4, 3, 3, 3, 0.3, 3),
        )[0]  # fmt: skip
        simple = {
            "function": FUNCTION, "move": MOVES, "letter": LETTERS, "value": VALUES, "word": WORDS,
            "odd": ODD_TEXT, "stray": STRAY, "control": CONTROLS, "leave": LEAVING, "enter": ["\r"],
        }  # fmt: skip
        if way in simple:
            many = chance.choice((1, 1, 1, 2, 5, 30)) if way in {"move", "function", "letter"} else 1
            text = "".join(chance.choice(simple[way]) for _ in range(many))
            return [(0.0, (text + ("\r" if chance.random() < 0.2 else "")).encode(errors="surrogatepass"))]
        if way == "bytes":
            return [(0.0, chance.choice(NO_TEXT)), (0.0, bytes(chance.randrange(128, 256) for _ in range(5)))]
        if way == "torn":
            whole = chance.choice(FUNCTION + MOVES[:10] + STRAY).encode()
            at = chance.randint(1, max(len(whole) - 1, 1))
            return [(0.0, whole[:at]), (chance.uniform(0.0, 0.25), whole[at:])]
        if way == "paste":
            inside = "".join(
                chance.choice(VALUES + WORDS + ODD_TEXT + STRAY + ["\r", "\n", "\t"]) for _ in range(8)
            )
            inside *= chance.choice((1, 1, 40))
            end = "" if chance.random() < 0.1 else "\x1b[201~"
            return [(0.0, ("\x1b[200~" + inside + end).encode()), (0.05, b"\x1b[201~")]
        # a visit as a person would begin it, so that the pages behind it are reached too
        steps = [chance.choice(("n", "\r", "m", "\x1b[13~")), chance.choice(WORDS), "\r", "\r", "\r"]
        return [(chance.uniform(0.05, 0.3), step.encode()) for step in steps]


# a line of a terminal that edits lines itself: these would stop or kill the program, or hold its output
HANDLED_BY_THE_TERMINAL = ("\x03", "\x04", "\x11", "\x13", "\x1a", "\x1c")
ANSWERS = [
    "", "yes", "no", "1", "2", "99", "0", "-1", "help", "why", "all", "gate", "isolate", "correct",
    "skip wet",
    "note oil at the seal", "read line_current loaded", "read winding isolated 1.9 1.9 1.9", "seen hums yes",
    "seen", "read", "close", "M-9", "fan", "runs", "induction",
]  # fmt: skip


PLANT = [
    "FP-2 fire pump",
    "BF-2 boiler fan",
    "LB-6 labeller",
    "BH-1 retort basket hoist",
    "CV-31 tray conveyor",
]


class Lines(Keys):
    """The same for the plain visit: lines."""

    def opening(self) -> list[bytes]:
        """Return the lines that open a case on a machine of the plant; now and then none."""
        tag = self.chance.choice(PLANT)
        complaint = str(self.chance.randint(1, 12))
        return [
            f"{line}\r".encode()
            for line in ("R. Varga", tag, "yes", complaint)
            if self.chance.random() < 0.95
        ]

    def burst(self) -> list[tuple[float, bytes]]:
        """Return one line, seldom Ctrl+C or the end of input."""
        chance = self.chance
        if chance.random() < 0.01:
            return [(0.0, chance.choice((b"\x03", b"\r\x04", b"leave\r")))]
        if chance.random() < 0.05:
            noise = bytes(chance.randrange(128, 256) for _ in range(9))
            return [(0.0, chance.choice(NO_TEXT) + noise + b"\r")]
        if chance.random() < 0.01:
            return [(0.0, b"x" * 5000 + b"\r")]
        text = chance.choice((ANSWERS, ANSWERS, VALUES, VALUES, WORDS, ODD_TEXT, STRAY, CONTROLS))
        line = " ".join(chance.choice(text) for _ in range(chance.choice((1, 1, 1, 3))))
        kept = "".join(letter for letter in line if letter not in HANDLED_BY_THE_TERMINAL)
        return [(0.0, (kept + "\r").encode(errors="surrogatepass"))]
