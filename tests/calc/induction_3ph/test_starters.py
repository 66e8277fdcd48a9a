"""What the starter does to the first seconds."""

import numpy as np
import pytest

from calc.induction_3ph import fit
from calc.sheet_io import sheet_from_plain
from calc.twin import Ask, attribute_rows

PLATE = {
    "power": "7.5 kW",
    "voltage": "400 V",
    "current": "14.9 A",
    "frequency": "50 Hz",
    "speed": "1455 rpm",
}


def twin(starter):
    sheet = sheet_from_plain(
        {
            "format": "1",
            "machine": {
                "kind": "induction_3ph",
                "nameplate": PLATE | {"connection": "delta"},
                "starter": starter,
            },
            "complaint": "routine_check",
        }
    )
    return fit(sheet.machine)


def start_a(starter):
    made = twin(starter)
    z = np.zeros((1, made.dim))
    rows = attribute_rows(made.modes("none"), z[None], made.defaults)
    return made.predict(z, rows, [Ask("line_current", "starting")])[0][0]


def test_a_star_delta_starter_draws_a_third_of_the_direct_starting_current():
    """Identity of the linear circuit: star on the same volts takes a third (computed)."""
    ratio = start_a("star_delta") / start_a("direct")
    assert ratio == pytest.approx(1 / 3, rel=0.06)  # the supply sags less


@pytest.mark.parametrize("starter", ["soft_starter", "autotransformer", "inverter"])
def test_a_start_that_the_starter_limits_says_little_of_the_motor(starter):
    ask = Ask("line_current", "starting")
    assert twin(starter).model_error(ask).level > 5 * twin("direct").model_error(ask).level


def test_only_a_star_delta_starter_can_stay_in_star():
    assert twin("star_delta").modes("stuck_in_star")
    assert not twin("direct").modes("stuck_in_star")
