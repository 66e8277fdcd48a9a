"""No text of Plateside is a permission, an all-clear, or tells a dangerous thing to do."""

import ast
from pathlib import Path

import pytest

import rules
from rules.gate import SAYS_NOTHING_FORBIDS
from rules.wording import texts_in, unwanted

from .makers import shipped

ROOT = Path(rules.__file__).resolve().parent.parent
SECTIONS = ("faults", "observations", "complaints", "readings", "limits", "hazards", "gates")

NEVER = [
    "It is safe to start.", "Energise safely.", "The line is dead.", "The winding is good.",
    "OK to reset.",
    "okay to run", "It may be energised.", "it can be energised", "All clear.", "Bypass the switch.",
    "by-pass the relay", "jumper the contact", "hold the contactor in", "hold in the contactor",
    "spin it by hand", "spin the shaft by hand", "open the field", "open the shunt field",
    "raise the relay", "raise the overload setting", "turn up the setting", "arc-flash category 2",
    "PPE category 2", "open the explosion-proof motor", "open an explosion-protected enclosure",
    "You can start it.", "you may now reset the relay", "The motor is fine.", "all-clear", "ok to run",
    "healthy motor, run it", "leave in service", "leave it in service", "return to service", "go ahead",
    "It can be restarted.", "may be switched back on", "could be re-closed", "can be left running",
    "cleared to start", "ready to be energised", "fit for service", "is permitted to run", "run it again",
    "bridge the contact", "bridging out the switch", "short the interlock", "defeat the guard",
    "skip the list", "ignore the caution", "press the contactor", "dial up the relay", "larger fuses",
    "no need to discharge", "renew the fuse and try", "re-close it to see", "reset it and watch",
    "help the shaft", "give it a spin", "lift the field lead while it runs", "open the Ex motor",
    "no danger", "harmless", "arc flash level 2", "8 cal/cm2",
]  # fmt: skip
FINE = [
    SAYS_NOTHING_FORBIDS, "Isolated, locked out and proved dead.", "prove dead on a proved tester",
    "The field circuit reads open.", "a deadline", "goods lift", "unsafe", "prove it dead",
    "starts by hand in either direction",
    "set it to the plate current",
    "the contactor holds in", "explosion-protected motors are for approved shops",
    "arc flash", "the relay did its job", "Nothing is re-closed to see whether it holds",
    "the shaft turns freely", "opens the field switch",
    "short the current transformer before it is opened", "keep it shorted while its wires are off",
]  # fmt: skip


@pytest.mark.parametrize("text", NEVER)
def test_what_is_never_said_is_found(text):
    assert unwanted(text)


@pytest.mark.parametrize("text", FINE)
def test_what_may_be_said_is_left_alone(text):
    assert unwanted(text) == ()


@pytest.mark.parametrize("section", SECTIONS)
def test_no_rule_says_what_is_never_said(section):
    found = [
        (entry.id, path, words)
        for entry in getattr(shipped(), section).values()
        for path, text in texts_in(entry)
        for words in unwanted(text)
    ]
    assert found == []


def said_in(module: Path) -> list[tuple[int, str]]:
    """Every text in a module that is no docstring and more than one word."""
    tree = ast.parse(module.read_text(encoding="utf-8"))
    notes = {
        id(node.value)
        for node in ast.walk(tree)
        if isinstance(node, ast.Expr) and isinstance(node.value, ast.Constant)
    }
    return [
        (node.lineno, node.value)
        for node in ast.walk(tree)
        if isinstance(node, ast.Constant) and isinstance(node.value, str)
        if id(node) not in notes and " " in node.value
    ]


MODULES = sorted(
    path
    for layer in ("calc", "rules", "casebook", "tui")
    for path in (ROOT / layer).rglob("*.py")
    if path.name != "wording.py"
)


def test_there_are_modules_to_look_at():
    assert {"gate.py", "trips.py", "findings.py"} <= {path.name for path in MODULES}


@pytest.mark.parametrize("module", MODULES, ids=lambda path: str(path.relative_to(ROOT)))
def test_no_module_says_what_is_never_said(module):
    found = [(line, words) for line, text in said_in(module) for words in unwanted(text)]
    assert found == []
