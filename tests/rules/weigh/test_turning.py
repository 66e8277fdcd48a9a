"""What would change the verdict, proved by feeding it back; and two faults at once."""

from pathlib import Path

import msgspec
import pytest

from calc.kinds import MODELS
from calc.quantities import MEASURES
from calc.sheet import Reading
from calc.sheet_io import read_sheet
from rules.diagnosing import what_would_turn
from tests.rules.makers import shipped, value

from .cases import answer, simulated

FOLDER = Path(__file__).parents[2] / "sheets"
NAMES = [p.stem for p in sorted(FOLDER.glob("*.yaml")) if read_sheet(p).machine.kind in MODELS][::2]


def fed_back(sheet, turn):
    """The sheet with the reading or the answer that is said to turn the decision."""
    if not turn.state:
        return msgspec.structs.replace(
            sheet, observations={**sheet.observations, turn.measure: turn.value == "yes"}
        )
    dimension = MEASURES[turn.measure].dimension
    values = tuple(value(text, dimension) for text in turn.value.split(" / "))
    read = Reading(measure=turn.measure, state=turn.state, values=values)
    return msgspec.structs.replace(sheet, readings=(*sheet.readings, read))


@pytest.mark.parametrize("name", NAMES)
def test_what_is_said_to_turn_the_decision_turns_it(name):
    sheet = read_sheet(FOLDER / f"{name}.yaml")
    now = answer(sheet)
    for turn in what_would_turn(sheet, knowledge=shipped()):
        assert turn.from_decision == now.decision
        assert turn.to_decision != turn.from_decision
        assert answer(fed_back(sheet, turn)).decision == turn.to_decision, turn.text
        assert turn.value in turn.text


def test_an_undecided_case_has_something_that_would_turn_it():
    assert what_would_turn(read_sheet(FOLDER / "painted_over.yaml"), knowledge=shipped())


def test_a_kind_without_a_model_has_nothing_that_would_turn_it():
    assert what_would_turn(read_sheet(FOLDER / "wound_rotor_crusher.yaml"), knowledge=shipped()) == ()


def test_two_faults_are_one_entry_with_both_names_in_order_and_odds_still_sum_to_one():
    # An uneven supply, and a winding that is uneven at rest: one fault cannot do both.
    supply = simulated(2, "voltage_unbalance", complaint="runs_hot")
    winding = simulated(2, "turn_short", complaint="runs_hot").last_reading("winding_resistance", "isolated")
    rest = [r for r in supply.readings if r.measure != "winding_resistance"]
    found = answer(msgspec.structs.replace(supply, readings=(*rest, winding)))
    assert sum(f.probability for f in found.faults) == pytest.approx(1.0, abs=1e-9)
    pairs = [f for f in found.faults if "+" in f.id]
    assert all(f.id.split("+") == sorted(f.id.split("+")) for f in pairs)
    assert all(f.name and f.part for f in pairs)


@pytest.mark.parametrize("effect", ["open_line", "open_phase", "broken_bars", "none"])
def test_where_one_fault_explains_everything_no_two_are_named_first(effect):
    assert "+" not in answer(simulated(6, effect)).faults[0].id
