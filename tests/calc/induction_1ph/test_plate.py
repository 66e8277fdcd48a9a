import math

import numpy as np
import pytest

from calc.induction_1ph.plate import read_plate
from calc.induction_1ph.plate_fit import fit_plate, residuals
from calc.sheet import Machine, Nameplate, Reading
from tests.calc.induction_1ph.plates import ALL, BOTH, RUN, SPLIT, START, machine, value


def reading(measure, state, number):
    return Reading(measure=measure, state=state, values=(value(number),))


@pytest.mark.parametrize(
    ("fields", "designs"),
    [
        (SPLIT, {"split_phase", "capacitor_start", "capacitor_run", "capacitor_start_run"}),
        (START, {"capacitor_start", "capacitor_start_run"}),
        (RUN, {"capacitor_run", "capacitor_start_run"}),
        (BOTH, {"capacitor_start_run"}),
    ],
)
def test_capacitors_on_the_plate_tell_the_design(fields, designs):
    assert set(read_plate(machine(fields)).design_shares) == designs


def test_a_measured_capacitor_tells_the_design_where_the_plate_is_silent():
    plate = read_plate(machine(SPLIT), (reading("run_capacitance", "isolated", 20e-6),))
    assert "split_phase" not in plate.design_shares


def test_a_capacitor_voltage_while_starting_rules_out_split_phase_only():
    plate = read_plate(machine(SPLIT), (reading("capacitor_voltage", "starting", 250.0),))
    assert set(plate.design_shares) == {"capacitor_start", "capacitor_run", "capacitor_start_run"}


@pytest.mark.parametrize(
    ("speed", "frequency", "poles"),
    [(2850, 50, 2), (1440, 50, 4), (950, 50, 6), (3450, 60, 2), (1725, 60, 4), (1140, 60, 6), (700, 50, 8)],
)
def test_poles_follow_from_plate_speed_and_frequency(speed, frequency, poles):
    plate = read_plate(machine({**SPLIT, "speed": speed, "frequency": frequency}))
    assert plate.poles == poles


def test_an_empty_plate_takes_its_voltage_class_and_poles_from_what_was_read():
    empty = Machine(kind="induction_1ph", nameplate=Nameplate())
    read = (reading("supply_voltage", "loaded", 118.0), reading("speed", "loaded", 1120.0))
    plate = read_plate(empty, read)
    assert (plate.voltage_v, plate.frequency_hz, plate.poles) == (115.0, 60.0, 6)


def test_the_site_voltage_is_expected_where_it_is_told():
    assert read_plate(machine(SPLIT, nominal=240.0)).supply_v == 240.0


def test_a_nominal_voltage_of_another_class_is_not_expected():
    assert read_plate(machine(SPLIT, nominal=115.0)).supply_v == 230.0


def test_a_marked_range_of_a_start_capacitor_is_the_range_itself():
    field = Nameplate(start_capacitor=value(161e-6, "F", 1e-6, high=193e-6))
    plate = read_plate(Machine(kind="induction_1ph", nameplate=field))
    assert plate.start_f == pytest.approx(math.sqrt(161e-6 * 193e-6))
    assert plate.start_sigma == pytest.approx(0.25 * math.log(193 / 161) + 0.01)


@pytest.mark.parametrize("name", ALL)
def test_the_fitted_motor_meets_its_plate_at_rated_slip(name):
    plate = read_plate(machine(ALL[name]))
    fitted = fit_plate(plate)
    best = int(np.argmax(fitted.weights))
    assert np.abs(fitted.rest[best]).max() < 2.0


@pytest.mark.parametrize("name", ALL)
def test_all_motors_of_the_span_stay_on_the_plate(name):
    plate = read_plate(machine({**ALL[name], "power_factor": 0.7 if name in {"split phase"} else 0.9}))
    fitted = fit_plate(plate)
    z = np.random.default_rng(3).standard_normal((300, fitted.size))
    design = np.zeros(300, dtype=np.intp)
    along = fitted.base[design] + z @ fitted.span[0]
    linear = fitted.rest[design] + z @ fitted.slope[0]
    off = residuals(plate, fitted.known, along, design) - linear
    back = np.clip(off, -6.0, 6.0) @ fitted.onto[0].T
    again = residuals(plate, fitted.known, along - back, design) - linear
    assert np.abs(again[:, 0]).mean() < 0.35 * np.abs(off[:, 0]).mean() + 0.3


def test_the_plate_current_tells_split_phase_from_capacitor_run():
    """Volt-amperes per watt: common practice, and NEC Table 430.248 for motors with a start winding only."""
    high = fit_plate(read_plate(machine({**SPLIT, "power": 370, "current": 4.6})))
    low = fit_plate(read_plate(machine({**SPLIT, "power": 370, "current": 2.4})))
    place = high.known.designs.index("capacitor_run")
    assert high.weights[place] < 0.05 < low.weights[place]


@pytest.mark.parametrize(("speed", "frequency"), [(1725, 60.0), (1440, 50.0), (1140, 60.0), (2850, 50.0)])
def test_the_speed_tells_the_frequency_where_the_plate_does_not(speed, frequency):
    fields = {"voltage": 230, "speed": speed}
    assert read_plate(machine(fields)).frequency_hz == frequency


def test_output_and_run_capacitor_tell_the_voltage_class():
    fields = {"power": 186, "frequency": 60, "run_capacitor": 20e-6}
    assert read_plate(machine(fields)).voltage_v == 115.0
    assert read_plate(machine({**fields, "run_capacitor": 6e-6})).voltage_v == 230.0


def test_a_run_capacitor_alone_tells_the_size():
    small, large = (
        read_plate(machine({"voltage": 230, "frequency": 50, "run_capacitor": farad})).power_w
        for farad in (8e-6, 80e-6)
    )
    assert large == pytest.approx(10.0 * small)
    assert 100.0 < small < 500.0
