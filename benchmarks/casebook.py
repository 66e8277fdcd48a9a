"""What the casebook costs when it is large.

``python benchmarks/casebook.py [--entries 1000000] [--folder DIR]``

Prints a table of figures beside their targets. The folder should lie on the disk
that is to be judged: a memory disk has no sync to compare with.
"""

from __future__ import annotations

import argparse
import os
import random
import resource
import shutil
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from datetime import UTC, datetime, timedelta
from pathlib import Path
from statistics import median

sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

from calc.sheet import CaseSheet, Machine, Nameplate, Reading, Value
from casebook import bodies as b
from casebook.book import Casebook, open_casebook
from casebook.entry import Entry, make_entry, new_id
from casebook.foreign import Item
from casebook.merge import merge_file, merge_items
from casebook.wire import write_lines

START = datetime(2016, 1, 4, 6, 0, tzinfo=UTC)
FAULTS = ("overload", "bearing_defect", "turn_short", "open_supply_line", "damp_insulation", "misalignment")
PLACES = ("retort", "conveyor", "cooker", "washdown", "boiler", "seamer", "brine", "palletiser", "chiller")
PARTS = ("bearing", "coupling", "contactor", "terminal", "gland", "cable", "fan", "brush", "relay", "fuse")
PER_CASE = 20
CLEAR = random.Random(1)


def value(text: str, number: float, unit: str) -> Value:
    """Return a value as it was read."""
    return Value(text=text, number=number, unit=unit, resolution=0.1)


def a_case(place: int) -> list[b.Body]:
    """Bodies of one case, 20 in all, with words that repeat as they do in a plant."""
    kw = CLEAR.choice((1.5, 4.0, 7.5, 15.0, 37.0, 90.0))
    plate = Nameplate(
        power=value(f"{kw} kW", kw * 1000, "W"),
        voltage=value("400 V", 400.0, "V"),
        current=value(f"{2 * kw} A", 2 * kw, "A"),
        insulation_class="F",
    )
    amps = tuple(value(f"{2 * kw + n / 10} A", 2 * kw + n / 10, "A") for n in range(3))
    ohm = CLEAR.uniform(5e6, 900e6)
    readings = (
        *(Reading(measure="line_current", state="loaded", values=amps) for _ in range(6)),
        Reading(
            measure="insulation_resistance",
            state="isolated",
            values=(value(f"{ohm / 1e6:.0f} Mohm", ohm, "ohm"),),
            temperature=value("24 degC", 24.0, "degC"),
        ),
    )
    sheet = CaseSheet(
        machine=Machine(kind="induction_3ph", tag=f"M-{place % 4000:04}", nameplate=plate, starter="direct"),
        complaint=CLEAR.choice(("trips_under_load", "runs_hot", "noisy_or_vibrating", "will_not_start")),
        readings=readings,
        observations={
            "hums": CLEAR.random() < 0.5,
            "bearing_noise": CLEAR.random() < 0.3,
            "fuse_blown": False,
        },
        kit=("clamp_meter", "multimeter"),
    )
    found = CLEAR.choice(FAULTS)
    rest: list[b.Body] = [
        b.Shown(faults=tuple(b.ShownFault(id=fault, probability=1 / 6) for fault in FAULTS)),
        b.Note(text=f"{CLEAR.choice(PLACES)} line, {CLEAR.choice(PARTS)} looked at; job {place}"),
        b.Note(text=f"spare {CLEAR.choice(PARTS)} from store, bin {CLEAR.randrange(500)}"),
        b.Concluded(fault=found, probability=0.7, decision="pull it"),
        b.Repaired(done=f"new {CLEAR.choice(PARTS)}", parts=(CLEAR.choice(PARTS),), minutes=45.0),
        b.Closed(found=found, confirmed=CLEAR.choice(("teardown", "repair", "believed"))),
    ]
    return [*b.bodies_of_sheet(sheet), *rest]


def entries_of(cases: range) -> Iterator[Entry]:
    """Yield the entries of some cases, each after the one before."""
    for place in cases:
        case, after = new_id(), None
        for step, body in enumerate(a_case(place)):
            at = START + timedelta(minutes=75 * (place % 70_000) + 3 * step)
            entry = make_entry(body, case=case, person=f"person {place % 9}", after=after, at=at)
            after = entry.id
            yield entry


def timed(act: Callable[[], object], times: int = 20) -> tuple[float, float]:
    """Return median and worst time of some runs, in ms."""
    took = []
    for _ in range(times):
        start = time.perf_counter()
        act()
        took.append(1e3 * (time.perf_counter() - start))
    return median(took), max(took)


def one_sync(folder: Path) -> float:
    """Return the median time of one fdatasync after writing two pages to a file of full length, in ms."""
    path = folder / "sync"
    descriptor = os.open(path, os.O_CREAT | os.O_RDWR)
    os.write(descriptor, bytes(8192 * 300))
    os.fsync(descriptor)
    places = iter(range(300))

    def write() -> None:
        os.pwrite(descriptor, os.urandom(8192), 8192 * next(places))
        os.fdatasync(descriptor)

    took, _ = timed(write, 200)
    os.close(descriptor)
    path.unlink()
    return took


def row(what: str, figure: str, target: str = "") -> None:
    """Print one line of the table."""
    print(f"{what:<58}{figure:>22}  {target}", flush=True)


def build(path: Path, entries: int) -> None:
    """Make a casebook of so many entries."""
    start = time.perf_counter()
    with open_casebook(path) as book:
        items = (Item("", entry) for entry in entries_of(range(entries // PER_CASE)))
        merge_items(book, items, source="benchmark")
    took = time.perf_counter() - start
    row(f"made {entries} entries", f"{took:.0f} s", f"{path.stat().st_size / 1e6:.0f} MB")


def forget(path: Path) -> None:
    """Ask the system to drop the file from its cache."""
    descriptor = os.open(path, os.O_RDONLY)
    os.fsync(descriptor)
    os.posix_fadvise(descriptor, 0, 0, os.POSIX_FADV_DONTNEED)
    os.close(descriptor)


def open_and_list(path: Path) -> None:
    """Do what happens before the first screen."""
    with open_casebook(path) as book:
        assert len(book.cases()) == 50


def measure_reading(path: Path, book: Casebook) -> None:
    """Measure what is asked of a casebook."""
    row(
        "open and list 50, warm (median, worst)",
        "{:.1f} {:.1f} ms".format(*timed(lambda: open_and_list(path))),
        "50",
    )
    row("list 50 (median, worst)", "{:.2f} {:.2f} ms".format(*timed(book.cases)), "20")
    for typed in (
        "m",
        "be",
        "bea",
        "bearing",
        "bearing retort",
        "b r n",
        "M-0123",
        "7.5 kW turn",
        "job 777",
        "zz",
        "1",
    ):
        book.search(typed)
        row(
            f"search {typed!r} (median, worst)",
            "{:.2f} {:.2f} ms".format(*timed(lambda typed=typed: book.search(typed))),
            "20",
        )
    token = book.changed_since(0 if book.store.count() < 10 else 10**9).token
    row(
        "ask for changes (median, worst)",
        "{:.3f} {:.3f} ms".format(*timed(lambda: book.changed_since(token))),
    )
    row("machines that begin with M-0", "{:.2f} {:.2f} ms".format(*timed(lambda: book.machines("M-0"))), "20")
    row("history of one machine", "{:.1f} {:.1f} ms".format(*timed(lambda: book.history("M-0007"), 5)))
    row(
        "learned counts of one kind",
        "{:.0f} {:.0f} ms".format(*timed(lambda: book.learned("induction_3ph", 7500.0), 3)),
    )
    row("scoreboard", "{:.0f} {:.0f} ms".format(*timed(book.scoreboard, 3)))


def measure_writing(folder: Path, book: Casebook) -> None:
    """Measure one Enter against one sync of the disk."""
    sync = one_sync(folder)
    cases = [case.id for case in book.cases(limit=200)]
    places = iter(range(200))
    note = b.Note(text="grease on the drive end")
    append, worst = timed(lambda: book.record(cases[next(places)], note, person="Ada"), 200)
    row("one fdatasync", f"{sync:.2f} ms")
    row("append to a case of 20 (median, worst)", f"{append:.2f} {worst:.2f} ms")
    row("append / fdatasync", f"{append / sync:.2f}", "2")
    row("append - fdatasync: our own work", f"{append - sync:.2f} ms")


def measure_merging(folder: Path, book: Casebook, entries: int) -> None:
    """Measure what happens when a laptop comes home."""
    lines, other = folder / "lines.jsonl", folder / "other.db"
    made = list(entries_of(range(60_000, 60_000 + entries // PER_CASE)))
    with lines.open("wb") as file:
        write_lines(made, file)
    with open_casebook(other) as laptop:
        laptop.store.add(made[: entries // 2], fold_later=True)
    for what, path in (
        ("as JSON Lines", lines),
        ("again, all known", lines),
        ("a casebook, half, all known", other),
    ):
        start = time.perf_counter()
        report = merge_file(book, path, progress=lambda *at: None)
        row(
            f"merge {report.entries} {what}",
            f"{time.perf_counter() - start:.1f} s",
            "15" if report.new else "",
        )


def main() -> None:
    """Make a casebook, measure, and remove it."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--entries", type=int, default=1_000_000)
    parser.add_argument("--folder", type=Path, default=None)
    chosen = parser.parse_args()
    folder = Path(tempfile.mkdtemp(prefix="plateside-bench-", dir=chosen.folder))
    path = folder / "casebook.db"
    try:
        build(path, chosen.entries)
        forget(path)
        start = time.perf_counter()
        open_and_list(path)
        row("open and list 50, cold", f"{1e3 * (time.perf_counter() - start):.1f} ms", "50")
        with open_casebook(path) as book:
            measure_reading(path, book)
            measure_writing(folder, book)
            measure_merging(folder, book, min(100_000, chosen.entries))
        row("most memory used", f"{resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MB")
    finally:
        shutil.rmtree(folder)


if __name__ == "__main__":
    main()
