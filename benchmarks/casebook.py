"""What the casebook costs when it is large.

``python -m benchmarks.casebook [--entries 1000000] [--folder DIR]``

Prints a table of figures beside their targets. The folder should lie on the disk
that is to be judged: a memory disk has no sync to compare with. A million entries
take about five minutes and 2 GB of disk.
"""

from __future__ import annotations

import argparse
import os
import random
import resource
import shutil
import tempfile
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace
from datetime import UTC, datetime, timedelta
from functools import partial
from itertools import cycle
from pathlib import Path

from benchmarks.rows import Row, at_most, middle_and_worst, told
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
LAPTOP = 100_000  # entries that come home at once
SEARCHES = (
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
)
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


def timed(what: str, act: Callable[[], object], times: int = 20, most: float | None = None) -> Row:
    """Return median and worst time of some runs; the median is what is judged."""
    middle, worst = middle_and_worst(act, time.perf_counter, times)
    judged = at_most(what, middle, "ms", most, decimals=2)
    return replace(judged, figure=f"{judged.figure}, worst {worst:.1f}")


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

    took, _ = middle_and_worst(write, time.perf_counter, 200)
    os.close(descriptor)
    path.unlink()
    return took


def build(path: Path, entries: int) -> Row:
    """Make a casebook of so many entries."""
    start = time.perf_counter()
    with open_casebook(path) as book:
        items = (Item("", entry) for entry in entries_of(range(entries // PER_CASE)))
        merge_items(book, items, source="benchmark")
    took = time.perf_counter() - start
    return Row(f"{entries:,} entries made", f"{took:.0f} s, {path.stat().st_size / 1e6:.0f} MB")


def forget(path: Path) -> None:
    """Ask the system to drop the file from its cache."""
    descriptor = os.open(path, os.O_RDONLY)
    os.fsync(descriptor)
    os.posix_fadvise(descriptor, 0, 0, os.POSIX_FADV_DONTNEED)
    os.close(descriptor)


def open_and_list(path: Path) -> None:
    """Do what happens before the first screen."""
    with open_casebook(path) as book:
        assert book.cases()


def opened(path: Path) -> Iterator[Row]:
    """Measure the opening of a casebook that the system does not remember, then of one that it does."""
    forget(path)
    start = time.perf_counter()
    open_and_list(path)
    yield at_most("open and list 50, cold", 1e3 * (time.perf_counter() - start), "ms", 50, decimals=1)
    yield timed("open and list 50, warm", lambda: open_and_list(path), most=50)


def slowest_search(book: Casebook) -> Row:
    """Measure what people type, and return the slowest of it."""
    took = {typed: middle_and_worst(partial(book.search, typed), time.perf_counter, 20) for typed in SEARCHES}
    typed, (middle, worst) = max(took.items(), key=lambda item: item[1][0])
    judged = at_most(f"search, the slowest of {len(took)}: '{typed}'", middle, "ms", 20, decimals=2)
    return replace(judged, figure=f"{judged.figure}, worst {worst:.1f}")


def read(book: Casebook) -> Iterator[Row]:
    """Measure what is asked of a casebook."""
    yield timed("list 50", book.cases, most=20)
    yield slowest_search(book)
    token = book.changed_since(10**9).token
    yield timed("ask for changes", lambda: book.changed_since(token))
    yield timed("machines that begin with M-0", lambda: book.machines("M-0"), most=20)
    yield timed("history of one machine", lambda: book.history("M-0007"), 5)
    yield timed("learned counts of one kind", lambda: book.learned("induction_3ph", 7500.0), 3)
    yield timed("scoreboard", book.scoreboard, 3)


def written(folder: Path, book: Casebook) -> Iterator[Row]:
    """Measure one Enter against one sync of the disk."""
    sync = one_sync(folder)
    cases = cycle([case.id for case in book.cases(limit=200)])
    note = b.Note(text="grease on the drive end")
    append, worst = middle_and_worst(
        lambda: book.record(next(cases), note, person="Ada"), time.perf_counter, 200
    )
    yield at_most("one fdatasync of this disk", sync, "ms", decimals=2)
    yield Row("append to a case of 20", f"{append:.2f} ms, worst {worst:.1f}")
    yield at_most("append, without the sync", append - sync, "ms", decimals=2)
    yield at_most("append, against one fdatasync", append / sync, "x", 2, decimals=2)


def merged(folder: Path, book: Casebook, entries: int) -> Iterator[Row]:
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
        ("a casebook, all known", other),
    ):
        start = time.perf_counter()
        report = merge_file(book, path, progress=lambda *at: None)
        took = time.perf_counter() - start
        most = 15 if report.new and report.entries >= LAPTOP else None
        yield at_most(f"merge {report.entries:,} entries, {what}", took, "s", most, decimals=1)


def rows(folder: Path, entries: int) -> Iterator[Row]:
    """Make a casebook and yield every figure."""
    path = folder / "casebook.db"
    yield build(path, entries)
    yield from opened(path)
    with open_casebook(path) as book:
        yield from read(book)
        yield from written(folder, book)
        yield from merged(folder, book, min(LAPTOP, entries))
    yield at_most("most memory used", resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024, "MB")


def main(words: Sequence[str] | None = None) -> int:
    """Make a casebook, measure, and remove it; return 3 where a target is missed."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks.casebook", description=__doc__)
    parser.add_argument("--entries", type=int, default=1_000_000)
    parser.add_argument("--folder", type=Path, default=None)
    chosen = parser.parse_args(words)
    folder = Path(tempfile.mkdtemp(prefix="plateside-bench-", dir=chosen.folder))
    try:
        return told(rows(folder, chosen.entries))
    finally:
        shutil.rmtree(folder)


if __name__ == "__main__":
    raise SystemExit(main())
