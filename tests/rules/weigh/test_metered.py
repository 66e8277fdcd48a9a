"""One meter's gain error is the same in all that it reads, so differences are free of it."""

import msgspec
import numpy as np
import pytest

from calc.kinds import twin_of
from calc.twin import Ask, attribute_rows
from rules.weigh.instruments import instrument_errors
from rules.weigh.metered import MeteredTwin, repeatability
from rules.weigh.posterior import weigh
from tests.rules.makers import shipped

from .cases import simulated


def scaled(sheet, measure, factor):
    def changed(reading):
        if reading.measure != measure:
            return reading
        values = tuple(
            msgspec.structs.replace(v, number=v.number * factor, text=f"{v.number * factor:.5g} A")
            for v in reading.values
        )
        return msgspec.structs.replace(reading, values=values)

    return msgspec.structs.replace(sheet, readings=tuple(changed(r) for r in sheet.readings))


def test_gain_and_repeatability_make_up_the_meter_s_whole_error():
    meters = instrument_errors(shipped())
    left = repeatability(meters)["line_current"]
    gain = MeteredTwin(twin_of(simulated(0).machine), meters)._gain["line_current"]
    assert gain**2 + left.share**2 == pytest.approx(meters["line_current"].share ** 2)


def test_a_meter_latent_moves_all_that_the_meter_reads_alike_and_nothing_else():
    twin = MeteredTwin(twin_of(simulated(0).machine), instrument_errors(shipped()))
    asks = [Ask("line_current", "loaded"), Ask("line_current", "no_load"), Ask("speed", "loaded")]
    z = np.zeros((2, twin.dim))
    z[1, 0] = 1.0
    rows = attribute_rows(twin.modes("none"), z[None], twin.defaults)
    loaded, idle, speed = twin.predict(z, rows, asks)
    assert loaded[1] / loaded[0] == pytest.approx(idle[1] / idle[0])
    assert loaded[1, 0] > loaded[0, 0]
    assert speed[1] == pytest.approx(speed[0])


def test_a_clamp_that_reads_two_percent_high_everywhere_accuses_nobody():
    sheet = simulated(3)
    plain = weigh(sheet, shipped(), twin_of(sheet.machine)).odds["healthy"]
    off = scaled(sheet, "line_current", 1.02)
    assert weigh(off, shipped(), twin_of(off.machine)).odds["healthy"] > 0.7 * plain
