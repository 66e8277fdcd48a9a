"""Every wrong input gets its one clear message: file, line, field, what was given, what is allowed."""

from pathlib import Path

import pytest

from calc.errors import InputError, Problem
from calc.sheet_io import read_sheet, sheet_from_text

BASE = (Path(__file__).parents[1] / "sheets" / "pump_overload.yaml").read_text(encoding="utf-8")


def problems_of(text):
    with pytest.raises(InputError) as refused:
        sheet_from_text(text, file="p.yaml")
    return refused.value.problems


def changed(before, after):
    assert BASE.count(before) == 1, before
    return BASE.replace(before, after)


CURRENT = "    current: 14.9 A\n"
AMPS = "[18.9 A, 19.3 A, 19.0 A]"
VOLTS = "value: [401 V, 398 V, 402 V]"
FIRST = "measure: supply_voltage"

CASES = [
    # (before, after, field, given, what the message must say)
    (CURRENT, "    curent: 14.9 A\n", "machine.nameplate.curent", "", "no such field; did you mean current"),
    (CURRENT, "    current: 14.9 V\n", "machine.nameplate.current", "14.9 V", "V is the unit of a voltage"),
    (
        CURRENT,
        "    current: 14.9\n",
        "machine.nameplate.current",
        "14.9",
        "the unit is missing: a current such as 14.9 A",
    ),
    (CURRENT, "    current: .nan\n", "machine.nameplate.current", ".nan", "not a number"),
    (CURRENT, "    current: NaN A\n", "machine.nameplate.current", "NaN A", "not a number"),
    (CURRENT, "    current: -14.9 A\n", "machine.nameplate.current", "-14.9 A", "zero or more"),
    (CURRENT, "    current: 1e400 A\n", "machine.nameplate.current", "1e400 A", "beyond any plate or meter"),
    (CURRENT, "    current: 0 A\n", "machine.nameplate.current", "0 A", "10 mA to 20 kA is possible here"),
    (CURRENT, "    current: [14.9 A]\n", "machine.nameplate.current", "a list", "one value"),
    (AMPS, "[18.9 A, 19.3 A]", "readings[1].value", "2 of three values", "three values of line current"),
    (AMPS, "18.9 A", "readings[1].value", "1 of three values", "null for one that was not read"),
    (AMPS, "[null, null, null]", "readings[1].value", "null", "at least one value of line current"),
    (
        AMPS,
        "[18,9 A, 19,3 A, 19,0 A]",
        "readings[1].value",
        "6 of three values",
        "a comma parts the values: write 1.2 ohm",
    ),
    (AMPS, "[18.9 A, 19.3 A, open]", "readings[1].value[2]", "open", "only a resistance can be open"),
    (
        "speed: 1455 rpm",
        "speed: 0 rpm",
        "machine.nameplate.speed",
        "0 rpm",
        "20 rpm to 100000 rpm is possible here",
    ),
    (
        "speed: 1455 rpm",
        "speed: 14550 rpm",
        "machine.nameplate.speed",
        "14550 rpm",
        "faster than 3000 rpm at 50 Hz",
    ),
    (
        "speed: 1455 rpm",
        "speed: 1,455 rpm",
        "machine.nameplate.speed",
        "1,455 rpm",
        "can be 1455 rpm or 1.455 rpm",
    ),
    ("value: 1439 rpm", "value: 1,439 rpm", "readings[2].439 rpm", "", "a comma parts the fields here"),
    (
        "value: 1439 rpm",
        "value: 14390 rpm",
        "readings[2].value",
        "14390 rpm",
        "if it is so, add note: checked",
    ),
    (VOLTS, "value: [4160 V, 398 V, 402 V]", "readings[0].value[0]", "4160 V", "more than 4 times the 400 V"),
    (
        "    voltage: 400 V\n",
        "    voltage: 4160 V\n",
        "machine.nameplate.voltage",
        "7.5 kW at 4160 V",
        "416 V instead of 4160 V",
    ),
    (
        "    voltage: 400 V\n",
        "    voltage: 230/400 V\n",
        "machine.nameplate.voltage",
        "230/400 V",
        "several ratings go under ratings",
    ),
    (
        "    voltage: 400 V\n",
        "    voltage: 380-415 V\n",
        "machine.nameplate.voltage",
        "380-415 V",
        "write the one in use",
    ),
    ("power_factor: 0.84", "power_factor: 1.2", "machine.nameplate.power_factor", "1.2", "0.05 to 1"),
    ("efficiency: 88.7 %", "efficiency: 887 %", "machine.nameplate.efficiency", "887 %", "0.05 to 0.999"),
    ("design_letter: N", "code_letter: O", "machine.nameplate.code_letter", "O", "one of A, B, C"),
    ("design_letter: N", "poles: 3", "machine.nameplate.poles", "3", "a pole pair counts as two"),
    (
        "kind: induction_3ph",
        "kind: induction_3hp",
        "machine.kind",
        "induction_3hp",
        "did you mean induction_3ph",
    ),
    ("  kind: induction_3ph\n", "", "machine.kind", "nothing", "the machine's kind: induction_3ph"),
    ("complaint: trips_under_load\n", "", "complaint", "nothing", "what is wrong, such as trips_under_load"),
    (
        "complaint: trips_under_load",
        "complaint: It trips!",
        "complaint",
        "It trips!",
        "small letters, digits, underscores",
    ),
    ("format: 1", "format: 2", "format", "2", "1, the format that this version reads"),
    (
        f"{{{FIRST}, state: loaded",
        f"{{{FIRST}, state: full_load",
        "readings[0].state",
        "full_load",
        "did you mean",
    ),
    (FIRST, "measure: suply_voltage", "readings[0].measure", "suply_voltage", "did you mean supply_voltage"),
    (
        "measure: line_current",
        "measure: armature_current",
        "readings[1].measure",
        "armature_current",
        "did you mean line_current",
    ),
    ("350 Mohm", "350 mohm", "readings[4].value", "350 mohm", "insulation is read in Mohm"),
    (
        "measure: insulation_resistance, state: isolated",
        "measure: insulation_resistance, state: loaded",
        "readings[4].state",
        "loaded",
        "never read on a live machine",
    ),
    (
        "nominal_voltage: 400 V",
        "nominal_voltage: 0 V",
        "machine.supply.nominal_voltage",
        "0 V",
        "5 V to 50 kV",
    ),
    ("starter: direct", "starter: dircet", "machine.starter", "dircet", "did you mean direct"),
    ("brake: no", "brake: maybe", "machine.brake", "maybe", "yes or no"),
    (
        "load: {type: pump_centrifugal}",
        "load: {type: pump}",
        "machine.load.type",
        "pump",
        "did you mean pump_centrifugal or pump_positive?",
    ),
    ("load: {type: pump_centrifugal}", "load: pump", "machine.load", "pump", "{type: conveyor}"),
    ("method: four_wire", "method: kelvin", "readings[3].method", "kelvin", "one of: four_wire"),
    ("shaft_turns_freely: yes", "shaft_turns_freely: 7", "observations.shaft_turns_freely", "7", "yes or no"),
    ("shaft_turns_freely: yes", "Shaft: yes", "observations.Shaft", "Shaft", "small letters"),
    ("tag: WP-104 wash water", "tag: " + "x" * 65, "machine.tag", "65 characters", "at most 64 characters"),
    ("tag: WP-104 wash water", 'tag: "a\\nb"', "machine.tag", "a\\u000ab", "text on one line"),
    ("tag: WP-104 wash water", 'tag: "\\e[31mred"', "machine", "control character U+001B", "printable text"),
    (
        "state: isolated, value: 350 Mohm",
        "state: isolated, value: 350 Mohm, note: " + "x" * 2001,
        "readings[4].note",
        "2001",
        "at most 2000",
    ),
]
IDS = [case[1][:40].strip() for case in CASES]


@pytest.mark.parametrize(("before", "after", "field", "given", "says"), CASES, ids=IDS)
def test_a_wrong_field_is_one_problem_that_names_line_field_given_and_allowed(
    before, after, field, given, says
):
    text = changed(before, after)
    (problem,) = problems_of(text)
    assert problem.where == field
    assert given in problem.given
    assert says in problem.allowed
    assert problem.file == "p.yaml"
    assert problem.line is not None


def test_the_line_is_the_one_that_holds_the_mistake():
    text = changed(CURRENT, "    current: 14.9 V\n")
    (problem,) = problems_of(text)
    assert "14.9 V" in text.splitlines()[problem.line - 1]
    assert str(problem).startswith(
        f"p.yaml, line {problem.line}: machine.nameplate.current: 14.9 V; a current such as"
    )


def test_all_problems_come_at_once_in_the_order_of_the_lines():
    text = (
        BASE.replace("14.9 A", "14.9")
        .replace("state: loaded", "state: laoded")
        .replace("7.5 kW", "7.5 furlong")
    )
    problems = problems_of(text)
    assert len(problems) == 5
    assert [problem.line for problem in problems] == sorted(problem.line for problem in problems)


@pytest.mark.parametrize(
    ("text", "given"),
    [
        ("", "an empty file"),
        ("# only a comment\n", "an empty file"),
        ("- a\n- b\n", "a list"),
        ("just words", "just words"),
        ("12", "12"),
        ("shopping: [milk]\nfor: home\n", "fields of something else"),
    ],
)
def test_yaml_that_is_no_sheet_is_one_problem(text, given):
    (problem,) = problems_of(text)
    assert problem.given == given
    assert problem.allowed.startswith("a case sheet: format, machine, complaint")


@pytest.mark.parametrize(("name", "given"), [("no.yaml", "no such file"), (".", "this is a folder")])
def test_a_missing_file_and_a_folder_are_one_problem_each(tmp_path, name, given):
    with pytest.raises(InputError) as refused:
        read_sheet(tmp_path / name)
    (problem,) = refused.value.problems
    assert problem.given == given
    assert str(tmp_path) in problem.file


def test_a_doubted_reading_passes_when_its_note_says_checked():
    text = changed("value: 1439 rpm", "value: 14390 rpm, note: checked twice with the strobe")
    assert sheet_from_text(text, file="p.yaml").last_reading("speed", "loaded").numbers == (14390.0,)


def test_unchecked_is_not_checked():
    text = changed("value: 1439 rpm", "value: 14390 rpm, note: unchecked")
    assert len(problems_of(text)) == 1


def test_a_level_above_the_line_cannot_be_confirmed():
    text = BASE.replace(
        "observations:",
        "  - {measure: sideband_level, state: loaded, value: 38 dB, note: checked}\nobservations:",
    )
    (problem,) = problems_of(text)
    assert problem.allowed == "a level below the line, such as -38 dB"


@pytest.mark.parametrize("volts", ["1100 V", "1600 V"])
def test_a_high_supply_is_read_as_it_is(volts):
    text = changed(VOLTS, f"value: [{volts}, 398 V, 402 V]")
    assert sheet_from_text(text, file="p.yaml").readings[0].numbers[0] == float(volts.split()[0])


def test_a_comma_in_a_quoted_value_is_understood_or_asked_about():
    understood = changed("[1.91 ohm, 1.92 ohm, 1.90 ohm]", '["1,91 ohm", "1,92 ohm", "1,90 ohm"]')
    assert sheet_from_text(understood, file="p.yaml").readings[3].numbers == (1.91, 1.92, 1.9)
    asked = changed("[1.91 ohm, 1.92 ohm, 1.90 ohm]", '["1,910 ohm", "1.92 ohm", "1.90 ohm"]')
    (problem,) = problems_of(asked)
    assert "can be 1910 ohm or 1.910 ohm" in problem.allowed


def test_a_problem_without_file_or_line_begins_with_its_field():
    assert str(Problem("", "machine.kind", "pump", "a kind")) == "machine.kind: pump; a kind"
    assert str(Problem("p.yaml", "", "", "a sheet", 3)) == "p.yaml, line 3; a sheet"


def test_a_sheet_with_thousands_of_slips_says_the_first_and_counts_the_others():
    readings = "".join(f"  - {{measure: speed, state: loaded, value: {n} V}}\n" for n in range(1, 101))
    text = f"format: 1\nmachine: {{kind: induction_3ph}}\ncomplaint: runs_hot\nreadings:\n{readings}"
    with pytest.raises(InputError) as refused:
        sheet_from_text(text, file="many.yaml")
    assert len(refused.value.problems) == 100
    assert str(refused.value).splitlines()[-1] == "many.yaml: and 80 more"
    assert len(str(refused.value).splitlines()) == 21
