"""Symmetrical components against plain nodal analysis of three phases, and resistances between terminals."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calc.induction_3ph.network import (
    FORTESCUE,
    INVERSE,
    WindingFault,
    line_to_line,
    line_unit,
    path_resistance,
    terminal_resistance,
    to_lines,
    winding_admittance,
    with_line_resistance,
)

EASY = settings(max_examples=60, deadline=None)
ohms = st.floats(0.05, 5.0)
part = st.floats(0.05, 3.0)
admittances = st.builds(lambda g, b: complex(g, -b), part, part)
phases = st.integers(0, 2)
NEXT = np.roll(np.eye(3), 1, axis=1)  # picks the following phase


def one(x, kind=float):
    return np.array([x], dtype=kind)


def nodal(winding, *, delta):
    """Line currents per line voltage, from the winding's own (3, 3) admittance, all star-equivalent."""
    if delta:  # winding k lies between line k and the next
        between = (np.eye(3) - NEXT) / np.sqrt(3.0)
        return between.T @ winding @ between
    # The star point floats: its voltage is what makes the currents add to nothing.
    ones = np.ones((3, 1))
    return winding - winding @ ones @ ones.T @ winding / (ones.T @ winding @ ones)


def in_components(lines):
    return (FORTESCUE @ lines @ INVERSE)[1:, 1:]


def fault(phase=0, series=0.0, shunt=0j, reversed_=0.0, ends=(1.0, 0.0)):
    return WindingFault(
        one(phase, np.int64), one(series), one(shunt, complex), one(reversed_), np.array([ends], dtype=float)
    )


@EASY
@given(
    admittances,
    admittances,
    admittances,
    phases,
    st.sampled_from([0.0, 0.02, 0.7, 200.0]),
    st.sampled_from([0j, 0.01 + 0j, 3.0 - 2.0j]),
    st.sampled_from([(1.0, 0.0), (0.85, 0.85), (0.8, 0.3)]),
    st.booleans(),
    st.booleans(),
)
def test_a_faulty_winding_draws_what_nodal_analysis_gives(
    y0, y1, y2, phase, series, shunt, ends, backwards, delta
):
    healthy = INVERSE @ np.diag([y0, y1, y2]) @ FORTESCUE
    unit = np.eye(3)[phase]
    inside = np.linalg.inv(np.linalg.inv(healthy) + series * np.outer(unit, unit))
    span = ends[0] * unit - ends[1] * np.eye(3)[(phase + 1) % 3]
    inside = inside + shunt * np.outer(span, span)
    if backwards:
        inside = inside * np.outer(1.0 - 2.0 * unit, 1.0 - 2.0 * unit)
    wrong = fault(phase, series, shunt, float(backwards), ends)
    found = winding_admittance(
        one(y0, complex), one(y1, complex), one(y2, complex), wrong, one(float(delta))
    )[0]
    expected = in_components(nodal(inside, delta=delta))
    if series or shunt or backwards:
        assert found == pytest.approx(expected, rel=1e-6, abs=1e-8 * np.abs(expected).max())
    else:
        assert found == pytest.approx(np.diag([y1, y2]), rel=1e-12)


@EASY
@given(admittances, admittances, phases, st.floats(0.001, 300.0))
def test_a_resistance_in_a_line_draws_what_nodal_analysis_gives(y1, y2, line, ohm):
    motor = np.diag([y1, y2])[None].astype(complex)
    lines = INVERSE[:, 1:] @ motor[0] @ FORTESCUE[1:]
    drop = ohm * np.outer(np.eye(3)[line], np.eye(3)[line])
    # I = Y (V - R I); the star point of the motor carries nothing.
    expected = in_components(np.linalg.solve(np.eye(3) + lines @ drop, lines))
    found = with_line_resistance(motor, line_unit(one(line, np.int64)), one(ohm))[0]
    assert found == pytest.approx(expected, rel=1e-6, abs=1e-9)


@EASY
@given(admittances, admittances)
def test_no_resistance_in_a_line_changes_nothing(y1, y2):
    motor = np.diag([y1, y2])[None].astype(complex)
    unit = line_unit(one(1, np.int64))
    assert with_line_resistance(motor, unit, one(0.0)) == pytest.approx(motor, rel=1e-15)


@EASY
@given(admittances, admittances)
def test_components_and_lines_are_one_thing(positive, negative):
    lines = to_lines(np.array([[positive, negative]]))
    assert lines.sum() == pytest.approx(0.0, abs=1e-12)
    assert (FORTESCUE @ lines[0])[1:] == pytest.approx([positive, negative])


def test_a_balanced_set_reads_one_between_any_two_lines():
    assert line_to_line(to_lines(np.array([[np.sqrt(3.0), 0.0]], dtype=complex))) == pytest.approx(
        np.ones((1, 3))
    )


# Resistance between terminals.


def by_nodes(branches, nodes, a, b):
    """Resistance between two nodes of a network of (node, node, ohm)."""
    laplace = np.zeros((nodes, nodes))
    for i, j, ohm in branches:
        g = 1.0 / ohm
        laplace[[i, j], [i, j]] += g
        laplace[[i, j], [j, i]] -= g
    inverse = np.linalg.pinv(laplace)
    return inverse[a, a] + inverse[b, b] - 2.0 * inverse[a, b]


@EASY
@given(st.tuples(ohms, ohms, ohms))
def test_star_and_delta_read_between_terminals_what_their_branches_give(own):
    star = [(k, 3, own[k]) for k in range(3)]
    # In delta the phases are handed over as their star equivalent, a third of the winding's own.
    delta = [(k, (k + 1) % 3, 3.0 * own[k]) for k in range(3)]
    for branches, nodes, linked in ((star, 4, 0.0), (delta, 3, 1.0)):
        expected = [by_nodes(branches, nodes, k, (k + 1) % 3) for k in range(3)]
        assert terminal_resistance(np.array([own]), one(linked))[0] == pytest.approx(expected, rel=1e-9)


def test_equal_phases_read_twice_a_phase_in_star_and_two_thirds_of_it_in_delta():
    # Star-equivalent phases of 1 ohm: in delta the winding itself has 3 ohm. Identities (computed).
    assert terminal_resistance(np.ones((1, 3)), one(0.0))[0] == pytest.approx([2.0] * 3)
    assert terminal_resistance(np.ones((1, 3)), one(1.0))[0] == pytest.approx([2.0 / 3.0 * 3.0] * 3)


@pytest.mark.parametrize("phase", [0, 1, 2])
def test_one_open_phase_in_delta_reads_three_times_and_one_and_a_half_times(phase):
    own = np.ones((1, 3))
    own[0, phase] = 1e9
    ratio = terminal_resistance(own, one(1.0))[0] / 2.0
    assert ratio == pytest.approx([3.0 if k == phase else 1.5 for k in range(3)], rel=1e-6)


@pytest.mark.parametrize("phase", [0, 1, 2])
def test_one_open_phase_in_star_leaves_one_finite_reading(phase):
    own = np.ones((1, 3))
    own[0, phase] = 1e9
    read = terminal_resistance(own, one(0.0))[0]
    opposite = (phase + 1) % 3
    assert read[opposite] == pytest.approx(2.0)
    assert (np.delete(read, opposite) > 1e8).all()


@EASY
@given(
    st.tuples(ohms, ohms, ohms), phases, st.floats(0.05, 0.95), st.floats(0.05, 0.95), st.floats(0.01, 100.0)
)
def test_a_path_between_two_phases_reads_what_its_branches_give(own, phase, a, b, path):
    # Nodes: terminals 0 to 2, star point 3, the two ends of the path 4 and 5.
    following, last = (phase + 1) % 3, (phase + 2) % 3
    branches = [
        (phase, 4, (1 - a) * own[phase]),
        (4, 3, a * own[phase]),
        (following, 5, (1 - b) * own[following]),
        (5, 3, b * own[following]),
        (last, 3, own[last]),
        (4, 5, path),
    ]
    expected = [by_nodes(branches, 6, k, (k + 1) % 3) for k in range(3)]
    ends = np.array([[a, b]])
    found = path_resistance(np.array([own]), one(phase, np.int64), ends, one(path))[0]
    assert found == pytest.approx(expected, rel=1e-7)


@EASY
@given(st.tuples(ohms, ohms, ohms), st.booleans())
def test_renaming_the_phases_renames_the_readings(own, delta):
    linked = one(float(delta))
    read = terminal_resistance(np.array([own]), linked)[0]
    renamed = terminal_resistance(np.roll([own], 1, axis=1), linked)[0]
    assert renamed == pytest.approx(np.roll(read, 1))
