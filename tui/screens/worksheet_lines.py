"""The blocks of the worksheet as ruled lines: machine, gate, limits, faults, readings, next.

Each function returns every line that there is to say, the most needed first;
``worksheet_room`` then gives each block its part of the screen.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

import msgspec

from calc.quantities import MEASURES
from calc.units import find_unit
from rules.findings import findings
from tui.answer_text import NOTHING_FORBIDS, NOTHING_LEFT
from tui.look import FAINT, STOP, STRONG, VERDICT_STYLE, VERDICT_WORD, WATCH
from tui.widgets.ruled import INDENT, pad, row, rows, tagged
from tui.widgets.scale import WIDTH as SCALE_WIDTH
from tui.widgets.scale import scale, side
from tui.words import (
    complaint_name,
    fault_name,
    key_words,
    number,
    percent,
    plain,
    question,
    reading_text,
    stop_words,
)

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from textual.content import Content

    from calc.sheet import CaseSheet, Reading
    from rules.answer import Band, Diagnosis, FaultOdds, Finding, NextItem
    from rules.knowledge import Knowledge

NARROW, WIDE = 60, 110  # below: no room for bars and scales; from the second on: room for bands
BAR: Final = 8
WIDE_BAR: Final = 24
MOVE_ROOM, WIDE_MOVE_ROOM = 10, 14
MOVED: Final = 0.015
"""A move of the odds that is worth a word."""
FAULTS: Final = 6
WIDE_FAULTS: Final = 10
LEAST: Final = 0.015
"""Odds below this are not worth a line."""
MARGIN_STATE: Final = {"light_load": "light ld", "no_load": "no load"}


def machine_lines(sheet: CaseSheet, number: str, knowledge: Knowledge, room: int) -> list[Content]:
    """Return tag, plate, how it stands, and the complaint."""
    machine, plate = sheet.machine, sheet.machine.nameplate
    shown = [
        value.text for name in ("power", "voltage", "current", "speed") if (value := getattr(plate, name))
    ]
    stands = [plain(word) for word in (plate.connection, machine.starter, machine.load_type) if word]
    what = complaint_name(sheet.complaint, knowledge)
    text = f"{' '.join(shown)}{', ' if stands and shown else ''}{', '.join(stands)}" or "no plate"
    word, text = tagged(machine.tag or "", text)
    tail = f"{what}   {number}"
    gap = room - INDENT - len(text) - len(tail)
    if gap >= 2:
        return [row(word, text, " " * gap, (tail, STRONG))]
    return [
        row(word, pad(text, room - INDENT)),
        row("", (pad(tail, room - INDENT), STRONG)),
    ]


def stop_lines(sheet: CaseSheet, knowledge: Knowledge, room: int) -> list[Content]:
    """Return what comes before everything else where the complaint means stop."""
    first = stop_words(sheet.complaint, knowledge)
    return rows("STOP", first, room, style=STOP, most=2) if first else []


def gate_lines(diagnosis: Diagnosis, room: int) -> list[Content]:
    """Return the gate: shut with what forbids and what is needed, or that nothing recorded forbids."""
    energise = diagnosis.energise
    if energise.gate != "shut":
        return rows("gate", energise.says or NOTHING_FORBIDS, room, most=2)
    forbids = [line.because or line.needs for line in energise.lines if line.status == "forbids"]
    needs = [line.needs for line in energise.lines if line.status == "needed"] or list(energise.needs)
    if forbids:
        return rows("gate", f"SHUT by: {'; '.join(dict.fromkeys(forbids))}", room, style=STOP, most=4)
    return rows("gate", f"SHUT. Needed: {'; '.join(needs)}", room, style=STRONG, most=4)


def finding_lines(diagnosis: Diagnosis, knowledge: Knowledge, room: int) -> list[Content]:
    """Return crossed limits, likely slips, and what a shop's own rules have loosened."""
    order = {"stop": 0, "watch": 1, "remark": 2}
    lines: list[Content] = []
    for finding in sorted(diagnosis.findings, key=lambda finding: order[finding.verdict]):
        text = f"{VERDICT_WORD[finding.verdict]}: {finding.says} ({finding.source})"
        lines += rows("limit", text, room, style=VERDICT_STYLE[finding.verdict], most=2)
    for slip in diagnosis.slips:
        lines += rows("check", slip.text, room, style=WATCH, most=2)
    for loosened in knowledge.loosened:
        lines += rows("rules", f"LOOSENED: {loosened}", room, style=WATCH, most=2)
    return lines


def fault_lines(
    diagnosis: Diagnosis, moved: Mapping[str, float], knowledge: Knowledge, room: int
) -> list[Content]:
    """Return the likely faults: name, a bar, the odds, and how they moved."""
    if diagnosis.model == "none":
        return rows("faults", "this kind of machine has no model yet: limits and gate only", room)
    most = WIDE_FAULTS if room >= WIDE else FAULTS
    likely = [fault for fault in diagnosis.faults if fault.probability >= LEAST] or list(diagnosis.faults[:1])
    likely = likely[:most]
    words = ["faults", *[""] * (len(likely) - 1)]
    return [
        _fault_line(fault, moved.get(fault.id, 0.0), knowledge, room, word)
        for fault, word in zip(likely, words, strict=False)
    ]


def _fault_line(fault: FaultOdds, moved: float, knowledge: Knowledge, room: int, word: str) -> Content:
    """Return one fault in one line."""
    wide = room >= WIDE
    bar_room, move_room = (WIDE_BAR, WIDE_MOVE_ROOM) if wide else (BAR, MOVE_ROOM)
    if room < NARROW:
        bar_room, move_room = 0, 0
    bar = round(fault.probability * bar_room)
    move = ""
    if abs(moved) >= MOVED:
        way = ("up " if moved > 0 else "down ") if wide else ""
        move = f"{way}from {percent(fault.probability - moved).strip()}"
    name_room = room - INDENT - bar_room - move_room - 8
    name = fault.name or fault_name(fault.id, knowledge)
    return row(
        word,
        (pad(name, name_room), STRONG if word else ""),
        " ",
        "=" * bar,
        ("." * (bar_room - bar), FAINT),
        f" {percent(fault.probability)} ",
        (pad(move, move_room), FAINT),
    )


@dataclass(frozen=True)
class Read:
    """A reading with the band and the findings that concern it."""

    reading: Reading
    band: Band | None
    findings: tuple[Finding, ...]


def readings_of(sheet: CaseSheet, diagnosis: Diagnosis, knowledge: Knowledge) -> list[Read]:
    """Return the readings, newest first, each with its band."""
    out = []
    for reading in reversed(sheet.readings):
        bands = [
            band
            for band in diagnosis.expected
            if (band.measure, band.state) == (reading.measure, reading.state)
        ]
        out.append(Read(reading, bands[0] if bands else None, _about(reading, sheet, diagnosis, knowledge)))
    return out


def _about(
    reading: Reading, sheet: CaseSheet, diagnosis: Diagnosis, knowledge: Knowledge
) -> tuple[Finding, ...]:
    """Return the findings on one reading; where it was read more than once, on this time alone."""
    crossed = diagnosis.findings
    alone = tuple(one for one in sheet.readings if one is reading or one.key != reading.key)
    if len(alone) < len(sheet.readings):
        crossed = findings(msgspec.structs.replace(sheet, readings=alone), knowledge)
    return tuple(finding for finding in crossed if finding.about in {reading.key, reading.measure})


def reading_lines(reads: Sequence[Read], room: int) -> list[Content]:
    """Return one line per reading: state, measure, values, scale, and in a word where it lies."""
    lines = []
    last = ""
    for read in reads:
        state = read.reading.state
        word = MARGIN_STATE.get(state, state) if state != last else ""
        lines.append(_reading_line(read, word, room))
        last = state
    return lines


def _reading_line(read: Read, word: str, room: int) -> Content:
    """Return one reading in one line."""
    wide = room >= WIDE
    name_room, value_room = (31, 24) if wide else (21, 18)
    values = reading_text(read.reading).replace(" / ", " ")
    verdict, style = _verdict(read)
    if room < NARROW:
        left = room - INDENT - len(verdict) - 1
        name_room = left - len(values) - 1
        name = f"{pad(plain(read.reading.measure), name_room)} " if name_room > 1 else ""
        return row(word, pad(name + values, left), " ", (verdict, style))
    rest = room - INDENT - name_room - value_room - SCALE_WIDTH - 3
    names = plain(read.reading.measure).replace("insulation resistance", "insulation")
    band = ""
    if wide and read.band:
        band = pad(
            f"{band_number(read.band.low)} to {band_number(read.band.high)} {read.band.unit}", rest - 12
        )
    return row(
        word,
        pad(names, name_room),
        " ",
        pad(values, value_room, right=True),
        " ",
        _scale_text(read),
        " ",
        (pad(verdict, 11 if wide else rest), style),
        band,
    )


def _scale_text(read: Read) -> str:
    """Return the scale of a reading; blank where no band is known."""
    if read.band is None:
        return " " * SCALE_WIDTH
    return scale(in_unit(read.reading, read.band.unit), read.band.low, read.band.high)


def _verdict(read: Read) -> tuple[str, str]:
    """Return in a word where a reading lies, and its style."""
    for verdict in ("stop", "watch"):
        if any(finding.verdict == verdict for finding in read.findings):
            return VERDICT_WORD[verdict], VERDICT_STYLE[verdict]
    if any(value.kind == "open" for value in read.reading.values):
        return "open", STRONG
    if read.band is None:
        return "no band", FAINT
    numbers = in_unit(read.reading, read.band.unit)
    below, above = side(numbers, read.band.low, read.band.high)
    if not below and not above:
        return "inside", ""
    if below and above:
        return "apart", STRONG
    which, word = (below, "low") if below else (above, "high")
    known = sum(not math.isnan(number) for number in numbers)
    return (word if len(which) == known else f"{','.join(str(i + 1) for i in which)} {word}"), STRONG


def in_unit(reading: Reading, unit: str) -> tuple[float, ...]:
    """Return the numbers of a reading in another unit of its dimension."""
    measure = MEASURES.get(reading.measure)
    known = find_unit(unit, dimension=measure.dimension) if measure and unit else None
    if known is None:
        return reading.numbers
    return tuple((number - float(known.offset)) / float(known.factor) for number in reading.numbers)


def band_number(value: float) -> str:
    """Return a number of a band with three digits."""
    return number(value) if math.isfinite(value) else "open"


def next_lines(
    item: NextItem | None, first: tuple[str, str], knowledge: Knowledge, room: int
) -> list[Content]:
    """Return the reading to take: what, state, leads, why; ``first``, in its style, comes before it."""
    if item is None:
        return rows("next", NOTHING_LEFT, room)
    name = question(item.observation, knowledge) if item.observation else key_words(item.key, knowledge)
    minutes = f"{item.minutes:g} min" if item.minutes else ""
    name_room = room - INDENT - len(minutes) - 1
    lines = [row("next", (pad(name, name_room), STRONG), " ", minutes)]
    if first[0]:
        lines += rows("first", first[0], room, style=first[1], most=2)
    if item.leads:
        lines += rows("leads", item.leads, room, most=4)
    if item.expect:
        lines += rows("expect", item.expect, room, most=2)
    if item.hazards:
        names = [knowledge.hazards[h].name if h in knowledge.hazards else plain(h) for h in item.hazards]
        lines += rows("hazards", "; ".join(names), room, most=1)
    if item.sees:
        lines += rows("meter", item.sees, room, most=2)
    if item.why:
        lines += rows("because", item.why, room, most=2)
    return lines
