"""What a machine's own windings read before narrows what they should read now, and nothing else."""

import numpy as np
import pytest

from calc.kinds import twin_of
from calc.sheet_io import sheet_from_plain
from calc.temperature import winding_resistance_at
from calc.twin import Ask, Twin
from rules.diagnosing import diagnose
from rules.weigh.conditioned import conditioned
from tests.rules.makers import shipped

KNOWN = shipped()
PLATES = {
    "induction_3ph": {
        "power": "7.5 kW", "voltage": "400 V", "current": "14.9 A", "frequency": "50 Hz", "speed": "1455 rpm",
        "power_factor": 0.84, "efficiency": "88.7 %", "connection": "delta",
    },
    "induction_1ph": {"power": "0.75 kW", "voltage": "230 V", "current": "5.1 A", "frequency": "50 Hz",
                      "speed": "1420 rpm"},
    "dc_shunt": {"power": "5.5 kW", "voltage": "220 V", "current": "30 A", "speed": "1500 rpm"},
}  # fmt: skip
WINDINGS = [
    ("induction_3ph", "winding_resistance", 3),
    ("induction_1ph", "main_resistance", 1),
    ("dc_shunt", "armature_resistance", 1),
]
EACH = pytest.mark.parametrize(("kind", "measure", "count"), WINDINGS, ids=[kind for kind, _, _ in WINDINGS])


def sheet(kind, *readings, complaint="after_repair"):
    machine = {"kind": kind, "nameplate": PLATES[kind]}
    return sheet_from_plain(
        {"format": 1, "machine": machine, "complaint": complaint, "readings": list(readings)}
    )


def read(measure, ohm, count, warm="25 degC"):
    """The winding, read with leads that do not count."""
    value = [f"{ohm:.4g} ohm"] * count if count > 1 else f"{ohm:.4g} ohm"
    context = {"temperature": warm, "method": "four_wire"}
    return {"measure": measure, "state": "isolated", "value": value, **context}


def band_of(diagnosis, measure):
    return next(b for b in diagnosis.expected if (b.measure, b.state) == (measure, "isolated"))


def odds(case, own=None):
    return {f.id: f.probability for f in diagnose(case, knowledge=KNOWN, own=own).faults}


def typical(kind, measure):
    """The middle of what machines of this plate read, at the temperature of own readings."""
    band = band_of(diagnose(sheet(kind), knowledge=KNOWN), measure)
    return winding_resistance_at(resistance_ohm=band.mid, measured_c=band.temperature_c, wanted_c=25.0)


class Noting:
    """A twin that notes the latents that it is asked for."""

    def __init__(self, twin: Twin) -> None:
        self._twin = twin
        self.asked = []

    def __getattr__(self, name):
        return getattr(self._twin, name)

    def predict(self, z, attributes, asks):
        self.asked.append(z)
        return self._twin.predict(z, attributes, asks)


@EACH
@pytest.mark.parametrize("share", [0.75, 1.0, 1.3])
def test_the_band_of_a_winding_narrows_around_what_it_read_before(kind, measure, count, share):
    own = share * typical(kind, measure)
    before = band_of(diagnose(sheet(kind), knowledge=KNOWN), measure)
    after = band_of(diagnose(sheet(kind), knowledge=KNOWN, own={measure: (own,) * count}), measure)
    assert after.high / after.low < 0.75 * before.high / before.low
    there = winding_resistance_at(resistance_ohm=own, measured_c=25.0, wanted_c=after.temperature_c)
    assert after.mid == pytest.approx(there, rel=0.04)
    assert after.low < there < after.high


@EACH
def test_a_level_that_has_changed_leaves_the_band_that_it_was_in_without_history(kind, measure, count):
    ohm = typical(kind, measure)
    case = sheet(kind, read(measure, 1.25 * ohm, count))
    wide = band_of(diagnose(case, knowledge=KNOWN), measure)
    narrow = band_of(diagnose(case, knowledge=KNOWN, own={measure: (ohm,) * count}), measure)
    assert wide.low < 1.25 * ohm < wide.high
    assert 1.25 * ohm > narrow.high


@pytest.mark.parametrize(("ratio", "before"), [(3.0, 1 / 1.7), (1 / 3.0, 1.7)], ids=["star", "delta"])
def test_star_for_delta_is_seen_that_the_plate_alone_leaves_open(ratio, before):
    """Between two terminals star reads three times what delta reads: 2 R against 2 R / 3."""
    own = before * typical("induction_3ph", "winding_resistance")
    case = sheet("induction_3ph", read("winding_resistance", ratio * own, 3))
    assert odds(case)["wrong_connection"] < 0.6
    with_own = odds(case, {"winding_resistance": (own,) * 3})
    assert with_own["wrong_connection"] > 0.95
    assert with_own["healthy"] < 0.01


def test_a_worse_contact_of_the_brushes_is_seen_against_the_armature_of_before():
    own = typical("dc_shunt", "armature_resistance")
    case = sheet("dc_shunt", read("armature_resistance", 1.4 * own, 1))
    assert odds(case, {"armature_resistance": (own,)})["healthy"] < 0.75 * odds(case)["healthy"]


@EACH
def test_a_winding_that_reads_as_before_is_suspected_no_more_than_without_history(kind, measure, count):
    ohm = typical(kind, measure)
    case = sheet(kind, read(measure, ohm, count))
    assert odds(case, {measure: (ohm,) * count})["healthy"] > odds(case)["healthy"] - 0.02


@pytest.mark.parametrize(
    "own",
    [{}, {"no_such_measure": (1.0,)}, {"pole_drop": (1.0, 1.0, 1.0)}, {"insulation_resistance": (3e8,)}],
    ids=["nothing", "unknown", "no winding", "insulation"],
)
def test_without_an_own_winding_the_very_same_twin_comes_back(own):
    case = sheet("induction_3ph")
    twin = twin_of(case.machine, case.readings)
    assert conditioned(twin, own, KNOWN) is twin


@EACH
def test_severities_stay_standard_and_apart_from_the_windings(kind, measure, count):
    case = sheet(kind)
    noting = Noting(twin_of(case.machine, case.readings))
    known = conditioned(noting, {measure: (1.2 * typical(kind, measure),) * count}, KNOWN)
    z = np.random.default_rng(3).standard_normal((50, known.dim)).clip(-4.0, 4.0)
    other = np.array(z)
    other[:, -2:] = -other[:, -2:]
    noting.asked.clear()
    attributes = {name: np.full(50, float(value)) for name, value in known.defaults.items()}
    for rows in (z, other):
        known.predict(rows, attributes, [Ask(measure, "isolated", temperature_c=25.0)])
    first, second = noting.asked
    assert first[:, -2:] == pytest.approx(z[:, -2:])
    assert second[:, -2:] == pytest.approx(other[:, -2:])
    assert first[:, :-2] == pytest.approx(second[:, :-2])
    for effect in known.effects:
        assert known.modes(effect) == noting.modes(effect)


@EACH
def test_other_readings_keep_their_bands_where_the_winding_says_nothing_of_them(kind, measure, count):
    own = {measure: (typical(kind, measure),) * count}
    before = {(b.measure, b.state): b for b in diagnose(sheet(kind), knowledge=KNOWN).expected}
    after = {(b.measure, b.state): b for b in diagnose(sheet(kind), knowledge=KNOWN, own=own).expected}
    assert after.keys() == before.keys()
    for key, band in after.items():
        assert np.isfinite([band.low, band.mid, band.high]).all()
        assert band.high - band.low <= 1.1 * (before[key].high - before[key].low)
