"""A cage motor on its feeder, solved node by node in phase coordinates at one slip or many.

Every phase winding is two coils in series with a tap between them, on which shorts and earth faults
hang. Coils of all phases are coupled through the air gap; source, contactor, cable and terminal
joints are branches of their own in each line. Steady state, one frequency. [SI]

Nodal method: C.-W. Ho, A. E. Ruehli, P. A. Brennan, IEEE Trans. CAS-22 (1975) 504. Air gap as two
counter-rotating fields: P. L. Alger, Induction Machines, ch. 4 (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

Floats: TypeAlias = NDArray[np.float64]
Complexes: TypeAlias = NDArray[np.complex128]

OPEN_OHM = 1e7
TURN = np.exp(2j * np.pi / 3)
FORTESCUE = np.array([[1, 1, 1], [1, TURN**2, TURN], [1, TURN, TURN**2]])
SOURCE, STARTER, MOTOR, BOX, TAP, STAR = 0, 3, 6, 9, 12, 15  # first node of each three; one star point
NODES = 16
ROUNDS = 14  # of saturation

# Magnetising current over its rated value, against air-gap voltage over its rated value.
MAGNETISING = (
    (0.0, 0.4, 0.7, 0.85, 1.0, 1.1, 1.2, 1.3, 1.5, 1.8, 2.5),
    (0.0, 0.35, 0.62, 0.78, 1.0, 1.24, 1.70, 2.6, 5.4, 11.0, 30.0),
)
# Leakage reactance over its unsaturated value, against line current over rated current.
LEAKAGE = ((0.0, 1.5, 3.0, 5.0, 7.0, 10.0), (1.0, 1.0, 0.94, 0.85, 0.78, 0.72))


@dataclass(frozen=True)
class Winding:
    """One machine per phase, at rated frequency, with its windings at the temperature of rated load."""

    voltage_v: float
    """Rated, across one phase winding."""
    current_a: float
    """Rated, in one phase winding."""
    frequency_hz: float
    poles: int
    stator_ohm: float
    stator_leakage_ohm: float
    magnetising_ohm: float
    iron_ohm: float
    rotor_leakage_ohm: float
    """Common to both cages."""
    outer_ohm: float
    inner_ohm: float
    inner_leakage_ohm: float
    curve: float = 1.0
    """How sharply iron saturates: 1 is the common curve."""
    is_delta: bool = True

    def rotor_admittance(self, slip: Floats, hertz: float, leak: Floats, heat: float = 1.0) -> Complexes:
        """Return the admittance of both cages at a slip, on the air gap. [S]"""
        x = hertz / self.frequency_hz
        slip = np.where(np.abs(slip) < 1e-7, 1e-7, slip)
        outer = heat * self.outer_ohm / slip
        inner = heat * self.inner_ohm / slip + 1j * x * self.inner_leakage_ohm
        return np.asarray(1.0 / (1j * x * leak * self.rotor_leakage_ohm + outer * inner / (outer + inner)))


@dataclass(frozen=True)
class Feeder:
    """What brings the voltage: sources to earth, and the impedance of each line. [V, ohm]"""

    emf_v: Complexes
    hertz: float
    source_ohm: complex
    cable_ohm: complex
    before_ohm: tuple[float, float, float] = (0.0, 0.0, 0.0)
    """Between source and starter output: fuse, contactor."""
    after_ohm: tuple[float, float, float] = (0.0, 0.0, 0.0)
    """Between starter output and motor: cable joint."""
    joint_ohm: tuple[float, float, float] = (0.0, 0.0, 0.0)
    """In the terminal box, behind the terminals."""


@dataclass(frozen=True)
class Wound:
    """How the windings are joined, and what is wrong inside them."""

    is_delta: bool
    stator_heat: float = 1.0
    rotor_heat: float = 1.0
    extra_ohm: tuple[float, float, float] = (0.0, 0.0, 0.0)
    """In series with each phase winding."""
    sense: tuple[float, float, float] = (1.0, 1.0, 1.0)
    """-1 where a phase is reversed."""
    tap: tuple[float, float, float] = (0.5, 0.5, 0.5)
    """Share of the turns between the line end and the tap."""
    shorts: tuple[tuple[int, int, float], ...] = field(default=())
    """Further branches: node, node (-1 is earth), ohm."""


@dataclass(frozen=True)
class Flow:
    """What flows, one row per slip."""

    volts: Complexes
    """Of every node to earth."""
    line_a: Complexes
    """Into the motor through each cable."""
    forward_w: Floats
    backward_w: Floats
    """Air-gap power of both fields."""
    coil_a: Complexes
    leak: Floats
    gap_v: Floats

    def torque_nm(self, machine: Winding, hertz: float) -> Floats:
        """Return the torque of the air gap."""
        return np.asarray((self.forward_w - self.backward_w) * machine.poles / (4 * np.pi * hertz))

    def line_to_line(self, first: int) -> Complexes:
        """Return L1-L2, L2-L3, L3-L1 at one of the places SOURCE, STARTER, MOTOR."""
        v = self.volts[:, first : first + 3]
        return np.asarray(v - np.roll(v, -1, axis=1))

    def power_w(self, first: int) -> Floats:
        """Return the power that passes one place into the motor."""
        return np.asarray(np.sum((self.volts[:, first : first + 3] * self.line_a.conj()).real, axis=1))


def solve(machine: Winding, feeder: Feeder, wound: Wound, slip: Floats) -> Flow:
    """Return the steady state at every slip, iterating iron and leakage saturation."""
    slip = np.atleast_1d(np.asarray(slip, dtype=float))
    gap = np.full(len(slip), machine.voltage_v * 0.93)
    amps = np.full(len(slip), machine.current_a)
    flow = _once(machine, feeder, wound, slip, gap, amps)
    for _ in range(ROUNDS):
        new_gap = np.maximum(flow.gap_v, 1e-3 * machine.voltage_v)
        gap = 0.5 * (gap + new_gap)
        amps = 0.5 * (amps + np.max(np.abs(flow.coil_a), axis=1))
        flow = _once(machine, feeder, wound, slip, gap, amps)
        if np.max(np.abs(flow.gap_v / gap - 1.0)) < 2e-4:
            break
    return flow


def terminal_ohms(machine: Winding, wound: Wound, feeder: Feeder, *, cold: float) -> Floats:
    """Return the DC resistances U-V, V-W, W-U at the motor terminals; ``cold`` scales the copper."""
    nodal = np.zeros((NODES, NODES))
    for k in range(3):
        share = wound.tap[k]
        ohm = machine.stator_ohm * cold
        _join(nodal, MOTOR + k, BOX + k, feeder.joint_ohm[k])
        _join(nodal, BOX + k, TAP + k, ohm * share + wound.extra_ohm[k])
        _join(nodal, TAP + k, _far_end(k, wound.is_delta), ohm * (1 - share))
    for one, other, ohm in wound.shorts:
        if other >= 0:
            _join(nodal, one, other, ohm)
    nodal += np.diag(np.full(NODES, 1e-9))
    ohms = np.linalg.inv(nodal)
    pairs = ((MOTOR + k, MOTOR + (k + 1) % 3) for k in range(3))
    return np.array([ohms[a, a] + ohms[b, b] - 2 * ohms[a, b] for a, b in pairs])


def _join(nodal: Floats, one: int, other: int, ohm: float) -> None:
    y = 1.0 / max(ohm, 1e-6)
    nodal[one, one] += y
    nodal[other, other] += y
    nodal[one, other] -= y
    nodal[other, one] -= y


def _far_end(phase: int, is_delta: bool) -> int:
    return BOX + (phase + 1) % 3 if is_delta else STAR


def _once(machine: Winding, feeder: Feeder, wound: Wound, slip: Floats, gap: Floats, amps: Floats) -> Flow:
    """Solve the network with the saturation of the round before."""
    x = feeder.hertz / machine.frequency_hz
    leak = np.interp(amps / machine.current_a, *LEAKAGE)
    seen = _air_gap(machine, wound, slip, feeder.hertz, gap, leak)
    coils, turns = _coil_matrix(machine, wound, seen, leak, x)
    incidence = np.zeros((NODES, 6))
    for k in range(3):
        incidence[[BOX + k, TAP + k], 2 * k] = 1, -1
        incidence[TAP + k, 2 * k + 1] = 1
        incidence[_far_end(k, wound.is_delta), 2 * k + 1] -= 1
    admittance = np.linalg.inv(coils)
    network, injected = _network(feeder, wound)
    nodal = network + incidence @ admittance @ incidence.T
    volts = np.linalg.solve(nodal, np.broadcast_to(injected[:, None], (len(slip), NODES, 1)))[..., 0]
    coil_a = np.einsum("sij,sj->si", admittance, volts @ incidence)
    gap_seen = np.einsum("sij,sj->si", seen, coil_a @ turns)
    zero_forward_backward = gap_seen @ np.linalg.inv(FORTESCUE).T
    forward, backward = zero_forward_backward[:, 1], zero_forward_backward[:, 2]
    rotor = [machine.rotor_admittance(s, feeder.hertz, leak, wound.rotor_heat) for s in (slip, 2.0 - slip)]
    cable = np.array([1.0 / (feeder.cable_ohm + max(r, 1e-6)) for r in feeder.after_ohm])
    return Flow(
        volts=np.asarray(volts),
        line_a=(volts[:, STARTER : STARTER + 3] - volts[:, MOTOR : MOTOR + 3]) * cable,
        forward_w=3 * np.abs(forward) ** 2 * rotor[0].real,
        backward_w=3 * np.abs(backward) ** 2 * rotor[1].real,
        coil_a=coil_a,
        leak=leak,
        gap_v=np.abs(forward),
    )


def _air_gap(
    machine: Winding, wound: Wound, slip: Floats, hertz: float, gap: Floats, leak: Floats
) -> Complexes:
    """Return what the air gap puts between the three phase axes, per row a 3 by 3 matrix. [ohm]"""
    x = hertz / machine.frequency_hz
    level = gap / (machine.voltage_v * 0.93) / x
    rated = np.interp(level, *MAGNETISING)
    rated = np.where(rated > 1.0, rated**machine.curve, rated)
    magnetising = (
        machine.magnetising_ohm * x * np.clip(level, 1e-3, None) / np.clip(rated, 1e-3 * 0.875, None)
    )
    base = 1.0 / (1j * magnetising) + 1.0 / machine.iron_ohm
    fields = [
        1.0 / (base + machine.rotor_admittance(s, hertz, leak, wound.rotor_heat)) for s in (slip, 2.0 - slip)
    ]
    diagonal = np.zeros((len(slip), 3, 3), dtype=complex)
    diagonal[:, 0, 0] = 0.002j * machine.magnetising_ohm * x
    diagonal[:, 1, 1], diagonal[:, 2, 2] = fields
    return np.asarray(FORTESCUE @ diagonal @ np.linalg.inv(FORTESCUE))


def _coil_matrix(
    machine: Winding, wound: Wound, seen: Complexes, leak: Floats, x: float
) -> tuple[Complexes, Floats]:
    """Return the impedances of the six coils, and the turns by which each sits on the axes."""
    turns = np.zeros((6, 3))
    own = np.zeros((6, 6), dtype=complex)
    leakage = np.zeros((6, 6))
    for k in range(3):
        parts = np.array([wound.tap[k], 1.0 - wound.tap[k]])
        rows = slice(2 * k, 2 * k + 2)
        turns[rows, k] = wound.sense[k] * parts
        own[rows, rows] = np.diag(machine.stator_ohm * wound.stator_heat * parts)
        own[2 * k, 2 * k] += wound.extra_ohm[k]
        # half of the leakage is common to both coils (same slots), half belongs to each (end turns)
        leakage[rows, rows] = machine.stator_leakage_ohm * x * 0.5 * (np.outer(parts, parts) + np.diag(parts))
    impedance = own + 1j * leak[:, None, None] * leakage + turns @ seen @ turns.T
    return np.asarray(impedance), turns


def _network(feeder: Feeder, wound: Wound) -> tuple[Complexes, Complexes]:
    """Return nodal admittances of everything but the coils, and the currents that the sources inject."""
    nodal = np.zeros((NODES, NODES), dtype=complex)
    injected = np.zeros(NODES, dtype=complex)

    def join(one: int, other: int, ohm: complex) -> None:
        y = 1.0 / ohm
        nodal[one, one] += y
        if other >= 0:
            nodal[other, other] += y
            nodal[one, other] -= y
            nodal[other, one] -= y

    for k in range(3):
        join(SOURCE + k, -1, feeder.source_ohm)
        injected[SOURCE + k] = feeder.emf_v[k] / feeder.source_ohm
        join(SOURCE + k, STARTER + k, max(feeder.before_ohm[k], 1e-6))
        join(STARTER + k, MOTOR + k, feeder.cable_ohm + max(feeder.after_ohm[k], 1e-6))
        join(MOTOR + k, BOX + k, max(feeder.joint_ohm[k], 1e-6))
        join(TAP + k, -1, 1e9)
    join(STAR, -1, 1e8)
    for one, other, ohm in wound.shorts:
        join(one, other, max(ohm, 1e-6))
    return nodal, injected


def balanced(volts: float, hertz: float) -> Feeder:
    """Return a stiff, balanced supply of some line-to-line voltage."""
    emf = volts / np.sqrt(3) * np.array([1, TURN**2, TURN])
    return Feeder(emf_v=emf, hertz=hertz, source_ohm=1e-6 + 1e-6j, cable_ohm=1e-3)


def joined_as_rated(machine: Winding, **more: object) -> Wound:
    """Return a sound winding, joined as its plate says."""
    return replace(Wound(is_delta=machine.is_delta), **more)  # type: ignore[arg-type]
