"""Who writes."""

from __future__ import annotations

import getpass

NOBODY = "unknown"


def login_name() -> str:
    """Return the login name of whoever runs this, or a word where the system knows none."""
    try:
        return getpass.getuser() or NOBODY
    except (OSError, KeyError, ImportError):  # no such user, no password database
        return NOBODY
