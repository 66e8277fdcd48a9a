"""The printed sheet of a case, or its tag for the repair shop, and the file that it is written to.

Files go into one folder beside the casebook and nowhere else: whoever is logged in only
to use Plateside cannot reach another file with it.
"""

from __future__ import annotations

import os
import re
from typing import TYPE_CHECKING, Final

import msgspec

from calc.errors import PlatesideError
from tui import page, report
from tui.curve_pictures import machine_pictures

if TYPE_CHECKING:
    from pathlib import Path

    from tui.compose import Visit
    from tui.page_parts import Page

FOLDER: Final = "sheets"
_NAME: Final = re.compile(r"[A-Za-z0-9](?:[A-Za-z0-9 ._-]{0,78}[A-Za-z0-9_-])?")
_DEVICE: Final = re.compile(r"(?:con|prn|aux|nul|com[0-9]|lpt[0-9]) *(?:\..*)?", re.IGNORECASE | re.ASCII)
LONGEST_TAG: Final = 48
ALLOWED: Final = "a name without a folder: letters, digits, . _ -"


def printed(visit: Visit, *, shop_tag: bool = False) -> Page:
    """Return the sheet of a case, or the tag that goes with the motor; weighs the case where that is due."""
    case, diagnosis = visit.case, visit.weigh().diagnosis
    if shop_tag:
        return page.shop_tag(case, diagnosis, visit.knowledge)
    said = visit.learned_words()
    if said:
        diagnosis = msgspec.structs.replace(diagnosis, notes=(*diagnosis.notes, said))
    cases = visit.book.machine_cases(case.tag) if case.tag else ()
    curves = machine_pictures(visit.sheet)
    return page.sheet_page(case, diagnosis, visit.knowledge, cases=cases, curves=curves)


def usual_name(visit: Visit, *, shop_tag: bool = False) -> str:
    """Return how the file is called where nobody says otherwise."""
    tag = re.sub(r"[^A-Za-z0-9]+", "-", visit.case.tag)[:LONGEST_TAG].strip("-")
    parts = [tag, visit.number, "shop-tag" if shop_tag else ""]
    return "-".join(part for part in parts if part) + ".txt"


def write(made: Page, casebook: Path, name: str) -> Path:
    """Write a page to a new file in the folder beside the casebook; ``.html`` makes an HTML page of it.

    Raises PlatesideError where not every system takes the name, the file is there, or the disk refuses.
    """
    if not _NAME.fullmatch(name):
        raise PlatesideError(f"'{name}': {ALLOWED}")
    if _DEVICE.fullmatch(name):  # the folder may lie on, or be carried to, a laptop with Windows
        raise PlatesideError(f"'{name}': Windows keeps that name for a device; another name")
    target = casebook.parent / FOLDER / (name if "." in name else f"{name}.txt")
    text = report.as_html(made) if target.suffix == ".html" else "\n".join(report.as_text(made)) + "\n"
    try:
        target.parent.mkdir(exist_ok=True)
        with os.fdopen(
            os.open(target, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o640), "w", encoding="utf-8"
        ) as file:
            file.write(text)
    except FileExistsError as error:
        raise PlatesideError(f"{target.name} is there already; another name") from error
    except OSError as error:
        raise PlatesideError(f"{target}: {error.strerror or error}") from error
    return target
