"""One answer as text for people: about forty lines of eighty columns, what forbids first."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calc.quantities import STATES
from tui.columns import columns, paragraph
from tui.words import (
    fault_name,
    heading,
    key_words,
    measure_name,
    number,
    percent,
    plain,
    question,
    stop_words,
)

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from calc.sheet import CaseSheet
    from rules.answer import Band, Diagnosis, Energise, FaultOdds, Finding, NextItem
    from rules.knowledge import Knowledge

FAULTS_SHOWN, REASONS_SHOWN, FINDINGS_SHOWN, CAUTIONS_SHOWN = 4, 3, 3, 2
NEXT_SHOWN = 3  # what to read next: the first in full, the others by name
FORBIDS_SHOWN, GATE_SHOWN = 3, 4  # lines of the gate: what forbids, and with what is needed
LEAST_SHOWN = 0.01  # odds of a fault that is still listed
LEAST_WITHIN = 0.05  # odds of a cause inside it
NOTHING_FORBIDS = "no recorded finding forbids energising; site rules and licensed practice decide"
NOTHING_LEFT = "nothing that is left to read is worth its minutes"
NO_CHOICE = "without a model nothing can be chosen; what the gate needs comes first"
NO_MODEL = "this machine kind has no model yet: limits, findings and the gate only"


def answer_lines(diagnosis: Diagnosis, sheet: CaseSheet, knowledge: Knowledge) -> list[str]:
    """Return the whole answer for one sheet."""
    return [
        *paragraph(heading(sheet, knowledge)),
        *stop_lines(sheet, knowledge),
        *gate_lines(diagnosis.energise),
        *titled("Limits crossed", finding_lines(diagnosis.findings)),
        *titled("Likely faults", fault_lines(diagnosis, knowledge)),
        *titled(
            "Next", next_lines(diagnosis.next, knowledge) if diagnosis.faults else item_lines([NO_CHOICE])
        ),
        *titled("What would turn it", item_lines(turn.text for turn in diagnosis.turns[:1])),
        *titled("Check the entry", item_lines(slip.text for slip in diagnosis.slips)),
        *titled("Nameplate", item_lines(diagnosis.plate_remarks)),
        *titled("Cautions", item_lines(other_cautions(diagnosis, knowledge))),
        *titled("Note", item_lines((*diagnosis.notes, *knowledge.loosened))),
    ]


def other_cautions(diagnosis: Diagnosis, knowledge: Knowledge) -> list[str]:
    """Return cautions that do not stand with the next reading already; those of the ones after it first."""
    told = hazard_texts(diagnosis.next[0].hazards, knowledge) if diagnosis.next else []
    after = [hazard for item in diagnosis.next[1:NEXT_SHOWN] for hazard in item.hazards]
    texts = [*hazard_texts(after, knowledge), *diagnosis.cautions]
    return _unique(text for text in texts if text not in told)[:CAUTIONS_SHOWN]


def hazard_texts(hazards: Iterable[str], knowledge: Knowledge) -> list[str]:
    """Return the precaution of each hazard."""
    known = knowledge.hazards
    return [known[one].precaution if one in known else plain(one) for one in hazards]


def stop_lines(sheet: CaseSheet, knowledge: Knowledge) -> list[str]:
    """Return what comes before everything else where the complaint means stop."""
    first = stop_words(sheet.complaint, knowledge)
    return paragraph(first, first="STOP  ") if first else []


def gate_lines(energise: Energise) -> list[str]:
    """Return the gate: shut and what it still needs, or that nothing recorded forbids."""
    is_shut = energise.gate == "shut"
    says = energise.says or ("The gate is shut." if is_shut else NOTHING_FORBIDS)
    shown = paragraph(says, first="Energising: ")
    forbids = _unique(
        line.because or line.needs for line in energise.lines if is_shut and line.status == "forbids"
    )
    needs = _unique(line.needs for line in energise.lines if line.status == "needed")
    for text in forbids[:FORBIDS_SHOWN]:
        shown += paragraph(text, first="  forbids  ")
    room = GATE_SHOWN - min(len(forbids), FORBIDS_SHOWN)
    for text in needs[:room]:
        shown += paragraph(text, first="  needs    ")
    return shown + _more([*forbids[FORBIDS_SHOWN:], *needs[room:]], 0)


def finding_lines(findings: Sequence[Finding]) -> list[str]:
    """Return each published limit that is crossed, with its source."""
    shown: list[str] = []
    for finding in findings[:FINDINGS_SHOWN]:
        shown += paragraph(f"{finding.says}; source: {finding.source}", first=f"  {finding.verdict:<6}  ")
    return shown + _more(findings, FINDINGS_SHOWN)


def fault_lines(diagnosis: Diagnosis, knowledge: Knowledge) -> list[str]:
    """Return the likely faults with their odds, the first with its strongest reasons."""
    if not diagnosis.faults:
        return item_lines([NO_MODEL])
    first, *others = diagnosis.faults[:FAULTS_SHOWN]
    shown = [*_odds_line(first, knowledge), *within_lines(first, knowledge), *reason_lines(first)]
    for fault in others:
        if fault.probability >= LEAST_SHOWN:
            shown += _odds_line(fault, knowledge)
    return shown


def within_lines(fault: FaultOdds, knowledge: Knowledge) -> list[str]:
    """Return the likeliest causes inside a fault."""
    inner = [part for part in fault.within if part.probability >= LEAST_WITHIN][:REASONS_SHOWN]
    names = [
        f"{part.name or fault_name(part.id, knowledge)} {percent(part.probability).strip()}" for part in inner
    ]
    return paragraph(", ".join(names), first="         of it: ") if names else []


def reason_lines(fault: FaultOdds, *, most: int = REASONS_SHOWN) -> list[str]:
    """Return what speaks loudest for (+) and against (-) a fault."""
    strongest = sorted(fault.reasons, key=lambda reason: -abs(reason.weight))[:most]
    lines: list[str] = []
    for reason in strongest:
        lines += paragraph(reason.text, first=f"         {'+' if reason.weight >= 0 else '-'} ")
    return lines


def next_lines(items: Sequence[NextItem], knowledge: Knowledge) -> list[str]:
    """Return the next reading with its leads and hazards, and the two after it by name."""
    if not items:
        return item_lines([NOTHING_LEFT])
    first, *others = items
    minutes = f" ({first.minutes:g} min)" if first.minutes else ""
    shown = paragraph(f"{item_name(first, knowledge)}{minutes}", first="  ")
    for mark, text in (
        ("how     ", first.leads),
        ("why     ", first.why),
        ("expect  ", first.expect),
        ("sees    ", first.sees),
    ):
        shown += paragraph(text, first=f"    {mark}") if text else []
    for text in hazard_texts(first.hazards, knowledge):
        shown += paragraph(text, first="    hazard  ")
    then = "; ".join(item_name(item, knowledge) for item in others[: NEXT_SHOWN - 1])
    return shown + (paragraph(then, first="  then: ") if then else [])


def item_name(item: NextItem, knowledge: Knowledge) -> str:
    """Return an item of what to read next in words."""
    return question(item.observation, knowledge) if item.observation else key_words(item.key, knowledge)


def band_lines(bands: Sequence[Band]) -> list[str]:
    """Return bands as one table per state, in the order of a visit: at rest, starting, running."""
    lines: list[str] = []
    for state, meaning in STATES.items():
        rows = [_band_row(band) for band in bands if band.state == state]
        head = ("", "low", "middle", "high", "unit", "at")
        lines += titled(
            f"{plain(state)}: {meaning}", columns(rows, head=head, right=(1, 2, 3)) if rows else []
        )
    return lines


def _band_row(band: Band) -> list[str]:
    """Return one band as cells."""
    numbers = [number(value) for value in (band.low, band.mid, band.high)]
    return [measure_name(band.measure), *numbers, band.unit, condition(band)]


def condition(band: Band) -> str:
    """Return the condition that a band is for."""
    parts = [f"{band.temperature_c:g} degC"] if band.temperature_c is not None else []
    return ", ".join(parts + ([f"{band.speed_rpm:g} rpm"] if band.speed_rpm is not None else []))


def item_lines(texts: Iterable[str]) -> list[str]:
    """Return sentences, each indented and wrapped."""
    return [line for text in texts for line in paragraph(text, first="  ", rest="    ")]


def titled(title: str, lines: list[str]) -> list[str]:
    """Return a titled block; nothing where it would be empty."""
    return [title, *lines] if lines else []


def _odds_line(fault: FaultOdds, knowledge: Knowledge) -> list[str]:
    """Return a fault with its odds."""
    return paragraph(fault.name or fault_name(fault.id, knowledge), first=f"  {percent(fault.probability)}  ")


def _unique(texts: Iterable[str]) -> list[str]:
    """Return texts in their order, each once."""
    return list(dict.fromkeys(texts))


def _more(items: Sequence[object], shown: int) -> list[str]:
    """Say how many were left out."""
    return [f"  and {len(items) - shown} more"] if len(items) > shown else []
