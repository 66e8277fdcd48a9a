"""The printed sheet of one case, as content: what was read, what it means, what was found. No layout."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calc.quantities import MEASURES
from calc.units import find_unit
from tui.answer_text import LEAST_SHOWN, NO_MODEL, NOTHING_FORBIDS, condition
from tui.page_history import charts, trend_sentences
from tui.page_parts import Block, Page, Row, Scale
from tui.words import (
    band_text,
    complaint_name,
    context_text,
    fault_name,
    kind_name,
    measure_name,
    percent,
    plain,
    plate_text,
    question,
    reading_name,
    reading_text,
    stop_words,
)

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from calc.sheet import Reading
    from casebook.fold import Case
    from rules.answer import Band, Diagnosis
    from rules.knowledge import Knowledge
    from tui.curve_pictures import Picture

CONFIRMED = {
    "teardown": "confirmed by teardown",
    "repair": "confirmed by repair",
    "believed": "believed, not confirmed",
}


def sheet_page(
    case: Case,
    diagnosis: Diagnosis,
    knowledge: Knowledge,
    *,
    cases: Sequence[Case] = (),
    curves: Sequence[Picture] = (),
) -> Page:
    """Return the printed sheet of a case; ``cases`` are all of the machine, ``curves`` its own to draw."""
    blocks = [
        Block("Energising", sentences=tuple(_gate(diagnosis))),
        Block("Limits crossed", sentences=tuple(_findings(diagnosis))),
        Block("Read", ("reading", "read", "expected", "noted"), tuple(_readings(case, diagnosis))),
        Block("Seen", sentences=tuple(_seen(case, knowledge))),
        Block("Likely faults", ("odds", "fault", "part"), tuple(_faults(diagnosis, knowledge))),
        Block("Why", sentences=tuple(_reasons(diagnosis))),
        Block("To confirm and to do", sentences=tuple(_to_do(diagnosis, case.machine.kind, knowledge))),
        Block("Found and done", sentences=tuple(_closing(case, knowledge))),
        history_block(case, cases, knowledge),
        Block("Curves", pictures=tuple(curves)),
        Block("Isolation", sentences=tuple(_isolation(case))),
        Block("Cautions", sentences=diagnosis.cautions),
        Block("Remarks", sentences=tuple(_remarks(case, diagnosis, knowledge))),
    ]
    stop = stop_words(case.complaint, knowledge)
    return Page(
        title=f"{case.number}  {case.tag or '(no tag)'}",
        facts=tuple(_facts(case, knowledge)),
        blocks=tuple(filter(None, blocks)),
        warning=f"STOP: {stop}" if stop else "",
    )


def history_block(case: Case, cases: Sequence[Case], knowledge: Knowledge) -> Block:
    """Return how the machine's insulation and windings have read over its cases up to this one."""
    earlier = [one for one in cases if one.opened_utc <= case.opened_utc]
    if not case.tag or not earlier:
        return Block("History")
    sentences = trend_sentences(earlier, tag=case.tag, now=case.last_utc, knowledge=knowledge)
    return Block("History", sentences=tuple(sentences), charts=tuple(charts(earlier, tag=case.tag)))


def shop_tag(case: Case, diagnosis: Diagnosis, knowledge: Knowledge) -> Page:
    """Return the tag that goes with the motor to the repair shop."""
    closed = case.closed.what if case.closed else None
    suspects = [
        fault.name or fault_name(fault.id, knowledge)
        for fault in diagnosis.faults[:2]
        if fault.id != "healthy" and fault.probability >= LEAST_SHOWN
    ]
    found = fault_name(closed.found, knowledge) if closed else ", ".join(suspects)
    how = f" ({CONFIRMED[closed.confirmed]})" if closed else " (suspected)"
    retest = closed.retest if closed else ()
    blocks = [
        Block("Fault", sentences=(found + how,) if found else ()),
        Block("Readings", ("reading", "read", "noted"), tuple(_tag_rows(case))),
        Block("Seen", sentences=tuple(_seen(case, knowledge))),
        Block(
            "Please return with", sentences=tuple(_retest(diagnosis, retest, case.machine.kind, knowledge))
        ),
    ]
    return Page(
        title=f"REPAIR TAG  {case.tag or '(no tag)'}  {case.number}",
        facts=tuple(_facts(case, knowledge)),
        blocks=tuple(filter(None, blocks)),
    )


def _facts(case: Case, knowledge: Knowledge) -> Iterable[tuple[str, str]]:
    """Yield the head of the sheet."""
    yield "Machine", kind_name(case.machine.kind)
    yield "Complaint", complaint_name(case.complaint, knowledge)
    yield "Nameplate", plate_text(case.machine)
    yield "Opened", f"{case.lines[0].entry.time_local:%Y-%m-%d %H:%M} by {case.lines[0].entry.person}"
    closed = case.closed
    yield "Closed", f"{closed.entry.time_local:%Y-%m-%d %H:%M} by {closed.person}" if closed else "open"
    yield "Written by", ", ".join(case.persons)


def _gate(diagnosis: Diagnosis) -> Iterable[str]:
    """Yield the gate: what it needs, what forbids."""
    energise = diagnosis.energise
    is_shut = energise.gate == "shut"
    yield energise.says or ("The gate is shut." if is_shut else NOTHING_FORBIDS)
    marks = {"forbids": "forbids: ", "needed": "still needed: ", "cleared": "cleared: "}
    listed = [line for line in energise.lines if is_shut or line.status == "needed"]
    for line in sorted(listed, key=lambda line: list(marks).index(line.status)):
        because = "" if line.because == line.needs else line.because
        unmet = "not met: " if line.status == "forbids" and because else ""
        yield marks[line.status] + unmet + line.needs + (f" ({because})" if because else "")


def _findings(diagnosis: Diagnosis) -> Iterable[str]:
    for finding in diagnosis.findings:
        yield f"{finding.verdict}: {finding.says}. Source: {finding.source}"


def _readings(case: Case, diagnosis: Diagnosis) -> Iterable[Row]:
    bands = {f"{band.measure}@{band.state}": band for band in diagnosis.expected}
    for logged in case.readings:
        reading, band = logged.what.reading, bands.get(logged.what.reading.key)
        shown = logged.what.expected or (" ".join((band_text(band), condition(band))).strip() if band else "")
        cells = (reading_name(reading), reading_text(reading), shown, context_text(reading))
        yield Row(cells, _scale(reading, band))


def _tag_rows(case: Case) -> Iterable[Row]:
    for logged in case.readings:
        reading = logged.what.reading
        yield Row((reading_name(reading), reading_text(reading), context_text(reading)))


def _scale(reading: Reading, band: Band | None) -> Scale | None:
    """Return a reading beside its band, both in the band's unit."""
    measure = MEASURES.get(reading.measure)
    unit = find_unit(band.unit, dimension=measure.dimension) if band and measure else None
    if band is None or unit is None:
        return None
    read = tuple(
        (value.number - float(unit.offset)) / float(unit.factor) for value in reading.values if value.is_read
    )
    return Scale(low=band.low, high=band.high, read=read) if read else None


def _seen(case: Case, knowledge: Knowledge) -> Iterable[str]:
    for name, answer in case.observations.items():
        yield f"{question(name, knowledge)}: {'yes' if answer else 'no'}"


def _faults(diagnosis: Diagnosis, knowledge: Knowledge) -> Iterable[Row]:
    for fault in diagnosis.faults[:5]:
        if fault.probability < LEAST_SHOWN:
            return
        yield Row((percent(fault.probability), fault.name or fault_name(fault.id, knowledge), fault.part))


def _reasons(diagnosis: Diagnosis) -> Iterable[str]:
    if not diagnosis.faults:
        yield NO_MODEL
        return
    for reason in sorted(diagnosis.faults[0].reasons, key=lambda reason: -abs(reason.weight))[:5]:
        yield f"{'for' if reason.weight >= 0 else 'against'}: {reason.text}"


def _to_do(diagnosis: Diagnosis, kind: str, knowledge: Knowledge) -> Iterable[str]:
    """Yield how the first suspect is confirmed and mended, and what must be shown and read again after."""
    first = diagnosis.faults[0].id.split("+") if diagnosis.faults else []
    for fault in first:
        known = knowledge.faults.get(fault)
        if known is None or fault == "healthy":
            continue
        yield from (text for text in (known.confirm, known.remedy) if text)
        lines = (knowledge.gates[name] for name in known.before_energising if name in knowledge.gates)
        yield from (f"before it is energised: {one.name}" for one in lines if {kind, "any"} & set(one.kinds))
    yield from (f"read again after repair: {text}" for text in _retest(diagnosis, (), kind, knowledge))


def _retest(diagnosis: Diagnosis, named: Sequence[str], kind: str, knowledge: Knowledge) -> list[str]:
    """Return the readings to repeat after repair, in words."""
    first = diagnosis.faults[0].id.split("+") if diagnosis.faults else []
    keys = named or [
        key
        for fault in first
        if fault in knowledge.faults
        for key in knowledge.faults[fault].for_kind(kind).retest
    ]
    words = []
    for key in dict.fromkeys(keys):
        measure, _, state = key.partition("@")
        words.append(f"{measure_name(measure)}, {plain(state)}" if state else plain(key))
    return words


def _closing(case: Case, knowledge: Knowledge) -> Iterable[str]:
    """Yield what was concluded, found and done."""
    for repair in case.repairs:
        yield f"done: {repair.what.done}" + (
            f"; parts: {', '.join(repair.what.parts)}" if repair.what.parts else ""
        )
    if case.closed is None:
        if case.conclusion is not None:
            yield f"concluded: {fault_name(case.conclusion.what.fault, knowledge)}"
        return
    closed = case.closed.what
    yield f"found: {fault_name(closed.found, knowledge)} ({CONFIRMED[closed.confirmed]})"
    if closed.done:
        yield f"done: {closed.done}"
    if closed.parts:
        yield f"parts: {', '.join(closed.parts)}"
    for taken in closed.retested:
        band = f"; expected {taken.expected}" if taken.expected else ""
        yield f"re-test: {reading_name(taken.reading)}: {reading_text(taken.reading)}{band}"
    if closed.minutes is not None:
        yield f"minutes: {closed.minutes:g}"
    if closed.note:
        yield closed.note


def _isolation(case: Case) -> Iterable[str]:
    """Yield every isolation record with its person and time."""
    for logged in case.isolation:
        record = logged.what
        said = [
            text
            for told, text in ((record.locked_out, "locked out"), (record.proved_dead, "proved dead"))
            if told
        ]
        points = f" at {record.points}" if record.points else ""
        act = "isolated" if record.isolated else "isolation lifted"
        yield f"{logged.entry.time_local:%Y-%m-%d %H:%M} {record.by}: {', '.join([act + points, *said])}"


def _remarks(case: Case, diagnosis: Diagnosis, knowledge: Knowledge) -> Iterable[str]:
    yield from diagnosis.plate_remarks
    yield from (slip.text for slip in diagnosis.slips)
    yield from diagnosis.notes
    yield from knowledge.loosened
    yield from (f"{logged.person}: {logged.what.text}" for logged in case.notes)
