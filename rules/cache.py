"""Keep the decoded rules as JSON in the user's cache folder, so that start-up need not read YAML.

A cache that is missing, unwritable, stale or broken changes nothing but the time.
"""

from __future__ import annotations

import contextlib
import hashlib
import os
import tempfile
from collections.abc import Sequence
from pathlib import Path

import msgspec
import platformdirs

from rules.knowledge import Knowledge

_KEPT = 4


def key_of(texts: list[tuple[int, Path, str]], folders: Sequence[Path] = ()) -> str:
    """Return the sha256 of all texts, their files and folders, and the program that checks them."""
    digest = hashlib.sha256()
    for module in sorted(Path(__file__).parent.rglob("*.py")):
        digest.update(module.read_bytes())
    for part in map(os.fsencode, folders):
        digest.update(hashlib.sha256(part).digest())
    for number, file, text in texts:
        for part in (str(number).encode(), os.fsencode(file), text.encode()):
            digest.update(hashlib.sha256(part).digest())
    return digest.hexdigest()


def read(key: str) -> Knowledge | None:
    """Return the rules kept under a key, or None."""
    with contextlib.suppress(OSError, msgspec.MsgspecError, UnicodeDecodeError):
        return msgspec.json.decode((folder() / f"rules-{key}.json").read_bytes(), type=Knowledge)
    return None


def write(key: str, knowledge: Knowledge) -> None:
    """Keep the rules under a key, whole or not at all, and drop the oldest of many."""
    with contextlib.suppress(OSError, msgspec.MsgspecError):
        place = folder()
        place.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(dir=place, prefix=".rules-")
        try:
            with os.fdopen(handle, "wb") as file:
                file.write(msgspec.json.encode(knowledge))
            Path(name).replace(place / f"rules-{key}.json")
        except OSError:  # such as a full disk: no half file may stay
            Path(name).unlink(missing_ok=True)
            raise
        kept = sorted(place.glob("rules-*.json"), key=lambda path: path.stat().st_mtime)
        for old in kept[:-_KEPT]:
            old.unlink()


def folder() -> Path:
    """Return the user's cache folder."""
    return Path(platformdirs.user_cache_dir("plateside", appauthor=False))
