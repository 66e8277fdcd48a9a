"""A login over OpenSSH can do nothing but Plateside: no shell, no editor, no pager, no command of its own."""

from __future__ import annotations

import subprocess
from pathlib import Path

import pytest

from tests.system.openssh import Server, log_in
from tests.tui.terminal import Terminal

pytestmark = pytest.mark.system
F4, F5, F6, F7, F8 = (f"\x1b[{code}~" for code in (14, 15, 17, 18, 19))
PAGES = {
    "casebook": "",
    "worksheet": "\r",
    "reasons": f"\r{F5}",
    "gate": f"\r{F6}",
    "tick list": f"\r{F7}",
    "what was found": f"\r{F8}",
    "closing": f"\r{F8}\r",
    "sheet": f"\r{F8}\r{F4}",
    "machine": "m",
}
LEAVING = "\x03\x07\x11\x1b"  # they leave, or begin a code
CONTROL = [chr(code) for code in range(1, 32) if chr(code) not in LEAVING]
TRIED = [
    "!",
    ":",
    "|",
    "!sh",
    ":!sh",
    *CONTROL,
    "\x1bx",
    "\x1b!",
    *(f"\x1b[{code}~" for code in range(11, 20)),
]


@pytest.mark.parametrize("page", PAGES)
def test_no_key_opens_a_shell_an_editor_or_a_pager(
    server: Server, book: Path, lines: list[Terminal], page: str
):
    line = log_in(server, lines)
    for keys in PAGES[page]:
        line.type(keys)
    line.pump(1.0)
    for keys in TRIED:
        line.type(keys)
        line.pump(0.02)
        running = server.processes()
        assert running and all("-m plateside" in command for command in running), (keys, running)
    line.pump(0.5)
    assert not server.marker.exists()
    assert "keys" in line.text()


def test_a_command_or_a_file_transfer_is_not_what_a_login_gets(server: Server, book: Path):
    wanted = server.folder / "made_by_command"
    ran = subprocess.run(
        server.login("touch", str(wanted)), capture_output=True, text=True, timeout=60, check=False
    )
    assert ran.returncode == 1
    assert "the screens need a terminal" in ran.stderr
    assert not wanted.exists()
