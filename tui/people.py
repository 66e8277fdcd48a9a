"""Who writes."""

from __future__ import annotations

import getpass
from typing import Final

NOBODY = "unknown"

USUAL_KIT: Final = ("clamp_meter", "multimeter", "insulation_tester")
"""What most carry: offered where nobody has said otherwise."""


def login_name() -> str:
    """Return the login name of whoever runs this, or a word where the system knows none."""
    try:
        return getpass.getuser() or NOBODY
    except (OSError, KeyError, ImportError):  # no such user, no password database
        return NOBODY
