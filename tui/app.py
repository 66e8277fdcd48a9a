"""Starts the screens: what must be set before Textual is loaded, and how they end."""

from __future__ import annotations

import gc
import os
import sys
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import MutableMapping, Sequence
    from pathlib import Path

SWITCH_INTERVAL_S = 0.001
"""How long a computing thread keeps the keys waiting."""
SLOW_LINE_ESCAPE_MS = "400"
"""How long the rest of a key's sequence may take on a remote line."""


def prepare(environ: MutableMapping[str, str] = os.environ) -> None:
    """Set what Textual reads when it is imported: no animation, patience on slow lines."""
    environ["TEXTUAL_ANIMATIONS"] = "none"
    environ.setdefault("TEXTUAL_DISABLE_KITTY_KEY", "1")
    if environ.get("SSH_CONNECTION"):
        environ.setdefault("ESCDELAY", SLOW_LINE_ESCAPE_MS)
    known = {"auto", "standard", "256", "truecolor"}
    if environ.get("TEXTUAL_COLOR_SYSTEM", "standard") not in known:
        environ["TEXTUAL_COLOR_SYSTEM"] = "standard"
    environ.setdefault("TEXTUAL_COLOR_SYSTEM", "standard")


def run_app(
    casebook: Path,
    *,
    rule_folders: Sequence[Path] = (),
    ascii_only: bool = False,
    use_learned: bool = True,
) -> int:
    """Run the screens on a casebook until they are left; return the exit status."""
    prepare()
    gc.disable()  # until the first page stands: what is imported stays, looking for garbage in it is vain
    sys.setswitchinterval(SWITCH_INTERVAL_S)
    from tui.application import PlatesideApp  # Textual reads the environment when it is imported
    from tui.look import needs_ascii

    ascii_only = ascii_only or bool(os.environ.get("PLATESIDE_ASCII")) or needs_ascii()
    app = PlatesideApp(casebook, rules=rule_folders, ascii_only=ascii_only)
    app.desk.use_learned = use_learned
    status = app.run(mouse=False)
    return app.return_code or status or 0
