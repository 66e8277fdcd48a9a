"""Every key of every screen, once: the bindings, the key line and the help screen are made from this table.

Only keys that terminals, tmux and editors' panels hand on. A letter works while no
input line has the focus, and has a function or control key beside it. Escape is never the only way.
"""

from __future__ import annotations

from typing import Final, NamedTuple

from textual.binding import Binding, BindingType


class Key(NamedTuple):
    """One key of a screen: what is pressed, what runs, and what the key line and the help say."""

    keys: str
    action: str
    label: str
    help: str

    @property
    def shown(self) -> str:
        """The key as people read it: F3, Ctrl+T, n."""
        return " or ".join(_NAMES.get(key, _cap(key)) for key in self.keys.split(",") if key != "escape")

    @property
    def first(self) -> str:
        """The key that the key line names."""
        key = self.keys.split(",")[0]
        return _NAMES.get(key, _cap(key))


_NAMES: Final = {
    "slash": "/",
    "enter": "Enter",
    "up": "Up",
    "down": "Down",
    "left": "Left",
    "right": "Right",
    "pageup": "PgUp",
    "pagedown": "PgDn",
    "space": "Space",
    "tab": "Tab",
    "question_mark": "?",
}


def _cap(key: str) -> str:
    """Write a key's name as it stands on the keyboard."""
    if key.startswith("ctrl+"):
        return "Ctrl+" + key.removeprefix("ctrl+").upper()
    return key.upper() if key.startswith("f") and key[1:].isdigit() else key


HELP: Final = Key("f2,question_mark", "help", "help", "The keys of this screen.")
BACK: Final = Key("f9,escape", "back", "back", "Back to the screen before. Nothing that is stored is lost.")
COMMON: Final = (
    Key("ctrl+l", "redraw", "", "Draw the screen again, after noise on the line."),
    Key("ctrl+g,ctrl+q", "leave", "", "Leave Plateside. It asks where something is typed and not stored."),
)
_UP_DOWN: Final = (
    Key("up", "cursor_up", "", "Up one line."),
    Key("down", "cursor_down", "", "Down one line."),
)
_PAGES: Final = (
    Key("pagedown", "page_down", "", "Further down the page."),
    Key("pageup", "page_up", "", "Further up the page."),
)
_DONE: Final = "f8"

SCREENS: Final[dict[str, tuple[Key, ...]]] = {
    "casebook": (
        Key("enter", "open", "open", "Open the case under the bar."),
        Key("n,ctrl+n", "new_case", "new case", "A new case: which machine, what is wrong."),
        Key("f3,slash", "search", "search", "Search all cases while you type; Enter goes to the list."),
        Key("f4,m", "machine", "machine", "The machine's page: plate, expected values, history, cases."),
        Key("f5,k", "kit", "who and kit", "Your name on the entries, and what you carry."),
        *_UP_DOWN,
        Key("f9", "leave", "leave", "Leave Plateside."),
    ),
    "new_case": (
        Key("enter", "go_on", "next", "Take the line and go on."),
        *_UP_DOWN,
    ),
    "nameplate": (
        Key("enter", "next_field", "next line", "The next line of the plate. A blank line is allowed."),
        *_UP_DOWN,
        Key(_DONE, "done", "plate is done", "Keep the plate and go on."),
        Key("f3", "kind", "kind", "Another kind of machine."),
    ),
    "worksheet": (
        Key(
            "enter",
            "enter",
            "",
            "Store what is understood; on an empty line, do what stands beside 'next'.",
        ),
        Key("f3", "other", "pick", "Another reading than the one proposed, or one again."),
        Key("f4", "skip", "skip", "Cannot be taken now: it is remembered and not proposed again."),
        Key(
            "f5",
            "reasons",
            "why",
            "For and against each fault, what would turn it, confirm, remedy, re-test.",
        ),
        Key("f6", "gate", "gate", "The list before energising; the isolation record."),
        Key("f7", "tick", "seen", "What was seen, heard or smelt: the tick list."),
        Key(_DONE, "close", "done", "Close the case with what was found."),
        Key("ctrl+r", "correct", "correct", "Correct or take back something stored; the log keeps both."),
        Key("ctrl+t", "curves", "curves", "Curves of this machine, and its history."),
        Key("ctrl+o", "machine", "machine", "The machine's page: plate, expected values, cases."),
        Key("ctrl+n", "note", "note", "A remark for the log."),
        Key("pageup", "older", "", "Older readings."),
        Key("pagedown", "newer", "", "Newer readings."),
    ),
    "reasons": (
        Key("right,down", "next_fault", "next fault", "The next fault on the list."),
        Key("left,up", "last_fault", "fault before", "The fault before."),
        Key("f4,o", "own_cases", "own cases", "Weigh with the shop's own confirmed cases, or without them."),
        *_PAGES,
    ),
    "curves": (
        Key("right", "next_curve", "next curve", "The next curve."),
        Key("left", "last_curve", "", "Back."),
    ),
    "gate": (
        Key(
            "enter,f8",
            "isolate",
            "isolation record",
            "Who isolated and locked out, when, and that it was proved dead.",
        ),
        Key(
            "f4,l",
            "lift",
            "lift isolation",
            "Record that the isolation was lifted; the next one is asked for.",
        ),
        *_PAGES,
    ),
    "isolation": (
        Key("enter", "next_field", "next", "The next line; on the last one the record is stored."),
        *_UP_DOWN,
        Key("space", "toggle", "", "Tick or untick."),
        Key(_DONE, "done", "store", "Store the record."),
    ),
    "hazards": (
        Key("enter,f8", "done", "read and accepted", "The precautions are taken; stored with your name."),
    ),
    "pick": (
        Key("enter", "choose", "choose", "Take the line under the bar."),
        *_UP_DOWN,
    ),
    "tick": (
        Key("y", "answer(True)", "yes", "It is so."),
        Key("n", "answer(False)", "no", "It is not so."),
        Key("space", "next_answer", "yes, no, not asked", "Change the answer."),
        *_UP_DOWN,
        Key("enter,f8", "done", "store", "Store the answers."),
    ),
    "closing": (
        Key("enter", "next_field", "next line", "The next line; on the last one the case is closed."),
        *_UP_DOWN,
        Key("space", "toggle", "", "Tick or untick in the list of faults."),
        Key(_DONE, "done", "close the case", "Close the case with what stands here."),
        Key("f4", "sheet", "sheet", "The printed sheet of the case as it is stored now."),
        Key("f5", "shop_tag", "repair tag", "The tag that goes with the motor to the repair shop."),
    ),
    "machine": (
        Key("f3", "edit", "correct the plate", "Correct the plate; the log keeps both."),
        Key("f4,ctrl+t", "curves", "curves", "Curves and history."),
        *_PAGES,
    ),
    "closed": (
        Key(_DONE, "reopen", "go on with it", "Open the case again."),
        Key("f4,s", "sheet", "sheet", "The printed sheet of the case."),
        Key("f5,t", "shop_tag", "repair tag", "The tag that goes with the motor to the repair shop."),
        *_PAGES,
    ),
    "sheet": (
        Key(
            "f8,w", "write", "write to a file", "Write it to a file beside the casebook; .html makes a page."
        ),
        *_PAGES,
    ),
    "person": (
        Key("enter", "next_field", "next", "The next line."),
        *_UP_DOWN,
        Key("space", "toggle", "", "Tick or untick."),
        Key(_DONE, "done", "keep", "Keep the name and the kit."),
    ),
    "ask": (
        Key("y,f8", "yes", "yes", "Yes."),
        Key("n", "no", "no", "No."),
    ),
    "note": (Key("enter,f8", "done", "store", "Store the remark."),),
    "help": _PAGES,
}


def keys_of(screen: str) -> tuple[Key, ...]:
    """Return all keys of a screen in the order in which they are shown."""
    own = SCREENS[screen]
    help_key = () if screen == "help" else (HELP,)
    has_back = any("f9" in key.keys for key in own)
    return (*help_key, *own, *(() if has_back else (BACK,)), *COMMON)


def bindings(screen: str) -> list[BindingType]:
    """Return the bindings of a screen."""
    return [Binding(key.keys, key.action, key.label, show=False) for key in keys_of(screen)]


def key_line(screen: str, width: int) -> str:
    """Return the keys of a screen in one line; what does not fit is found with the help key."""
    labelled = [f"{key.first} {key.label}" for key in keys_of(screen) if key.label]
    line, last = "", labelled[-1]
    for item in labelled[:-1]:
        if len(line) + len(item) + 2 + len(last) > width:
            break
        line += item + "  "
    return line + last
