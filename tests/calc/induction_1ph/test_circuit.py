import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.induction_1ph.circuit import Rotor, Windings, half_field_ohm, solve_currents, square
from calc.induction_1ph.machine import capacitor_ohm, in_parallel, saturation


def column(x):
    return np.array([x], dtype=np.float64)


ohms = st.floats(0.05, 40.0)
slips = st.floats(0.001, 1.0)


def standing(rotor):
    """At standstill both fields find the same rotor."""
    return Rotor(**{**vars(rotor), "backward_ratio": column(1.0)})


@st.composite
def motors(draw):
    main = draw(ohms) + 1j * draw(ohms)
    auxiliary = draw(ohms) + 1j * draw(st.floats(-200.0, 40.0))
    rotor = Rotor(
        magnetising_ohm=column(draw(st.floats(20.0, 500.0))),
        core_ohm=column(draw(st.floats(200.0, 5000.0))),
        rotor_ohm=column(draw(ohms)),
        rotor_reactance_ohm=column(draw(ohms)),
        backward_ratio=column(draw(st.floats(1.0, 2.0))),
    )
    fed = Windings(
        main_ohm=np.array([main]),
        auxiliary_ohm=np.array([auxiliary]),
        turns_ratio=column(draw(st.floats(0.5, 2.0))),
        main_volt=np.array([230.0 + 0j]),
        auxiliary_volt=np.array([230.0 + 0j]),
        turn_share=column(0.0),
        loop_siemens=np.array([0j]),
    )
    return fed, rotor


@given(motors(), slips)
def test_power_given_is_copper_core_and_what_crosses_the_air_gap(machine, slip):
    fed, rotor = machine
    found = solve_currents(fed, rotor, column(slip))
    given_w = 230.0 * (found.main + found.auxiliary).real
    copper_w = square(found.main) * fed.main_ohm.real + square(found.auxiliary) * fed.auxiliary_ohm.real
    fields_w = 0.0
    for emf, backward in ((found.forward_emf, False), (found.backward_emf, True)):
        _, siemens = half_field_ohm(rotor, column(slip), backward=backward)
        fields_w = fields_w + 2.0 * square(emf) * (siemens.real + 1.0 / rotor.core_ohm)
    np.testing.assert_allclose(given_w, copper_w + fields_w, rtol=1e-9, atol=1e-6)


@given(motors())
def test_reversing_the_auxiliary_winding_reverses_the_torque_of_standstill(machine):
    fed, rotor = machine[0], standing(machine[1])
    turned = Windings(**{**vars(fed), "auxiliary_volt": -fed.auxiliary_volt})
    one = solve_currents(fed, rotor, column(1.0))
    other = solve_currents(turned, rotor, column(1.0))
    size = 2.0 * square(one.forward_emf) / rotor.rotor_ohm
    np.testing.assert_allclose(one.torque_w, -other.torque_w, atol=1e-9 * float(size[0]) + 1e-9)


@given(motors())
def test_one_winding_alone_gives_no_starting_torque(machine):
    fed, rotor = machine[0], standing(machine[1])
    alone = Windings(**{**vars(fed), "auxiliary_ohm": np.array([1e12 + 0j])})
    found = solve_currents(alone, rotor, column(1.0))
    assert abs(found.torque_w[0]) < 1e-6 * float(square(found.main)[0]) * 100.0 + 1e-6


@given(motors(), slips, st.floats(1e-9, 1e-7))
def test_hardly_any_shorted_turns_change_hardly_anything(machine, slip, share):
    fed, rotor = machine
    shorted = Windings(**{**vars(fed), "turn_share": column(share), "loop_siemens": 1.0 / fed.main_ohm})
    sound = solve_currents(fed, rotor, column(slip))
    faulty = solve_currents(shorted, rotor, column(slip))
    scale = abs(sound.main[0]) + 230.0 / abs(fed.main_ohm[0])
    assert abs(faulty.main[0] - sound.main[0]) < 1e-5 * scale


@given(motors(), slips, st.floats(0.01, 0.3))
def test_power_goes_into_the_shorted_loop_and_nowhere_else(machine, slip, share):
    fed, rotor = machine
    whole = complex(fed.main_ohm[0])
    fed = Windings(
        **{
            **vars(fed),
            "main_ohm": np.array([whole.real * (1 - share) + 1j * whole.imag * (1 - share) ** 2]),
            "turn_share": column(share),
            "loop_siemens": np.array([1.0 / whole]),
        }
    )
    found = solve_currents(fed, rotor, column(slip))
    given_w = 230.0 * (found.main + found.auxiliary).real
    emf = found.forward_emf + found.backward_emf
    loop_w = share * square(emf) * fed.loop_siemens.real
    used_w = loop_w + square(found.main) * fed.main_ohm.real
    used_w = used_w + square(found.auxiliary) * fed.auxiliary_ohm.real
    for field, backward in ((found.forward_emf, False), (found.backward_emf, True)):
        _, siemens = half_field_ohm(rotor, column(slip), backward=backward)
        used_w = used_w + 2.0 * square(field) * (siemens.real + 1.0 / rotor.core_ohm)
    np.testing.assert_allclose(given_w, used_w, rtol=1e-8, atol=1e-6)


def test_a_missing_capacitor_is_an_open_circuit():
    assert abs(capacitor_ohm(column(0.0), column(314.0), loss_factor=0.0)[0]) == pytest.approx(1e9)


def test_a_shorted_capacitor_shorts_what_lies_beside_it():
    beside = in_parallel(np.array([0j]), np.array([3.0 - 40j]))
    assert beside[0] == 0.0


def test_the_iron_saturates_above_rated_voltage_and_is_one_there():
    factor = saturation(np.array([0.5, 1.0, 1.2]))
    assert factor[1] == 1.0
    assert factor[0] > 1.0 > factor[2] > 0.5
