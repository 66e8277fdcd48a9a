"""A shop's own rules may tighten; where they loosen, a sentence says so."""

import pytest

from rules.gate import gate
from rules.loading import load_knowledge

from .makers import built, case, insulation, shop

UNBALANCE = """limits:
- id: voltage_unbalance
  name: voltage unbalance
  source: own standard
  quantity: voltage_unbalance
  shuts: [stalled, starting, no_load, light_load, loaded]
  bands:
  - {above: 5 %, verdict: stop}
  - {above: 1 %, verdict: watch}
  - {verdict: normal}
"""
SHAFT = """gates:
- id: shaft_free
  name: shaft turns freely
  source: own standard
  guards: [light_load, loaded]
  asks: [shaft_turns_freely]
  clears: [answered_yes]
  found_running_clears: yes
"""
HOT = """hazards:
- id: hot_surface
  name: hot surface
  source: ISO 13732-1, from memory
  precaution: Frames reach 80-100 degC and skin burns above 60 degC; use a thermometer, not a hand.
"""


def loosened(tmp_path, text) -> tuple[str, ...]:
    knowledge, problems = built(shop(tmp_path, text))
    assert problems == []
    return knowledge.loosened


@pytest.mark.parametrize("text", [UNBALANCE, SHAFT, HOT])
def test_the_same_rule_again_loosens_nothing(tmp_path, text):
    assert loosened(tmp_path, text) == ()


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("above: 5 %", "above: 3 %"), ("above: 1 %, verdict: watch", "above: 1 %, verdict: stop"),
        ("  shuts: [stalled, starting, no_load, light_load, loaded]\n", ""),
    ],
)  # fmt: skip
def test_a_tighter_limit_says_nothing(tmp_path, old, new):
    assert loosened(tmp_path, UNBALANCE.replace(old, new)) == ()


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("above: 5 %", "above: 6 %", "call 5.5 % watch where the shipped limit says stop"),
        ("above: 5 %, verdict: stop", "above: 5 %, verdict: watch", "where the shipped limit says stop"),
        ("  - {above: 1 %, verdict: watch}\n", "", "where the shipped limit says watch"),
        ("  quantity: voltage_unbalance", "  quantity: current_unbalance", "judge current_unbalance instead"),
        ("  bands:", "  kinds: [induction_3ph]\n  bands:", "hold for fewer machine kinds"),
        ("  bands:", "  states: [loaded]\n  bands:", "hold for fewer states"),
        ("  bands:", "  where: {supply: mains}\n  bands:", "hold under other conditions"),
        ("  bands:", "  status: retired\n  bands:", "retire the limit"),
        ("light_load, loaded]", "light_load]", "hold for fewer states that it shuts"),
    ],
)
def test_a_looser_limit_is_told(tmp_path, old, new, words):
    (sentence,) = loosened(tmp_path, UNBALANCE.replace(old, new))
    assert sentence.startswith("voltage unbalance: own rules ")
    assert words in sentence


@pytest.mark.parametrize(
    ("old", "new", "words"),
    [
        ("light_load, loaded]", "light_load]", "leave out guarded states: loaded"),
        ("clears: [answered_yes]", "clears: []", "leave out checks: answered_yes"),
        (
            "asks: [shaft_turns_freely]",
            "asks: [shaft_turns_freely, guards_fitted]",
            "let other entries clear",
        ),
        ("  found", "  overload_trip_clears: yes\n  found", "clear the line after an overload trip"),
        ("  found", "  kinds: [dc_shunt]\n  found", "hold for fewer machine kinds"),
    ],
)
def test_a_looser_gate_line_is_told(tmp_path, old, new, words):
    (sentence,) = loosened(tmp_path, SHAFT.replace(old, new))
    assert sentence.startswith("shaft turns freely with its load")
    assert words in sentence


def test_a_tighter_gate_line_says_nothing(tmp_path):
    tighter = SHAFT.replace("light_load", "no_load, light_load").replace("found_running_clears: yes", "")
    assert loosened(tmp_path, tighter) == ()


def test_a_reworded_or_narrowed_caution_is_told(tmp_path):
    (sentence,) = loosened(tmp_path, HOT.replace("use a thermometer, not a hand", "mind the heat"))
    assert sentence == "hot surface: own rules reword the precaution"
    (sentence,) = loosened(tmp_path, HOT + "  kinds: [dc_shunt]\n")
    assert sentence == "hot surface: own rules hold for fewer machine kinds"


def test_odds_may_rise_further_only_with_a_word(tmp_path):
    text = """gates:
- id: earth_fault_suspected
  name: no standing suspicion of a fault to earth
  source: own
  guards: [standby, stalled, starting, no_load, light_load, loaded]
  asks: [insulation_resistance@isolated]
  suspects: {ground_fault: 0.6}
"""
    (sentence,) = loosened(tmp_path, text)
    assert "let odds of ground_fault rise further before the gate shuts" in sentence


def test_a_complaint_that_no_longer_means_stop_is_told_and_still_stops(tmp_path):
    text = """complaints:
- {id: smoke_or_burning, name: smoke, source: own, runs: "yes"}
"""
    knowledge, _ = built(shop(tmp_path, text))
    assert [sentence.partition("own rules ")[2] for sentence in knowledge.loosened] == [
        "no longer stop at this complaint",
        "take a machine with this complaint as found running",
    ]
    assert gate(case("smoke_or_burning", insulation()), knowledge).forbids("standby")


def test_the_sentences_survive_the_cache(tmp_path):
    folder = shop(tmp_path / "own", UNBALANCE.replace("above: 5 %", "above: 6 %"))
    first = load_knowledge(extra_folders=[folder])
    assert len(first.loosened) == 1
    assert load_knowledge(extra_folders=[folder]).loosened == first.loosened


def test_a_later_folder_is_measured_against_what_it_overrides(tmp_path):
    tight = shop(tmp_path / "a", UNBALANCE.replace("above: 5 %", "above: 3 %"))
    loose = shop(tmp_path / "b", UNBALANCE)
    knowledge, _ = built(tight, loose)
    assert len(knowledge.loosened) == 1
    assert knowledge.folders == (str(tight), str(loose))
