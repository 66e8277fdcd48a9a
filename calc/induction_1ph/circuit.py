"""Two windings in space quadrature on one cage rotor, by the double revolving field.

Main and auxiliary winding are resolved into a field that turns with the rotor and one
that turns against it [1]_ [2]_. With ``I_m`` and ``I_a`` the winding currents and ``a``
the turns ratio auxiliary / main, the currents that make the two fields are
``I_m - j a I_a`` (forward) and ``I_m + j a I_a`` (backward). Everything is per phasor in
r.m.s. volts, amperes and ohms, and broadcasts over rows.

References
----------
.. [1] A. E. Fitzgerald, C. Kingsley and S. D. Umans, "Electric Machinery", ch. 9.
.. [2] G. R. Slemon, "Electric Machines and Drives", ch. 5 (unsymmetrical two-phase machine).

"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from calc.twin import Floats

Phasors = NDArray[np.complex128]


@dataclass(frozen=True)
class Rotor:
    """The cage and the magnetising path, seen from the main winding, each of shape (rows,) or broadcastable.

    ``magnetising_ohm`` is the whole reactance; each of the two fields sees half of it.
    ``core_ohm`` lies across it (infinite: no core loss in the circuit).
    ``backward_ratio`` is the resistance that the backward field finds over that of the
    forward field: deep bars at nearly twice line frequency.
    """

    magnetising_ohm: Floats
    core_ohm: Floats
    rotor_ohm: Floats
    rotor_reactance_ohm: Floats
    backward_ratio: Floats


@dataclass(frozen=True)
class Windings:
    """Stator side: series impedances (the auxiliary one with its capacitor) and source voltages.

    ``main_ohm`` is what is left of the main winding where turns are shorted: ``turn_share`` of
    them, in a loop whose admittance, counted in turns of the whole winding, is ``loop_siemens``.
    """

    main_ohm: Phasors
    auxiliary_ohm: Phasors
    turns_ratio: Floats
    main_volt: Phasors
    auxiliary_volt: Phasors
    turn_share: Floats
    loop_siemens: Phasors


@dataclass(frozen=True)
class Currents:
    """Winding currents as phasors, the forward induced voltage, and torque in synchronous watts."""

    main: Phasors
    auxiliary: Phasors
    forward_emf: Phasors
    backward_emf: Phasors
    torque_w: Floats


def half_field_ohm(rotor: Rotor, slip: Floats, *, backward: bool) -> tuple[Phasors, Phasors]:
    """Return the impedance of one field as one winding sees it, and the rotor's own admittance.

    Parameters
    ----------
    rotor : Rotor
        Cage and magnetising path.
    slip : ndarray
        Slip against the forward field. [1]
    backward : bool
        Take the field that turns against the rotor (slip ``2 - slip``).

    Returns
    -------
    tuple of ndarray
        Half-field impedance [ohm] and rotor admittance of the whole field [S].

    """
    against = 2.0 - slip if backward else slip
    ohm = rotor.rotor_ohm * rotor.backward_ratio if backward else rotor.rotor_ohm
    rotor_siemens = against / (ohm + 1j * against * rotor.rotor_reactance_ohm)
    half = 0.5 / (1.0 / rotor.core_ohm - 1j / rotor.magnetising_ohm + rotor_siemens)
    return np.asarray(half, dtype=np.complex128), np.asarray(rotor_siemens, dtype=np.complex128)


def solve_currents(windings: Windings, rotor: Rotor, slip: Floats) -> Currents:
    r"""Return currents and torque of both windings at a slip.

    Parameters
    ----------
    windings : Windings
        Stator side.
    rotor : Rotor
        Rotor side.
    slip : ndarray
        Slip, 1 at standstill. [1]

    Returns
    -------
    Currents
        Torque is positive in the direction in which a leading auxiliary current drives;
        synchronous watts: divide by the synchronous speed in rad/s for newton metres.

    Notes
    -----
    .. math::

        V_m = (Z_m + Z_f + Z_b) I_m - j a (Z_f - Z_b) I_a \\
        V_a = j a (Z_f - Z_b) I_m + (Z_a + a^2 (Z_f + Z_b)) I_a

    With a share ``m`` of the main turns shorted, the field is made by ``(1 - m) I_m`` less the
    loop's ``m y E``, and the winding sees ``(1 - m) E``. Source and impedance are replaced by
    their Thevenin equivalent in the field's current, so the two equations keep their form.

    """
    forward, forward_siemens = half_field_ohm(rotor, slip, backward=False)
    backward, backward_siemens = half_field_ohm(rotor, slip, backward=True)
    shorted = bool(windings.turn_share.any())
    source, series = windings.main_volt, windings.main_ohm
    left = 1.0 - windings.turn_share
    if shorted:
        divider = 1.0 / (left + series * windings.turn_share * windings.loop_siemens / left)
        source, series = source * divider, series * divider / left
    ratio = windings.turns_ratio
    both = forward + backward
    own = series + both
    other = windings.auxiliary_ohm + ratio**2 * both
    mutual = 1j * ratio * (forward - backward)
    determinant = own * other + mutual * mutual
    field_current = (other * source + mutual * windings.auxiliary_volt) / determinant
    auxiliary = (own * windings.auxiliary_volt - mutual * source) / determinant
    across = 1j * ratio * auxiliary
    ahead = (field_current - across) * forward
    against = (field_current + across) * backward
    torque = 2.0 * (square(ahead) * forward_siemens.real - square(against) * backward_siemens.real)
    main = field_current
    if shorted:
        main = (main + windings.turn_share * windings.loop_siemens * (ahead + against)) / left
    return Currents(main=main, auxiliary=auxiliary, forward_emf=ahead, backward_emf=against, torque_w=torque)


def square(phasor: Phasors) -> Floats:
    """Squared magnitude, without the root."""
    return np.asarray(phasor.real**2 + phasor.imag**2, dtype=np.float64)
