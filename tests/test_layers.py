"""What a fresh process loads: headless commands no terminal library, a start nothing heavy."""

import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
SHEET = ROOT / "tests" / "sheets" / "pump_overload.yaml"
HEAVY = {"numpy", "scipy", "yaml", "pint", "msgspec", "textual", "rich", "platformdirs", "sqlite3"}
TERMINAL = {"textual", "rich"}


def loaded_by(*argv: str, env_casebook: Path | None = None) -> set[str]:
    """Return the top-level modules that a command has loaded when it is done."""
    code = (
        "import sys, plateside\nfrom tui.cli import main\n"
        f"status = main({list(argv)!r})\n"
        "print('LOADED', *{name.partition('.')[0] for name in sys.modules})\n"
        "sys.exit(status)"
    )
    command = [sys.executable, "-c", code]
    env = {
        "PATH": "",
        "PYTHONPATH": str(ROOT),
        "PLATESIDE_CASEBOOK": str(env_casebook or "/nonexistent/book.db"),
    }
    done = subprocess.run(command, capture_output=True, text=True, env=env, cwd="/", check=False, timeout=120)
    line = next((line for line in done.stdout.splitlines() if line.startswith("LOADED ")), None)
    assert line is not None, done.stderr
    return set(line.split()[1:])


def test_the_version_is_printed_without_loading_anything_heavy():
    assert not loaded_by("--version") & HEAVY


def test_help_is_printed_without_loading_anything_heavy():
    code = "import sys, plateside\nfrom tui.cli import main\nmain(['--help'])\nprint('LOADED', *sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, cwd=ROOT, check=True)
    assert "diagnose" in done.stdout
    assert not {name.partition(".")[0] for name in done.stdout.split("LOADED")[1].split()} & HEAVY


@pytest.mark.parametrize(
    "argv",
    [
        ["diagnose", str(SHEET)],
        ["diagnose", "--json", str(SHEET)],
        ["expect", str(SHEET)],
        ["log", str(SHEET), "--person", "Ines"],
        ["cases"],
        ["cases", "--json", "pump"],
        ["report", "C-000000"],
        ["export"],
        ["learned"],
        ["check-rules"],
        ["merge", "/nonexistent"],
        ["copy", "/nonexistent/copy.db"],
    ],
    ids=lambda argv: " ".join(word for word in argv if "/" not in word),
)
def test_a_command_never_loads_a_terminal_library(argv, tmp_path):
    modules = loaded_by(*argv, env_casebook=tmp_path / "book.db")
    assert not modules & TERMINAL
    assert "scipy" not in modules


def test_calc_rules_and_casebook_load_without_the_screens():
    code = (
        "import sys, pkgutil, importlib, plateside, calc, rules, casebook\n"
        "for package in (calc, rules, casebook):\n"
        "    for found in pkgutil.walk_packages(package.__path__, package.__name__ + '.'):\n"
        "        importlib.import_module(found.name)\n"
        "print('LOADED', *{name.partition('.')[0] for name in sys.modules})"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, cwd=ROOT, check=True)
    assert not set(done.stdout.split()) & (TERMINAL | {"tui"})
