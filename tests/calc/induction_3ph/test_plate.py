"""From plate to circuit: every circuit meets its plate, whatever the plate leaves out."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc.induction_3ph import fit
from calc.induction_3ph.equivalent import circuit
from calc.induction_3ph.plate import INDEX, read_base
from calc.plate_checks import HORSEPOWER_W
from calc.sheet import Machine, Nameplate, Supply, Value
from tests.calc.induction_3ph.plates import ALL, FAN, LIFT, MILL, PUMP, machine

WRITTEN = {"pump": PUMP, "fan": FAN, "mill": MILL, "lift": LIFT}


def exact(found):
    """Current, input and air-gap power of a circuit at its own rated slip, solved here. [pu]"""
    rotor = found.r2 / found.slip + 1j * found.x2
    inner = 1.0 / (1.0 / rotor + found.gc - 1j / found.xm)
    current = 1.0 / (found.r1 + 1j * found.x1 + inner)
    gap = np.abs(current * inner / rotor) ** 2 * found.r2 / found.slip
    return np.abs(current), current.real, gap


def latents(count, spread=1.0, seed=5):
    z = np.random.default_rng(seed).standard_normal((count, len(INDEX))) * spread
    z[:, INDEX["resistance"]] = 0.0  # scatter of the copper itself, on top of what the plate says
    return z


@pytest.mark.parametrize("fields", WRITTEN.values(), ids=WRITTEN)
def test_the_circuit_takes_current_and_power_of_its_plate(fields):
    base = read_base(machine(**fields))
    z = latents(500)
    found = circuit(base, z)
    amps, watts, gap = exact(found)
    told = np.exp(base.current_spread * z[:, INDEX["current"]])
    assert np.quantile(np.abs(amps / told - 1.0), 0.95) < 0.02
    # Input less output is what the plate's efficiency leaves: within a few percent of those losses.
    closed = (watts - found.p_out - found.losses) / found.losses
    assert np.quantile(np.abs(closed), 0.95) < 0.06
    shaft = (found.p_out + found.p_friction + found.p_stray) / (1.0 - found.slip)
    assert np.quantile(np.abs(gap / shaft - 1.0), 0.95) < 0.01


@pytest.mark.parametrize("fields", WRITTEN.values(), ids=WRITTEN)
def test_losses_of_a_typical_machine_add_up_to_what_the_efficiency_leaves(fields):
    found = circuit(read_base(machine(**fields)), np.zeros((1, len(INDEX))))
    amps, watts, gap = exact(found)
    copper = amps**2 * found.r1 + found.slip * gap
    core = watts - gap - amps**2 * found.r1
    total = copper + core + found.p_friction + found.p_stray
    assert total == pytest.approx(found.losses, rel=0.04)
    assert watts == pytest.approx(found.p_out + total, rel=2e-3)


def test_the_typical_pump_meets_its_power_factor():
    twin = fit(machine(**PUMP))
    assert np.abs(twin.plate_misfit(np.zeros((1, twin.dim)))).max() < 1.5


def test_a_plate_without_power_factor_has_no_misfit():
    twin = fit(machine(**FAN))
    assert twin.plate_misfit(np.zeros((7, twin.dim))).shape == (7, 0)


@pytest.mark.parametrize(("letter", "low", "high"), [("G", 5.6, 6.29), ("H", 6.3, 7.09), ("K", 8.0, 8.99)])
def test_a_code_letter_gives_the_locked_rotor_current_of_nema(letter, low, high):
    # NEMA MG 1-10.37.2: kVA per hp with the rotor locked, looked up.
    base = read_base(machine(**{**LIFT, "code_letter": letter}))
    kva = base.locked_ratio * base.current_a * base.voltage_v * np.sqrt(3.0) / 1000.0
    assert low <= kva / (base.power_w / HORSEPOWER_W) <= high


@pytest.mark.parametrize("letter", ["A", "V", "I", "?", "", "Æ", "kVA"])
def test_an_odd_code_letter_is_no_trouble(letter):
    base = read_base(machine(**{**LIFT, "code_letter": letter}))
    assert 1.0 < base.locked_ratio < 30.0


def test_a_missing_field_widens_and_never_sharpens():
    full, thin = read_base(machine(**PUMP)), read_base(machine(voltage=400.0, power=7500.0))
    assert thin.loss_spread > full.loss_spread
    assert thin.slip_spread > full.slip_spread
    assert thin.locked_spread > full.locked_spread
    assert thin.current_spread > full.current_spread


def test_a_speed_printed_coarsely_leaves_the_slip_open():
    # 2970 to the nearest ten against 2970.0: the slip of 30 r/min is known to a tenth or to a sixth.
    fine = read_base(machine(**{**PUMP, "speed": 2970.0}))
    coarse = Value(text="2970 rpm", number=2970.0, unit="rpm", resolution=10.0)
    plate = Nameplate(speed=coarse, power=Value(text="7.5 kW", number=7500.0))
    rough = read_base(Machine(kind="induction_3ph", nameplate=plate, supply=Supply()))
    assert rough.slip_spread > fine.slip_spread


@pytest.mark.parametrize("field", ["power", "current", "voltage", "frequency", "speed"])
def test_any_one_field_may_be_missing(field):
    fields = {k: v for k, v in PUMP.items() if k != field}
    base = read_base(machine(**fields))
    assert base.poles in {2, 4, 6}
    assert base.power_w == pytest.approx(7500.0, rel=0.35)
    assert base.current_a == pytest.approx(14.9, rel=0.35)


def test_a_blank_plate_is_a_wide_guess():
    base = read_base(machine())
    assert base.size_spread > 0.3
    assert base.loss_spread > 0.2


subsets = st.fixed_dictionaries(
    {},
    optional={
        "power": st.floats(30.0, 3e6),
        "voltage": st.floats(24.0, 11e3),
        "current": st.floats(0.05, 3000.0),
        "frequency": st.sampled_from([16.7, 50.0, 60.0, 100.0, 400.0]),
        "speed": st.floats(50.0, 24e3),
        "power_factor": st.floats(0.05, 1.0),
        "efficiency": st.floats(5.0, 99.9),
        "locked_rotor_current_ratio": st.floats(1.0, 15.0),
        "service_factor": st.floats(1.0, 1.4),
        "poles": st.sampled_from([2, 4, 6, 8, 12, 24]),
        "connection": st.sampled_from(["star", "delta", "double_star", "double_delta"]),
        "code_letter": st.sampled_from(["A", "G", "V", "Q"]),
        "insulation_class": st.sampled_from(["A", "B", "F", "H", "N"]),
    },
)


@settings(max_examples=150, deadline=None)
@given(subsets, st.integers(0, 2**32 - 1))
def test_any_plate_whatever_it_says_gives_circuits_with_finite_positive_elements(fields, seed):
    base = read_base(machine(**fields))
    found = circuit(base, np.clip(latents(40, 2.0, seed), -5.0, 5.0))
    for name in ("r1", "x1", "r2", "x2", "xm", "gc", "r2_locked", "x_locked", "flux", "losses", "rise_k"):
        worth = getattr(found, name)
        assert np.isfinite(worth).all(), name
        assert (worth > 0.0).all(), name
    assert (found.slip > 0.0).all()
    assert (found.slip <= 0.35).all()


def test_the_blank_and_the_written_plates_alike_give_one_row_per_latent():
    for fields in ALL.values():
        assert circuit(read_base(machine(**fields)), latents(11)).r1.shape == (11,)
