"""Back-EMF over speed: a straight line through zero, a little below the volts at rated speed."""

from __future__ import annotations

import numpy as np
import pytest

from calc.dc.curves import emf_curve
from calc.dc.model import DcTwin
from calc.kinds import twin_of
from calc.sheet_io import sheet_from_plain

PLATE = {"power": "10 hp", "voltage": "240 V", "current": "38 A", "speed": "1750 rpm"}


def twin(kind):
    sheet = sheet_from_plain(
        {"format": 1, "machine": {"kind": kind, "nameplate": PLATE}, "complaint": "routine_check"}
    )
    found = twin_of(sheet.machine)
    assert isinstance(found, DcTwin)
    return found


@pytest.mark.parametrize("kind", ["dc_shunt", "dc_separately_excited", "dc_permanent_magnet", "dc_compound"])
def test_at_rated_speed_the_back_emf_is_the_volts_less_some_percent(kind):
    """Chapman, "Electric Machinery Fundamentals", ch. 8: the armature drop is some percent."""
    curve = emf_curve(twin(kind))
    assert curve is not None
    assert curve.at_speed_rpm == pytest.approx(1750, rel=0.06)
    assert 0.85 * 240 < curve.at_emf_v < 0.99 * 240


def test_the_line_is_straight_through_zero_and_its_band_stands_in_order():
    curve = emf_curve(twin("dc_shunt"))
    assert curve is not None
    low, middle, high = curve.emf_v
    assert middle[0] == 0.0
    assert np.allclose(np.diff(middle), middle[1])
    assert np.all(low[1:] < middle[1:]) and np.all(middle[1:] < high[1:])
