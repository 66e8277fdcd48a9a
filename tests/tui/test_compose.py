"""A visit without a terminal: every entry is on disk when the call returns."""

import msgspec
import pytest

from calc.errors import InputError
from calc.sheet_io import read_sheet, sheet_from_plain
from casebook import bodies
from casebook.book import open_casebook
from rules.answer import Diagnosis, FaultOdds
from tui.compose import Visit, moved


@pytest.fixture
def visit(book, knowledge, sheet):
    bare = msgspec.structs.replace(read_sheet(sheet("pump_overload")), readings=(), observations={})
    return Visit.new(book, bare, person="Ines", knowledge=knowledge)


def on_disk(casebook, visit):
    """Read the case as another process would."""
    with open_casebook(casebook, read_only=True) as other:
        return other.case(visit.case.id)


ISOLATED = bodies.Isolation(by="Ines", locked_out=True, proved_dead=True)


def test_a_reading_is_on_disk_when_record_returns(visit, casebook):
    visit.record(visit.understand("line_current", "loaded", "18.9 19.3 19.0"))
    (logged,) = on_disk(casebook, visit).readings
    assert logged.what.reading.numbers == (18.9, 19.3, 19.0)
    assert logged.person == "Ines"


def test_what_is_understood_is_not_stored(visit, casebook):
    understood = visit.understand("line_current", "loaded", "18.9 19.3 19.0")
    assert "L1 18.9 A, L2 19.3 A, L3 19.0 A" in understood.echo
    assert on_disk(casebook, visit).readings == ()


def test_a_bare_number_beside_a_reading_gets_its_unit(visit):
    understood = visit.understand(
        "winding_resistance", "isolated", "1.91 1.92 1.90", temperature="24", method="four_wire"
    )
    assert understood.reading.temperature.text == "24 degC"
    assert understood.reading.method == "four_wire"


def test_a_slip_of_the_decimal_point_is_asked_about_and_marked_when_it_is_so(visit):
    understood = visit.understand("supply_voltage", "loaded", "4016 4000 4010")
    assert "400 V" in understood.asks
    assert understood.reading.note == "checked"


@pytest.mark.parametrize("text", ["", "1.9", "a b c", "- - -", "nan 1 2", "-3 1 2"])
def test_what_is_no_reading_is_refused_with_what_is_allowed(visit, text):
    with pytest.raises(InputError) as refused:
        visit.understand("line_current", "loaded", text)
    assert refused.value.problems[0].allowed


def test_the_band_that_was_shown_is_kept_with_the_reading(visit, casebook):
    band = next(
        b for b in visit.weigh().diagnosis.expected if (b.measure, b.state) == ("line_current", "no_load")
    )
    visit.record(visit.understand("line_current", "no_load", "6.8 6.9 6.8"))
    (logged,) = on_disk(casebook, visit).readings
    assert logged.what.expected.endswith("A (90 %)")
    assert logged.what.expected.startswith(f"{band.low:#.3g}")


def test_the_limit_that_a_reading_crosses_is_kept_with_its_source(visit, casebook):
    visit.record(visit.understand("insulation_resistance", "isolated", "0.3M", temperature="24"))
    (logged,) = on_disk(casebook, visit).readings
    assert logged.what.limit
    assert logged.what.source


def test_the_odds_move_with_a_reading_and_the_moves_cancel_out(visit):
    visit.weigh()
    visit.record(visit.understand("line_current", "loaded", "22.4 22.1 22.6"))
    weighed = visit.weigh()
    assert weighed.moved[weighed.diagnosis.faults[0].id] > 0.1
    assert sum(weighed.moved.values()) == pytest.approx(0.0, abs=1e-6)


def test_a_note_does_not_move_the_odds(visit):
    before = visit.weigh()
    visit.note("the guard is bent")
    assert visit.weigh() is before


def test_what_was_not_there_before_counts_as_moved_from_nothing():
    before = Diagnosis(faults=(FaultOdds(id="overload", probability=1.0),))
    now = Diagnosis(
        faults=(FaultOdds(id="overload", probability=0.4), FaultOdds(id="turn_short", probability=0.6))
    )
    assert moved(before, now) == pytest.approx({"overload": -0.6, "turn_short": 0.6})


def test_an_isolated_reading_wants_the_isolation_record_first(visit):
    assert visit.wants_first("isolated", ()) == "isolation"
    visit.isolate(ISOLATED)
    assert visit.wants_first("isolated", ()) == ""


def test_a_record_that_does_not_say_proved_dead_is_not_enough(visit):
    visit.isolate(bodies.Isolation(by="Ines", locked_out=True))
    assert visit.wants_first("isolated", ()) == "isolation"


def test_isolation_that_was_lifted_no_longer_holds(visit):
    visit.isolate(ISOLATED)
    visit.isolate(bodies.Isolation(by="Ines", isolated=False))
    assert visit.wants_first("isolated", ()) == "isolation"


def test_hazards_are_acknowledged_once_per_state(visit):
    assert visit.wants_first("loaded", ("live_parts",)) == "acknowledge"
    visit.acknowledge("loaded", ("live_parts",), "Live parts.")
    assert visit.wants_first("loaded", ("live_parts",)) == ""
    assert visit.wants_first("loaded", ("live_parts", "rotating_parts")) == "acknowledge"
    assert visit.wants_first("no_load", ("live_parts",)) == "acknowledge"


def test_a_corrected_reading_replaces_the_first_and_both_stay_in_the_log(visit, casebook):
    entry = visit.record(visit.understand("line_current", "loaded", "18.9 19.3 91.0"))
    visit.correct(entry, visit.understand("line_current", "loaded", "18.9 19.3 19.0"), why="digits swapped")
    case = on_disk(casebook, visit)
    assert case.readings[0].what.reading.numbers == (18.9, 19.3, 19.0)
    assert len([line for line in case.lines if line.entry.kind in {"reading", "correction"}]) == 2


def test_what_can_be_corrected_is_listed_newest_first(visit):
    visit.record(visit.understand("line_current", "loaded", "18.9 19.3 19.0"))
    visit.observe("hums", True)
    assert [key for _, key, _ in visit.correctable()] == ["hums", "line_current@loaded"]


def test_closing_keeps_what_the_screen_said(visit, casebook):
    first = visit.weigh().diagnosis.faults[0]
    visit.close(bodies.Closed(found="overload", confirmed="repair"))
    case = on_disk(casebook, visit)
    assert case.status == "closed"
    assert case.shown.what.faults[0].id == first.id


def test_a_machine_is_recalled_by_its_tag_as_it_was_last_known(book, knowledge, sheet):
    first = read_sheet(sheet("pump_overload"))
    visit = Visit.new(book, first, person="Ines", knowledge=knowledge)
    changed = msgspec.structs.replace(first.machine, starter="soft_starter")
    visit.set_machine(changed)
    assert book.machine("wp-104  WASH water") == changed
    assert book.machine("nobody's pump") is None


def test_another_persons_entry_is_seen_after_refresh(visit, casebook):
    with open_casebook(casebook) as other:
        other.record(visit.case.id, bodies.Observed(observation="hums", answer=True), person="Oskar")
    assert visit.refresh().observations == {"hums": True}


def test_a_sheet_with_contradictions_opens_no_case(book):
    plain = {
        "format": 1,
        "machine": {"kind": "induction_3ph", "nameplate": {"current": "14.9 V"}},
        "complaint": "runs_hot",
    }
    with pytest.raises(InputError):
        sheet_from_plain(plain)
    assert book.cases() == []


def test_a_machines_own_windings_are_its_reference_and_a_spoilt_one_is_none(book, knowledge, sheet):
    """Brought to 25 degC with the law for copper, (235 + 25) / (235 + 24): IEC 60034-1."""
    pump = read_sheet(sheet("pump_overload"))
    sound = Visit.new(book, pump, person="Ines", knowledge=knowledge)
    assert sound.own_windings() == {}
    sound.close(bodies.Closed(found="overload", confirmed="repair"))
    again = Visit.new(book, pump, person="Ines", knowledge=knowledge)
    factor = (235.0 + 25.0) / (235.0 + 24.0)
    assert again.own_windings() == {
        "winding_resistance": pytest.approx((1.91 * factor, 1.92 * factor, 1.90 * factor))
    }
    again.close(bodies.Closed(found="turn_short", confirmed="teardown"))
    with_history = Visit.new(book, pump, person="Ines", knowledge=knowledge)
    assert set(with_history.own_windings()) == {"winding_resistance"}
    other = msgspec.structs.replace(pump.machine, tag="P-9")
    alone = Visit.new(book, msgspec.structs.replace(pump, machine=other), person="I", knowledge=knowledge)
    assert alone.own_windings() == {}


def test_a_winding_known_only_from_a_spoilt_case_is_no_reference(book, knowledge, sheet):
    pump = read_sheet(sheet("pump_overload"))
    spoilt = Visit.new(book, pump, person="Ines", knowledge=knowledge)
    spoilt.close(bodies.Closed(found="turn_short", confirmed="teardown"))
    assert Visit.new(book, pump, person="Ines", knowledge=knowledge).own_windings() == {}
