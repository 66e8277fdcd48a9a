"""The visit as plain questions and answers: typed lines in, a closed case out."""

import io

import pytest

from casebook.book import open_casebook
from casebook.errors import DiskFull
from casebook.sqlite_store import SqliteStore
from tui.drafts import Drafts
from tui.plate_lines import plate_lines


@pytest.fixture
def talk(run, monkeypatch):
    """Hold a visit with typed lines; the input ends after the last."""

    def talk_it(*lines):
        monkeypatch.setattr("sys.stdin", io.StringIO("".join(f"{line}\n" for line in lines)))
        return run("--plain")

    return talk_it


@pytest.fixture
def known(run, sheet):
    """A casebook that knows the wash-water pump."""
    run("log", sheet("pump_overload"), "--person", "Ines")


@pytest.fixture
def kit(casebook):
    """A kit that was asked for on an earlier visit."""
    carried = ["multimeter", "clamp_meter", "insulation_tester", "tachometer"]
    Drafts(casebook).remember("kit", carried)
    return carried


def newest(casebook):
    with open_casebook(casebook) as book:
        return book.case(book.cases(limit=1)[0].id)


ISOLATION = ("Ines", "Q4 in the control centre", "yes", "yes", "yes", "yes")
OPEN_CASE = ("Ines", "WP-104 wash water", "yes", "routine_check")


def test_a_whole_case_from_a_known_tag_to_the_closing(talk, known, kit, casebook):
    done = talk(
        *OPEN_CASE,
        "read insulation_resistance isolated 350M", *ISOLATION,
        "seen shaft_turns_freely yes",
        "note pump was noisy last week",
        "close", "healthy", "believed", "25", "greased", "grease, rag",
    )  # fmt: skip
    case = newest(casebook)
    assert done.status == 0
    assert "is closed" in done.out
    assert case.status == "closed"
    assert case.readings[0].what.reading.values[0].number == 350e6
    assert case.observations == {"shaft_turns_freely": True}
    assert case.isolation[0].what.proved_dead
    assert case.closed.what.found == "healthy"
    assert case.closed.what.parts == ("grease", "rag")
    assert case.shown.what.faults
    assert case.kit == tuple(kit)


def test_a_machine_that_is_new_is_asked_for_line_by_line(talk, kit, casebook):
    plate = {"power": "7.5 kW", "voltage": "400", "current": "14.9", "frequency": "50", "connection": "D"}
    lines = [plate.get(line.field, "") for line in plate_lines("induction_3ph")]
    talk("Ines", "WP-9", "induction_3ph", *lines, "runs_hot")
    case = newest(casebook)
    assert case.machine.nameplate.number("power") == 7500.0
    assert case.machine.nameplate.current.text == "14.9 A"
    assert case.machine.nameplate.connection == "delta"
    assert case.complaint == "runs_hot"


def test_a_case_is_not_opened_until_everything_is_asked(talk, kit, casebook):
    talk("Ines", "WP-9", "induction_3ph", "7.5 kW")
    with open_casebook(casebook) as book:
        assert book.cases() == []


def test_a_reading_is_echoed_in_words_and_stored(talk, known, kit, casebook):
    done = talk(*OPEN_CASE, "read insulation_resistance isolated >2G", *ISOLATION)
    assert "more than 2 gigaohm" in done.out
    assert newest(casebook).readings[0].what.reading.values[0].kind == "above"


def test_no_isolated_reading_without_a_complete_isolation_record(talk, known, kit, casebook):
    talk(*OPEN_CASE, "read insulation_resistance isolated 350M", "Ines", "Q4", "yes", "yes", "no", "yes")
    case = newest(casebook)
    assert case.readings == ()
    assert not case.isolation[0].what.proved_dead


def test_no_energised_reading_until_its_hazards_are_acknowledged(talk, known, kit, casebook):
    talk(
        *OPEN_CASE,
        "read line_current loaded 14.1 14.2 14.0",
        "no",
        "read line_current loaded 14.1 14.2 14.0",
        "yes",
    )
    case = newest(casebook)
    assert len(case.readings) == 1
    assert case.hazards[0].what.about == "loaded"
    assert case.hazards[0].what.shown


def test_a_doubtful_value_is_asked_about_once(talk, known, kit, casebook):
    talk(*OPEN_CASE, "read supply_voltage loaded 4000 398 399", "yes", "no")
    assert newest(casebook).readings == ()
    talk(*OPEN_CASE, "read supply_voltage loaded 4000 398 399", "yes", "yes")
    assert newest(casebook).readings[0].what.reading.note == "checked"


def test_what_is_no_reading_is_told_and_nothing_is_stored(talk, known, kit, casebook):
    done = talk(*OPEN_CASE, "read winding_resistance isolated 1.9 1.9")
    assert "three values" in done.out
    assert newest(casebook).readings == ()


def test_what_is_skipped_is_not_proposed_again(talk, known, kit, casebook):
    talk(*OPEN_CASE, "skip no ladder")
    (skipped,) = newest(casebook).skipped
    assert skipped.what.why == "no ladder"


def test_a_reading_can_be_struck_out_and_stays_in_the_log(talk, known, kit, casebook):
    talk(*OPEN_CASE, "read insulation_resistance isolated 350M", *ISOLATION, "correct", "1", "strike")
    case = newest(casebook)
    assert case.readings == ()
    assert any(line.struck for line in case.lines)


def test_an_open_case_is_gone_on_with_by_its_number(talk, known, kit, casebook):
    number = newest(casebook).number
    talk("Oskar", number, "seen bearing_noise no")
    case = newest(casebook)
    assert case.number == number
    assert case.observations["bearing_noise"] is False
    assert case.persons == ("Ines", "Oskar")


def test_the_end_of_the_input_leaves_and_keeps_what_was_accepted(talk, known, kit, casebook):
    done = talk(*OPEN_CASE, "seen hums yes")
    assert done.status == 0
    assert "is in the casebook" in done.out
    assert newest(casebook).observations == {"hums": True}


def test_the_kit_is_asked_once(talk, known, casebook):
    first = talk(*OPEN_CASE, "")
    second = talk(*OPEN_CASE)
    assert "asked only once" in first.out
    assert "asked only once" not in second.out


@pytest.mark.parametrize(
    ("typed", "carried"),
    [
        ("", {"clamp_meter", "insulation_tester", "multimeter"}),
        ("2, 8", {"clamp_meter", "multimeter"}),
        ("2 8", {"clamp_meter", "multimeter"}),
        ("tacho, clamp meter", {"clamp_meter", "tachometer"}),
    ],
)
def test_the_kit_is_told_by_numbers_or_names(talk, known, casebook, typed, carried):
    talk(*OPEN_CASE, typed)
    assert set(newest(casebook).kit) == carried


def test_an_instrument_that_nobody_knows_is_asked_for_again(talk, known, casebook):
    done = talk(*OPEN_CASE, "99, clamp", "crystal ball", "clamp")
    assert "Which are: 99?" in done.out
    assert "Which are: crystal ball?" in done.out
    assert newest(casebook).kit == ("clamp_meter",)


def test_complaints_that_mean_stop_are_offered_first(talk, kit):
    asked = talk("Ines", "WP-9", "dc_series", *[""] * 30).out.split("STOP: ")
    assert asked[1].startswith("somebody felt a shock")
    assert "  1  " in asked[0].splitlines()[-1]


def test_what_may_be_typed_with_a_reading_is_told_in_its_question(talk, known, kit, casebook):
    done = talk(*OPEN_CASE, "read insulation_resistance isolated", "350 at 24 C 500 V", *ISOLATION)
    said = " ".join(done.out.split())
    assert "one value in Mohm; add: at 24 C, 500 V" in said
    assert newest(casebook).readings[0].what.reading.temperature.number == 24.0


def test_a_correction_that_can_hardly_be_is_asked_about_once(talk, known, kit, casebook):
    steps = ("read supply_voltage loaded 401 398 399", "yes", "correct", "1", "4010 398 399")
    talk(*OPEN_CASE, *steps, "no")
    assert newest(casebook).readings[0].what.reading.numbers[0] == 401.0


def test_the_isolation_record_of_a_single_phase_machine_asks_for_its_capacitors(
    talk, run, kit, sheet, casebook
):
    run("log", sheet("single_phase_capacitor_weak"), "--person", "Ines")
    number = newest(casebook).number
    before = len(newest(casebook).readings)
    wanting = talk("Ines", number, "read main_resistance isolated 4.1", *ISOLATION, "no")
    assert "Motor capacitors discharged by a resistor, proved below 50 V?" in " ".join(wanting.out.split())
    assert len(newest(casebook).readings) == before
    talk("Ines", number, "read main_resistance isolated 4.1", *ISOLATION, "yes")
    assert len(newest(casebook).readings) == before + 1


def test_what_is_tried_by_hand_waits_for_the_isolation_record(talk, known, kit, casebook):
    talk(*OPEN_CASE, "seen shaft_turns_freely yes", "Ines", "Q4", "yes", "yes", "no", "yes")
    assert newest(casebook).observations == {}
    talk(*OPEN_CASE, "seen shaft_turns_freely yes", *ISOLATION)
    assert newest(casebook).observations == {"shaft_turns_freely": True}


def test_a_plate_that_was_begun_is_asked_for_only_where_it_was_not_told(talk, kit, casebook):
    first, second, *rest = plate_lines("induction_3ph")
    dropped = talk("Ines", "WP-9", "induction_3ph", "7.5 kW", "400")
    assert "Left. What was accepted is in the casebook" in dropped.out
    again = talk("Ines", "yes", *([""] * (2 + len(rest))), "runs_hot")
    assert "WP-9: a new case was begun and not stored. Go on with it? yes/no" in again.out
    case = newest(casebook)
    plate = case.machine.nameplate
    assert (first.field, second.field) == ("power", "voltage")
    assert (case.tag, plate.number("power"), plate.number("voltage")) == ("WP-9", 7500.0, 400.0)
    assert Drafts(casebook).names() == []


def test_a_new_case_that_cannot_be_stored_is_tried_again_without_asking_anew(
    talk, kit, casebook, monkeypatch
):
    add, tries = SqliteStore.add, iter([True])

    def refuse_once(store, *arguments, **more):
        if next(tries, False):
            raise DiskFull("the disk that holds casebook.db is full")
        return add(store, *arguments, **more)

    monkeypatch.setattr(SqliteStore, "add", refuse_once)
    blank = [""] * (len(plate_lines("induction_3ph")) - 1)
    told = talk("Ines", "WP-9", "induction_3ph", "7.5 kW", *blank, "runs_hot", "yes", "", *blank)
    assert "is full. Nothing was written" in " ".join(told.out.split())
    assert newest(casebook).machine.nameplate.number("power") == 7500.0


def test_a_place_that_takes_no_draft_does_not_stop_the_visit(talk, known, casebook):
    Drafts(casebook).folder.write_text("a file stands where the folder should be", encoding="utf-8")
    done = talk(*OPEN_CASE, "", "note dry")
    assert newest(casebook).notes[0].what.text == "dry"
    assert "mistake of the program" not in done.err


def test_what_is_read_after_the_repair_is_asked_for_at_the_closing(talk, run, kit, sheet, casebook):
    run("log", sheet("single_phase_capacitor_weak"), "--person", "Ines")
    number = newest(casebook).number
    before = len(newest(casebook).readings)
    talk(
        "Ines",
        number,
        "close",
        "run_capacitor_weak",
        "repair",
        "2o",
        "20.1",
        *ISOLATION,
        "yes",
        "",
        "",
        "25",
        "new capacitor",
        "",
    )
    closed = newest(casebook).closed.what
    assert [one.reading.numbers for one in closed.retested] == [(20.1e-6,)]
    assert len(newest(casebook).readings) == before
    assert "re-test: run capacitor, isolated: 20.1 uF" in " ".join(run("report", number).out.split())


def test_back_leaves_any_question_without_an_answer(talk, known, kit, casebook):
    done = talk(
        *OPEN_CASE,
        "read winding_resistance isolated 1.9 1.9 1.9",
        "Ines",
        "back",
        "close",
        "back",
        "seen hums yes",
    )
    case = newest(casebook)
    assert done.out.count("Back; nothing of it was stored.") == 2
    assert (case.status, case.readings, case.isolation) == ("open", (), ())
    assert case.observations == {"hums": True}


def test_back_in_a_new_case_asks_for_the_machine_again(talk, known, kit, casebook):
    talk("Ines", "WP-9", "back", "WP-104 wash water", "yes", "routine_check")
    assert newest(casebook).tag == "WP-104 wash water"


HOSTILE = [
    "9" * 5000,
    "٣" * 5000,
    "1e" + "9" * 5000,
    "1/" + "0" * 5000,
    "9" * 5000 + "/3",
    "x" * 300_000,
    "e\u0301" * 2000,
    "\x1b]0;t\x07\x9b31m\u202e\u200b",
    "[bold]%s {0} \\",
    "- - -",
    "1 2 3 4 5 6 7 8 9",
    "5 at 99999 C 1e999 V nan",
]
STAGES = {
    "name": (),
    "tag": ("Ines",),
    "kind": ("Ines", "WP-9"),
    "plate": ("Ines", "WP-9", "induction_3ph"),
    "complaint": ("Ines", "WP-104 wash water", "yes"),
    "visit": OPEN_CASE,
    "reading": (*OPEN_CASE, "read"),
    "note": (*OPEN_CASE, "note " + "x" * 10_000_000),
    "isolation": (*OPEN_CASE, "isolate"),
    "correction": (*OPEN_CASE, "seen shaft_turns_freely yes", "correct"),
    "closing": (*OPEN_CASE, "close", "healthy", "believed"),
}


@pytest.mark.parametrize("stage", STAGES)
def test_no_line_is_more_than_asked_for_again(talk, known, kit, casebook, stage):
    for hostile in HOSTILE:
        done = talk(*STAGES[stage], *[hostile] * 12)
        assert "mistake of the program" not in done.out + done.err, (hostile[:20], done.err)
        assert not {"\x1b", "\x07", "\x9b", "\u202e"} & set(done.out + done.err), hostile[:20]
    assert talk("Ines").status == 0
