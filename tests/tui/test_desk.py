"""What stands behind the screens: the shop's own rules are laid over the shipped ones, the odds as told."""

import pytest

from calc.sheet_io import read_sheet
from tests.rules.makers import shop
from tui.desk import Desk

OWN = """
complaints:
- id: squeals_in_the_rain
  name: squeals in the rain
  source: this shop
  runs: "yes"
  first: Listen where it comes from.
"""


@pytest.fixture
def desk(casebook, tmp_path):
    made = Desk(casebook, rules=(shop(tmp_path / "rules", OWN),), person="Ines")
    yield made
    made.close()


def test_a_shops_own_rules_are_there_beside_the_shipped_ones(desk):
    assert desk.knowledge.complaints["squeals_in_the_rain"].source == "this shop"
    assert "runs_hot" in desk.knowledge.complaints


@pytest.mark.parametrize("use_learned", [True, False])
def test_every_visit_weighs_as_the_desk_was_told(desk, sheet, use_learned):
    desk.use_learned = use_learned
    opened = desk.open_case(read_sheet(sheet("pump_overload")))
    assert opened.use_learned is use_learned
    assert desk.visit(opened.case.id).use_learned is use_learned
