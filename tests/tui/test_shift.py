"""What a new shift may not stand on: an isolation that lapsed, entries that cleared the gate long ago."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta

import msgspec

from calc.sheet_io import read_sheet
from casebook import bodies
from rules.gate import gate
from tui.compose import Visit
from tui.shift import gate_now, recent_sheet

NOW = datetime.now(UTC)
PROVED = bodies.Isolation(by="Ines", locked_out=True, proved_dead=True)


def visit_of(book, knowledge, sheet, *, hours_ago=0.0):
    at = NOW - timedelta(hours=hours_ago)
    case = book.log_sheet(read_sheet(sheet("pump_overload")), "Ines", at=at)
    return Visit(book, case, person="Ines", knowledge=knowledge)


def test_an_isolation_record_holds_within_the_shift(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet)
    visit.isolate(PROVED)
    assert (visit.wants_first("isolated", ()), visit.isolation_lapse) == ("", "")


def test_a_reading_with_power_on_makes_the_isolation_void(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet)
    visit.isolate(PROVED)
    visit.record(visit.understand("insulation_resistance", "isolated", "350 at 24"))
    assert visit.wants_first("isolated", ()) == ""
    visit.record(visit.understand("line_current", "loaded", "15 15 15"))
    assert visit.wants_first("isolated", ()) == "isolation"
    assert "loaded" in visit.isolation_lapse


def test_a_repair_makes_the_isolation_void(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet)
    visit.isolate(PROVED)
    book.record(visit.case.id, bodies.Repaired(done="new bearings"), person="Ines")
    visit.refresh()
    assert visit.wants_first("isolated", ()) == "isolation"


def test_an_isolation_record_of_the_shift_before_is_void(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet, hours_ago=14)
    book.record(visit.case.id, PROVED, person="Ines", at=NOW - timedelta(hours=13))
    visit.refresh()
    assert visit.wants_first("isolated", ()) == "isolation"
    assert "13 h old" in visit.isolation_lapse


def test_a_lifted_isolation_is_asked_for_again(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet)
    visit.isolate(PROVED)
    visit.lift()
    assert visit.wants_first("isolated", ()) == "isolation"


def cleared(book, knowledge, sheet, *, hours_ago):
    """A case after a repair, everything that its gate asks for read and answered some hours ago."""
    one = msgspec.structs.replace(read_sheet(sheet("pump_overload")), complaint="after_repair", readings=())
    at = NOW - timedelta(hours=hours_ago)
    case = book.log_sheet(one, "Ines", at=at)
    visit = Visit(book, case, person="Ines", knowledge=knowledge)
    ohm = next(band.mid for band in visit.weigh().diagnosis.expected if band.measure == "winding_resistance")
    typed = {"insulation_resistance@isolated": "900", "winding_resistance@isolated": f"{ohm:.3f} " * 3}
    for key, text in typed.items():
        reading = visit.understand(*key.split("@"), text).reading
        book.record(case, bodies.ReadingTaken(reading=reading), person="Ines", at=at)
    for _ in range(10):
        visit.refresh()
        state = gate(visit.case.sheet, knowledge)
        for ask in dict.fromkeys(ask for one in state.shut for ask in one.wants):
            book.record(case, bodies.Observed(observation=ask, answer=True), person="Ines", at=at)
    visit.refresh()
    return visit


def lines_of(state, status):
    return {line.id for line in state.energise.lines if line.status == status}


def test_what_cleared_the_gate_in_an_earlier_shift_is_asked_for_again(book, knowledge, sheet):
    fresh = cleared(book, knowledge, sheet, hours_ago=1)
    stale = cleared(book, knowledge, sheet, hours_ago=20)
    now = gate_now(fresh.case, knowledge, suspects={})
    later = gate_now(stale.case, knowledge, suspects={})
    reopened = lines_of(now, "cleared") & lines_of(later, "needed")
    assert reopened
    assert now.energise.gate == "no_finding_forbids"
    assert later.energise.gate == "shut"
    said = [line.because for line in later.energise.lines if line.id in reopened]
    assert any("20 h ago" in text for text in said)
    assert stale.weigh().diagnosis.energise.gate == "shut"
    asked = {ask for one in later.shut for ask in one.wants}
    assert stale.weigh().diagnosis.next[0].key in asked


def test_what_forbids_never_grows_old(book, knowledge, sheet):
    visit = cleared(book, knowledge, sheet, hours_ago=40)
    low = visit.understand("insulation_resistance", "isolated", "0.4").reading
    book.record(visit.case.id, bodies.ReadingTaken(reading=low), person="Ines", at=NOW - timedelta(hours=39))
    visit.refresh()
    assert lines_of(gate_now(visit.case, knowledge, suspects={}), "forbids")


def test_an_isolation_record_from_before_the_clock_was_set_back_is_void(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet, hours_ago=-26.0)
    book.record(visit.case.id, PROVED, person="Ines", at=NOW + timedelta(hours=26))
    visit.refresh()
    assert visit.wants_first("isolated", ()) == "isolation"
    assert visit.isolation_lapse == "void: it is dated 26 h ahead of this clock, isolate and prove it anew"


def test_a_clock_that_differs_by_minutes_voids_nothing(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet)
    book.record(visit.case.id, PROVED, person="Ines", at=NOW + timedelta(minutes=9))
    visit.refresh()
    assert visit.wants_first("isolated", ()) == ""


def test_what_cleared_the_gate_before_the_clock_was_set_back_is_asked_for_again(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet, hours_ago=-30.0)
    later = NOW + timedelta(hours=30)
    for measure, text in (("insulation_resistance", "350 at 24"), ("winding_resistance", "1.9 1.9 1.9")):
        taken = visit.understand(measure, "isolated", text)
        body = bodies.ReadingTaken(reading=taken.reading)
        book.record(visit.case.id, body, person="Ines", at=later)
    visit.refresh()
    read = {"insulation_to_earth", "winding_balanced"}
    assert read <= cleared_lines(visit, knowledge, later)
    assert not read & cleared_lines(visit, knowledge, NOW)
    again = gate_now(visit.case, knowledge, suspects={}, now=NOW)
    assert any("dated ahead of this clock" in line.because for line in again.energise.lines)


def cleared_lines(visit, knowledge, now):
    """The lines of the gate that are cleared at a moment."""
    lines = gate_now(visit.case, knowledge, suspects={}, now=now).energise.lines
    return {line.id for line in lines if line.status == "cleared"}


def test_a_repair_stands_after_what_the_log_has_before_it_whatever_the_clock_says(book, knowledge, sheet):
    visit = visit_of(book, knowledge, sheet, hours_ago=2.0)
    taken = visit.understand("insulation_resistance", "isolated", "350 at 24")
    body = bodies.ReadingTaken(reading=taken.reading)
    book.record(visit.case.id, body, person="Ines", at=NOW - timedelta(hours=1))
    book.record(
        visit.case.id, bodies.Repaired(done="new bearings"), person="Ines", at=NOW - timedelta(hours=3)
    )
    visit.refresh()
    assert "insulation_resistance@isolated" not in {r.key for r in recent_sheet(visit.case, NOW).readings}
