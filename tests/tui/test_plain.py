"""The visit as plain questions and answers: typed lines in, a closed case out."""

import pytest

from casebook.book import open_casebook
from tests.tui.plain import ISOLATION, OPEN_CASE, newest
from tui.plate_lines import plate_lines


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


def test_a_tag_that_begins_as_a_case_number_does_is_a_tag(talk, kit, casebook):
    lines = ["" for _ in plate_lines("induction_1ph")]
    talk("Ines", "C-5 compressor", "induction_1ph", *lines, "hums_will_not_turn")
    assert newest(casebook).tag == "C-5 compressor"


def test_a_case_number_that_no_case_has_is_named_and_opens_none(talk, kit, casebook):
    done = talk("Ines", "C-777777")
    assert "there is no case" in done.out + done.err
    with open_casebook(casebook) as book:
        assert not book.cases()


def test_a_machine_that_is_new_is_asked_for_line_by_line(talk, kit, casebook):
    plate = {"power": "7.5 kW", "voltage": "400", "current": "14.9", "frequency": "50", "connection": "D"}
    lines = [plate.get(line.field, "") for line in plate_lines("induction_3ph")]
    talk("Ines", "WP-9", "induction_3ph", *lines, "runs_hot")
    case = newest(casebook)
    assert case.machine.nameplate.number("power") == 7500.0
    assert case.machine.nameplate.current.text == "14.9 A"
    assert case.machine.nameplate.connection == "delta"
    assert case.complaint == "runs_hot"


def test_a_pump_is_taken_as_the_usual_one_and_that_is_said(talk, kit, casebook):
    lines = ["pump" if line.word == "LOAD" else "" for line in plate_lines("induction_3ph")]
    done = talk("Ines", "WP-9", "induction_3ph", *lines, "runs_hot")
    assert "LOAD: centrifugal pump; else write pump positive." in " ".join(done.out.split())
    assert newest(casebook).machine.load_type == "pump_centrifugal"


def test_a_complaint_is_found_by_other_words_and_said_or_asked_about(talk, known, kit, casebook):
    done = talk(*OPEN_CASE[:-1], "overlod relay", "overhaeted thermistor")
    assert "Which one: trips_at_start, trips_under_load?" in done.out
    assert "Taken: runs hot." in done.out
    assert newest(casebook).complaint == "runs_hot"


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


@pytest.mark.parametrize(("typed", "kept"), [(("7,5",), 7.5), (("an hour", "-5", "60"), 60.0), (("",), None)])
def test_the_minutes_of_a_closing_are_kept_as_typed_or_asked_for_again(
    talk, known, kit, casebook, typed, kept
):
    talk(*OPEN_CASE, "close", "healthy", "believed", *typed, "", "")
    assert newest(casebook).closed.what.minutes == kept


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
