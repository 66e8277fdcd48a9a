"""The three-phase network as symmetrical components: terminals, lines, and a winding with faults.

Unitary Fortescue components are used: v012 = F v_abc with F unitary, so that a resistance in
one phase or line is a rank-one matrix r e e^H, with e the phase's unit vector in components,
and every such fault is one Sherman-Morrison step (C. L. Fortescue, AIEE Trans. 37 (1918);
J. Sherman and W. J. Morrison, Ann. Math. Stat. 21 (1950)). All arrays are rows first.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from calc.twin import Floats

Phasors = NDArray[np.complex128]

ALPHA = np.exp(2j * np.pi / 3.0)
FORTESCUE: Phasors = np.array([[1, 1, 1], [1, ALPHA, ALPHA**2], [1, ALPHA**2, ALPHA]]) / np.sqrt(3.0)
INVERSE: Phasors = FORTESCUE.conj().T
_TURN = np.exp(1j * np.pi / 6.0)
# A delta winding sees the line voltages: positive sequence turned +30 degrees, negative -30.
DELTA: Phasors = np.array([_TURN, np.conj(_TURN)])


@dataclass(frozen=True)
class WindingFault:
    """What is wrong inside the winding; zeros where nothing is. Arrays of shape (rows,).

    ``series`` is a resistance in one phase (200 pu is open), ``shunt`` an admittance across the
    whole of one phase or, where ``ends`` are not (1, 0), between a share of this phase and a share
    of the next. ``reversed_`` is 1 where a phase is reversed. ``phase`` counts from 0.
    """

    phase: NDArray[np.int64]
    series: Floats
    shunt: Phasors
    reversed_: Floats
    ends: Floats


def winding_admittance(y0: Phasors, y1: Phasors, y2: Phasors, fault: WindingFault, delta: Floats) -> Phasors:
    """Admittance of the winding between its line terminals, positive and negative sequence.

    Parameters
    ----------
    y0, y1, y2 : ndarray of complex
        Sequence admittances of the healthy winding, star-equivalent, shape (rows,). [pu]
    fault : WindingFault
        Asymmetry inside the winding.
    delta : ndarray
        1.0 where the winding is linked in delta, 0.0 in star.

    Returns
    -------
    ndarray of complex
        Shape (rows, 2, 2).

    """
    sound = np.zeros((len(y1), 2, 2), dtype=np.complex128)
    sound[:, 0, 0], sound[:, 1, 1] = y1, y2
    where = np.flatnonzero((fault.series > 0.0) | (fault.shunt != 0.0) | (fault.reversed_ > 0.0))
    if len(where):
        full = np.zeros((len(where), 3, 3), dtype=np.complex128)
        full[:, 0, 0], full[:, 1, 1], full[:, 2, 2] = y0[where], y1[where], y2[where]
        part = WindingFault(
            fault.phase[where],
            fault.series[where],
            fault.shunt[where],
            fault.reversed_[where],
            fault.ends[where],
        )
        sound[where] = _faulted(full, part, delta[where])
    return sound


def _faulted(full: Phasors, fault: WindingFault, delta: Floats) -> Phasors:
    """Put a fault into the windings' (rows, 3, 3) admittance and link them in star or delta: (rows, 2, 2)."""
    unit = FORTESCUE[:, fault.phase].T
    full = _with_series(full, unit, fault.series)
    outer = unit[:, :, None] * unit.conj()[:, None, :]
    following = FORTESCUE[:, (fault.phase + 1) % 3].T
    span = fault.ends[:, :1] * unit - fault.ends[:, 1:] * following
    full = full + fault.shunt[:, None, None] * span[:, :, None] * span.conj()[:, None, :]
    if np.any(fault.reversed_ > 0.0):
        flip = np.eye(3) - 2.0 * fault.reversed_[:, None, None] * outer
        full = flip @ full @ flip
    inner = full[:, 1:, 1:]
    star = inner - full[:, 1:, 0:1] * full[:, 0:1, 1:] / full[:, 0:1, 0:1]
    turned = DELTA.conj()[None, :, None] * inner * DELTA[None, None, :]
    return np.asarray(np.where(delta[:, None, None] > 0.5, turned, star))


def _with_series(admittance: Phasors, unit: Phasors, resistance: Floats) -> Phasors:
    """Put a resistance in series with the element whose unit vector is given."""
    column = np.einsum("rij,rj->ri", admittance, unit)
    row = np.einsum("ri,rij->rj", unit.conj(), admittance)
    gain = resistance / (1.0 + resistance * np.einsum("ri,ri->r", unit.conj(), column))
    return np.asarray(admittance - gain[:, None, None] * column[:, :, None] * row[:, None, :])


def line_unit(line: NDArray[np.int64], upstream: Floats | None = None) -> Phasors:
    """Positive and negative component of one line's unit vector, shape (rows, 2).

    ``upstream`` 1 turns it to where a line on the primary of a delta-star transformer acts: positive
    sequence +30 degrees, negative -30, which gives 1 : 2 : 1 in the motor's lines.
    """
    unit = np.asarray(FORTESCUE[1:, line].T)
    if upstream is None:
        return unit
    turned = np.where(upstream[:, None] > 0.5, DELTA[None, :], 1.0)
    return np.asarray(unit * turned)


def with_line_resistance(admittance: Phasors, unit: Phasors, resistance: Floats) -> Phasors:
    """Put a resistance into the line of a unit vector, before a (rows, 2, 2) admittance. [pu]"""
    where = np.flatnonzero(resistance > 0.0)
    out = admittance.copy()
    out[where] = _with_series(admittance[where], unit[where], resistance[where])
    return out


def solve_two(matrix: Phasors, right: Phasors) -> Phasors:
    """Solve many two-by-two systems by Cramer's rule: (rows, 2, 2) and (rows, 2)."""
    a, b, c, d = matrix[:, 0, 0], matrix[:, 0, 1], matrix[:, 1, 0], matrix[:, 1, 1]
    first, second = right[:, 0], right[:, 1]
    determinant = a * d - b * c
    return np.stack([(d * first - b * second) / determinant, (a * second - c * first) / determinant], axis=1)


def to_lines(components: Phasors) -> Phasors:
    """Three line phasors from positive and negative components (rows, 2); no zero sequence."""
    return np.asarray(components @ INVERSE[:, 1:].T)


def line_to_line(phase_values: Phasors) -> Floats:
    """Magnitudes U-V, V-W, W-U from three phasors, scaled so that a balanced unit set gives 1."""
    return np.asarray(np.abs(phase_values - np.roll(phase_values, -1, axis=1)) / np.sqrt(3.0))


def path_resistance(phases: Floats, phase: NDArray[np.int64], ends: Floats, path: Floats) -> Floats:
    """Resistance between terminals with a path between two phases of a star-equivalent winding: (rows, 3).

    ``phases`` are the three phase resistances, ``ends`` where the path leaves this phase and the next
    as shares from the common point, ``path`` its own resistance; all per unit.
    """
    index = np.arange(len(phase))
    nxt, last = (phase + 1) % 3, (phase + 2) % 3
    r_a, r_b, r_c = phases[index, phase], phases[index, nxt], phases[index, last]
    a, b = ends[:, 0], ends[:, 1]
    loop = a * r_a + b * r_b + path
    out = np.empty((len(phase), 3))
    out[index, phase] = (1 - a) * r_a + (1 - b) * r_b + (a * r_a + b * r_b) * path / loop
    out[index, nxt] = (1 - b) * r_b + b * r_b * (path + a * r_a) / loop + r_c
    out[index, last] = (1 - a) * r_a + a * r_a * (path + b * r_b) / loop + r_c
    return out


def terminal_resistance(phases: Floats, delta: Floats) -> Floats:
    """Resistance between terminals U-V, V-W, W-U from three phase resistances, shape (rows, 3).

    Star: the sum of two phases. Delta (phases given star-equivalent, a third of the winding's own):
    the phase between the terminals in parallel with the other two in series.
    """
    star = phases + np.roll(phases, -1, axis=1)
    own = 3.0 * phases
    others = own.sum(axis=1, keepdims=True) - own
    return np.asarray(np.where(delta[:, None] > 0.5, own * others / (own + others), star))
