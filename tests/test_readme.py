"""The README tells the truth: its commands exist, and what it shows is what the program says."""

import re
import runpy
from pathlib import Path

from tui.parser import COMMANDS, build

ROOT = Path(__file__).resolve().parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")


def words_of(text):
    """Return a text without its numbers: they may differ in the last digit from machine to machine."""
    return re.sub(r"[<>]?[\d.]+", "#", text)


def test_every_command_stands_in_the_readme_with_an_example():
    for command in COMMANDS:
        assert f"`plateside {command.word}" in README


def test_every_command_that_the_readme_names_is_understood():
    parser = build()
    for line in re.findall(r"^\| `plateside ([^`]*)`", README, re.MULTILINE):
        parser.parse_args(line.partition(">")[0].split())


def test_what_the_readme_shows_is_what_the_program_says():
    renewed = runpy.run_path(str(ROOT / "tools" / "readme"))["renewed"]
    assert words_of(renewed(README)) == words_of(README), "run tools/readme"


def test_every_file_that_the_readme_links_to_is_there():
    for target in re.findall(r"\]\(([^)#]+)\)", README):
        if target != "docs/worksheet.svg":  # drawn from the app
            assert (ROOT / target).exists(), target
