"""Rule files become types, and everything wrong with them is named."""

import json
import subprocess
import sys
from pathlib import Path

import pytest

from calc.errors import InputError
from rules import cache
from rules.check import check_rules
from rules.decoding import MOST_MISTAKES
from rules.loading import MOST_PROBLEMS, load_knowledge

from .makers import built, shop

ROOT = Path(__file__).resolve().parent.parent.parent

OBSERVATION = """observations:
- id: smells_of_fish
  name: Does it smell of fish?
  source: common practice
  base_rate: 0.1
  minutes: 1
"""


def said(folder) -> list[str]:
    return [str(problem) for problem in built(folder)[1]]


def test_the_shipped_rules_have_nothing_wrong():
    assert check_rules() == []


def test_a_shop_adds_an_entry_of_its_own(tmp_path):
    knowledge = load_knowledge(extra_folders=[shop(tmp_path, OBSERVATION)])
    assert knowledge.observations["smells_of_fish"].base_rate == 0.1
    assert knowledge.folders == (str(tmp_path),)
    assert knowledge.loosened == ()


def test_a_plain_list_takes_its_section_from_the_name_of_the_file(tmp_path):
    text = OBSERVATION.removeprefix("observations:\n")
    knowledge, problems = built(shop(tmp_path, text, "observations.yaml"))
    assert problems == []
    assert "smells_of_fish" in knowledge.observations


def test_cautions_is_another_word_for_hazards(tmp_path):
    text = "cautions:\n- {id: wet_floor, name: wet floor, source: common practice, precaution: Mop first.}\n"
    knowledge, problems = built(shop(tmp_path, text))
    assert problems == []
    assert knowledge.hazards["wet_floor"].precaution == "Mop first."


def test_an_unknown_field_is_named_with_line_entry_and_what_was_meant(tmp_path):
    (problem,) = said(shop(tmp_path, OBSERVATION.replace("base_rate", "base_rat")))[:1]
    assert problem.startswith(f"{tmp_path}/own.yaml, line 5: smells_of_fish: base_rat: unknown field")
    assert "did you mean base_rate?" in problem


def test_all_problems_of_all_entries_are_collected(tmp_path):
    text = (
        OBSERVATION.replace("0.1", "often").replace("minutes: 1", "minute: 1")
        + """
- id: other
  name: x
  source: y
  base_rate: 0.1
  minutes: [1]
  proposed: perhaps
"""
    )
    problems = said(shop(tmp_path, text))
    wanted = [
        "line 5: smells_of_fish: base_rate: often; it must be a number",
        "line 6: smells_of_fish: minute: unknown field; did you mean minutes?",
        "smells_of_fish: minutes: missing; it must be given",
        "line 12: other: minutes: a list; it must be a number",
        "line 13: other: proposed: perhaps; it must be yes or no",
    ]
    assert len(problems) == len(wanted)
    for part in wanted:
        assert any(part in problem for problem in problems), part


@pytest.mark.parametrize("typed", ["12:30", "0x10", "nan", "inf", "1e400", "1_000", "''", "010", "+.5"])
def test_what_yaml_or_python_would_take_for_a_number_is_refused(tmp_path, typed):
    problems = said(shop(tmp_path, OBSERVATION.replace("minutes: 1", f"minutes: {typed}")))
    assert len(problems) == 1
    assert "line 6: smells_of_fish: minutes" in problems[0]


@pytest.mark.parametrize(("typed", "meant"), [("yes", True), ("no", False), ("off", False), ("true", True)])
def test_yes_and_no_are_truth_values_where_one_is_asked_for(tmp_path, typed, meant):
    knowledge, problems = built(shop(tmp_path, OBSERVATION + f"  proposed: {typed}\n"))
    assert problems == []
    assert knowledge.observations["smells_of_fish"].proposed is meant


def test_no_stays_a_word_where_a_word_is_asked_for(tmp_path):
    knowledge, _ = built(shop(tmp_path, OBSERVATION.replace("Does it smell of fish?", "no")))
    assert knowledge.observations["smells_of_fish"].name == "no"


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "no entries"),
        ("observations:\n", "observations: nothing; a list of entries"),
        ("observations: {a: b}\n", "observations: no list; a list of entries"),
        ("observatoins: []\n", "observatoins: unknown section; did you mean observations?"),
        ("just words\n", "no section"),
        ("observations:\n- 5\n", "observations[1]: 5; a mapping of fields"),
        ("observations: [\n", "YAML"),
        ("a: 1\na: 2\n", "twice"),
        ("observations: &x []\n", "anchor"),
        ("observations: !!python/name:os.system x\n", "tag"),
    ],
)
def test_a_file_of_the_wrong_form_is_named(tmp_path, text, words):
    problems = said(shop(tmp_path, text))
    assert len(problems) == 1
    assert problems[0].startswith(f"{tmp_path}/own.yaml")
    assert words in problems[0]


def test_an_id_that_is_given_twice_in_one_folder_is_refused(tmp_path):
    text = OBSERVATION + OBSERVATION.removeprefix("observations:\n")
    assert said(shop(tmp_path, text)) == [
        f"{tmp_path}/own.yaml, line 7: smells_of_fish: id: given twice; each id once in a folder"
    ]


def test_a_folder_that_is_not_there_is_named(tmp_path):
    with pytest.raises(InputError, match="nowhere: no such folder"):
        load_knowledge(extra_folders=[tmp_path / "nowhere"])


def test_a_file_that_is_no_text_is_named(tmp_path):
    (tmp_path / "own.yaml").write_bytes(b"\xff\xfe\x00")
    with pytest.raises(InputError, match=r"own\.yaml: UTF-16 text; text saved as UTF-8"):
        load_knowledge(extra_folders=[tmp_path])


def test_one_bad_file_hides_no_problem_of_another(tmp_path):
    shop(tmp_path, "observations: [\n", "a.yaml")
    shop(tmp_path, OBSERVATION.replace("0.1", "7"), "b.yaml")
    problems = said(tmp_path)
    assert any("a.yaml" in problem for problem in problems)
    assert any("smells_of_fish: base_rate: 7; between 0 and 1" in problem for problem in problems)


def test_loading_needs_no_numbers_library():
    program = "import sys; from rules.loading import load_knowledge; load_knowledge(); "
    program += "print('numpy' in sys.modules)"
    ran = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True, cwd=ROOT
    )
    assert ran.stdout.strip() == "False"


# ------------------------------------------------------------------ cache
def test_the_second_load_comes_from_the_cache_and_is_the_same(tmp_path):
    folder = shop(tmp_path / "own", OBSERVATION)
    first = load_knowledge(extra_folders=[folder])
    (kept,) = cache.folder().glob("rules-*.json")
    assert json.loads(kept.read_bytes())["observations"]["smells_of_fish"]["base_rate"] == 0.1
    assert load_knowledge(extra_folders=[folder]) == first


def test_a_cache_that_was_changed_by_hand_shows_that_it_is_read(tmp_path):
    folder = shop(tmp_path / "own", OBSERVATION)
    load_knowledge(extra_folders=[folder])
    (kept,) = cache.folder().glob("rules-*.json")
    kept.write_bytes(kept.read_bytes().replace(b"smell of fish", b"smell of tar!"))
    assert load_knowledge(extra_folders=[folder]).observations["smells_of_fish"].name.endswith("tar!?")


@pytest.mark.parametrize("broken", [b"", b"{", b"[]", b'{"faults": 5}', b"\xff\xff"])
def test_a_broken_cache_is_ignored_and_mended(tmp_path, broken):
    folder = shop(tmp_path / "own", OBSERVATION)
    first = load_knowledge(extra_folders=[folder])
    (kept,) = cache.folder().glob("rules-*.json")
    kept.write_bytes(broken)
    assert load_knowledge(extra_folders=[folder]) == first
    assert kept.read_bytes() != broken


def test_a_changed_rule_is_seen_at_once(tmp_path):
    folder = shop(tmp_path / "own", OBSERVATION)
    load_knowledge(extra_folders=[folder])
    shop(folder, OBSERVATION.replace("0.1", "0.2"))
    assert load_knowledge(extra_folders=[folder]).observations["smells_of_fish"].base_rate == 0.2


def test_a_cache_folder_that_cannot_be_made_is_no_error(tmp_path, monkeypatch):
    blocked = tmp_path / "file"
    blocked.write_text("")
    monkeypatch.setenv("XDG_CACHE_HOME", str(blocked))
    assert load_knowledge().faults


def test_an_empty_folder_is_told_from_none(tmp_path):
    assert load_knowledge().folders == ()
    assert load_knowledge(extra_folders=[tmp_path]).folders == (str(tmp_path),)


def test_wrong_rules_are_never_kept(tmp_path):
    with pytest.raises(InputError):
        load_knowledge(extra_folders=[shop(tmp_path, OBSERVATION.replace("0.1", "7"))])
    assert not list(cache.folder().glob("*"))


def test_old_caches_are_dropped(tmp_path):
    for index in range(6):
        load_knowledge(extra_folders=[shop(tmp_path / "own", OBSERVATION.replace("0.1", f"0.{index + 1}"))])
    assert len(list(cache.folder().glob("rules-*.json"))) == 4
    assert not [path for path in cache.folder().iterdir() if path.name.startswith(".")]


def test_of_a_thousand_mistakes_the_first_are_told_and_the_rest_is_said(tmp_path):
    entries = "".join(f"- {{id: own_{n}, colour: red}}\n" for n in range(1000))
    (tmp_path / "faults.yaml").write_text(f"faults:\n{entries}", encoding="utf-8")
    with pytest.raises(InputError) as refused:
        load_knowledge(extra_folders=[tmp_path])
    assert MOST_PROBLEMS < len(refused.value.problems) < MOST_PROBLEMS + 20
    assert refused.value.problems[-1].given == f"more than {MOST_PROBLEMS} mistakes"


def test_an_entry_of_many_unknown_fields_tells_the_first(tmp_path):
    fields = ", ".join(f"k{n}: 1" for n in range(5000))
    (tmp_path / "faults.yaml").write_text(f"faults:\n- {{{fields}}}\n", encoding="utf-8")
    with pytest.raises(InputError) as refused:
        load_knowledge(extra_folders=[tmp_path])
    assert len(refused.value.problems) == MOST_MISTAKES


def test_a_folder_with_more_text_than_is_allowed_is_refused(tmp_path):
    for number in range(3):
        (tmp_path / f"{number}.yaml").write_text("# " + "x" * 1_900_000 + "\nfaults: []\n", encoding="utf-8")
    with pytest.raises(InputError, match=r"2\.yaml: more than 4000000 bytes in all; at most 4000000"):
        load_knowledge(extra_folders=[tmp_path])
