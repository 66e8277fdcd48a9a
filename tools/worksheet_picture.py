"""Draw ``docs/worksheet.svg``: the worksheet in the middle of a case of the invented plant, 80 x 24.

python -m tools.worksheet_picture [FILE]
"""

from __future__ import annotations

import asyncio
import re
import sys
import tempfile
from pathlib import Path
from typing import Final

from calc.errors import PlatesideError
from calc.sheet import CaseSheet
from rules.loading import load_knowledge
from tui.application import PlatesideApp
from tui.demo.build import build
from tui.screens.worksheet import Worksheet
from tui.widgets.typed import TypedLine

TARGET: Final = Path(__file__).resolve().parents[1] / "docs" / "worksheet.svg"
KIT: Final = ("clamp_meter", "multimeter", "insulation_tester", "tachometer")
TAG: Final = "WP-201 flume pump"
READ: Final = (
    ("overload_tripped", "y"),
    ("insulation_resistance@isolated", "350 at 24 C 500 V"),
    ("winding_resistance@isolated", "0.61 0.62 0.61 at 24"),
    ("supply_voltage@loaded", "402 381 399"),
)
LINKED: Final = re.compile(r"\s*(?:@font-face\s*\{.*?\}|<!--.*?-->|<circle[^>]*>)", re.DOTALL)
"""Fonts and a remark that point to other machines, and the drawn buttons of a window that there is not."""
SIZE: Final = (80, 24)


async def picture(casebook: Path) -> str:
    """Return the picture of a worksheet after some readings; typing the next one."""
    app = PlatesideApp(casebook, person="I. Marlow")
    app.desk.remember("I. Marlow", KIT)
    machine = app.desk.machine(TAG)
    if machine is None:
        raise PlatesideError(f"the example plant has no machine {TAG}")
    async with app.run_test(size=SIZE) as pilot:
        visit = app.desk.open_case(CaseSheet(machine=machine, complaint="trips_under_load", kit=KIT))
        for key, text in READ[:-1]:
            measure, at, state = key.partition("@")
            if at:
                visit.record(visit.understand(measure, state, text))
            else:
                visit.observe(key, text == "y")
        visit.weigh()
        measure, _, state = READ[-1][0].partition("@")
        visit.record(visit.understand(measure, state, READ[-1][1]))
        page = Worksheet(visit)
        await app.push_screen(page)
        while page.weighed is None or page.is_weighing:
            await pilot.pause(0.05)
        page.query_one(TypedLine).value = "26,1 26.4 25.9"
        await pilot.pause(0.5)
        return LINKED.sub("", app.export_screenshot(title="Plateside"))


def main(argv: list[str]) -> int:
    """Write the picture."""
    target = Path(argv[0]) if argv else TARGET
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "tern-point.db"
        build(path, load_knowledge())
        drawn = asyncio.run(picture(path))
    target.parent.mkdir(exist_ok=True)
    target.write_text(drawn + "\n", encoding="utf-8")
    return 0


if __name__ == "__main__":
    raise SystemExit(main(sys.argv[1:]))
