"""What a sound machine of a plate is expected to read, against published ranges: the middle is plausible."""

import numpy as np
import pytest

from calc.dc import fit as fit_dc
from calc.induction_1ph import fit as fit_1ph
from calc.induction_3ph import fit as fit_3ph
from calc.twin import Ask
from tests.calc.dc.builders import machine as dc_machine
from tests.calc.dc.builders import rows_of
from tests.calc.induction_1ph.plates import machine as machine_1ph
from tests.calc.induction_3ph.plates import machine as machine_3ph
from tests.calc.induction_3ph.plates import predict
from tests.published.sources import published

DRAWS = 2000


def shares(twin, *asks):
    """Draw machines that the plate allows; their readings, each of shape (DRAWS,)."""
    z = np.random.default_rng(3).standard_normal((DRAWS, twin.dim))
    return [
        found[:, 0] for found in twin.predict(z, rows_of(twin, DRAWS), [Ask(*a.split("@")) for a in asks])
    ]


@published(
    "closed form", "ripple over voltage of sound machines", known="computed",
    says="DC source below 2 %, six pulses 12 to 36 %, single-phase bridge 51 to 90 %",
    checks=["calc.dc.converter.ripple_share", "calc.dc.model.DcTwin"],
)  # fmt: skip
@pytest.mark.parametrize("kind", ["dc_shunt", "dc_separately_excited", "dc_series", "dc_permanent_magnet"])
@pytest.mark.parametrize(
    ("source", "low", "high"), [("battery", 0.0, 2.0), ("rectifier_3ph", 12, 36), ("rectifier_1ph", 51, 90)]
)
def test_the_ripple_of_a_sound_machine_is_that_of_its_source(kind, source, low, high):
    ripple, volts = shares(
        fit_dc(dc_machine(kind, source=source)), "ripple_voltage@loaded", "armature_voltage@loaded"
    )
    percent = 100.0 * ripple / volts
    assert low < np.median(percent) < high
    assert np.mean((percent > 0.9 * low) & (percent < 1.1 * high)) > 0.9


@published(
    "textbook machines", "R_a over rated volts per ampere, by size", known="computed",
    says="0.12-0.2 below 1 kW, 0.05-0.12 to 30 kW, 0.02-0.06 to 150 kW, 0.015-0.06 above 200 kW",
    checks=["calc.dc.plate.LOSS_RATIO", "calc.dc.model.DcTwin"],
)  # fmt: skip
@pytest.mark.parametrize(
    ("kw", "volts", "low", "high"),
    [(0.4, 100, 0.12, 0.2), (3, 240, 0.05, 0.12), (10, 240, 0.05, 0.12), (50, 400, 0.02, 0.06),
     (120, 440, 0.02, 0.06), (300, 500, 0.015, 0.06)],
)  # fmt: skip
def test_the_usual_armature_resistance_lies_in_the_range_of_its_size(kw, volts, low, high):
    plate = {"power": f"{kw} kW", "voltage": f"{volts} V", "speed": "1150 rpm"}
    twin = fit_dc(dc_machine("dc_separately_excited", plate))
    z = np.random.default_rng(3).standard_normal((DRAWS, twin.dim))
    (ohm,) = twin.predict(
        z, rows_of(twin, DRAWS), [Ask("armature_resistance", "isolated", temperature_c=75.0)]
    )
    assert low < np.median(ohm) / (volts / twin.plate.current_a) < high


@published(
    "textbook machines", "Sen 4.6, Guru 6.2, 0.4 kW magnet motor", known="computed",
    says="no-load armature current 5 to 9 % at 5 to 12 kW, 15 % at 0.4 kW, in the middle nine tenths",
    checks="calc.dc.model.DcTwin",
)  # fmt: skip
@pytest.mark.parametrize(("kw", "volts", "share"), [(12, 100, 0.05), (5, 240, 0.089), (0.4, 50, 0.15)])
def test_the_usual_no_load_current_of_a_dc_machine_has_room_for_textbook_machines(kw, volts, share):
    plate = {"power": f"{kw} kW", "voltage": f"{volts} V", "speed": "1150 rpm"}
    twin = fit_dc(dc_machine("dc_permanent_magnet", plate))
    (amps,) = shares(twin, "armature_current@no_load")
    low, high = np.quantile(amps / twin.plate.current_a, [0.05, 0.95])
    assert low < share < high


@published(
    "common range", "no-load current over rated current, by poles", known="from memory",
    says="20-40 % with 2 poles, 25-45 with 4, 35-55 with 6, 45-65 with 8, from 15 kW",
    checks=["calc.induction_3ph.model.fit", "calc.induction_3ph.equivalent.circuit"],
)  # fmt: skip
@pytest.mark.parametrize("kw", [15.0, 45.0, 110.0])
@pytest.mark.parametrize(
    ("poles", "rpm", "low", "high"),
    [(2, 2930, 0.20, 0.40), (4, 1465, 0.25, 0.45), (6, 975, 0.35, 0.55), (8, 730, 0.45, 0.65)],
)
def test_the_usual_no_load_current_lies_in_the_range_of_its_poles(kw, poles, rpm, low, high):
    twin = fit_3ph(machine_3ph(power=1e3 * kw, voltage=400.0, frequency=50.0, speed=float(rpm)))
    assert twin.base.poles == poles
    z = np.random.default_rng(3).standard_normal((DRAWS, twin.dim))
    amps = predict(twin, twin.modes("none")[0], ["line_current@no_load"], z)["line_current@no_load"]
    assert low < np.median(amps.mean(axis=1)) / twin.base.current_a < high


RUN = {"voltage": 230, "frequency": 50, "speed": 1430}


@published(
    "Fitzgerald 9.5 and Guru 10.3", "394 and 445 V on 230 V", known="computed",
    says="the capacitor of a running motor carries 1.3 to 2 times the line voltage",
    checks=["calc.induction_1ph.model.SinglePhaseTwin", "calc.induction_1ph.priors.RUN_VAR_PER_WATT"],
)  # fmt: skip
@pytest.mark.parametrize(("watts", "farad"), [(250, 8e-6), (550, 20e-6), (1100, 30e-6), (2200, 50e-6)])
def test_the_run_capacitor_carries_more_than_the_line(watts, farad):
    twin = fit_1ph(machine_1ph(RUN | {"power": watts, "run_capacitor": farad}))
    (volts,) = shares(twin, "capacitor_voltage@loaded")
    assert 1.3 < np.median(volts) / 230.0 < 2.0


@published(
    "textbook rule", "start winding over run winding, examples 1.8 to 6", known="looked up",
    says="split phase 4.6, capacitor start 2.1, capacitor run 1.8 and more: in the middle nine tenths",
    checks="calc.induction_1ph.priors.MEDIAN_AND_SPREAD",
)  # fmt: skip
@pytest.mark.parametrize(
    ("plate", "ratio"),
    [({"power": 250}, 4.6), ({"power": 550, "run_capacitor": 20e-6}, 2.0)],
    ids=["Hubert 6.1, split phase", "Sen 7.4, capacitor"],
)
def test_the_start_winding_has_the_higher_resistance_by_the_ratio_of_examples(plate, ratio):
    auxiliary, main = shares(
        fit_1ph(machine_1ph(RUN | plate)), "auxiliary_resistance@isolated", "main_resistance@isolated"
    )
    low, middle, high = np.quantile(auxiliary / main, [0.05, 0.5, 0.95])
    assert low < ratio < high
    assert 1.5 < middle < 6.0
