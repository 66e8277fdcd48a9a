"""What a machine does with a fault on its site: whether it starts, where it settles, how hot it gets."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from benchmarks.generator.circuit import MOTOR, STARTER, TURN, Feeder, Flow, Wound, solve
from benchmarks.generator.design import Motor
from benchmarks.generator.trouble import Site, Trouble

SLIPS = np.concatenate([np.linspace(1.0, 0.3, 15), np.geomspace(0.28, 0.0006, 34)])
INSTANT = 13.0  # times rated current at which short-circuit protection goes
START_STEP = 0.04
SLOWEST = 0.3  # slip beyond which a machine that lost a line does not stay turning
TRIPPED = 1.7  # losses over rated from which overload protection ends the heating early


@dataclass(frozen=True)
class Point:
    """The machine in one state."""

    flow: Flow
    slip: float
    torque_nm: float
    winding_c: float
    frame_c: float
    bearing_c: float
    losses: float
    """Over the rated losses."""


@dataclass(frozen=True)
class Operation:
    """All states that can be had, and why the others cannot."""

    mode: str
    """runs, stalls, trips or dead."""
    points: dict[str, Point]
    infeasible: dict[str, str]
    hertz: float
    starting_s: float | None
    feeder: Feeder
    wound: Wound


def copper(celsius: float, motor: Motor) -> float:
    """Return the resistance of copper over that at rated temperature."""
    return (235.0 + celsius) / (235.0 + 25.0 + motor.rated.rise_k)


def feeder_of(motor: Motor, site: Site, trouble: Trouble) -> Feeder:
    """Return the supply with its fault."""
    rated = motor.rated
    volts = rated.nominal_v * site.level if trouble.level is None else rated.volts * trouble.level
    base = rated.volts / np.sqrt(3) / rated.current_a
    phases = np.array([1, TURN**2, TURN]) + site.unbalance * np.array([1, TURN, TURN**2])
    emf = (
        0.0
        if trouble.dead
        else volts / np.sqrt(3) * (1 + 0.8 * site.source_drop) * phases * np.array(trouble.pattern)
    )
    return Feeder(
        emf_v=np.asarray(emf * np.ones(3), dtype=complex),
        hertz=rated.hertz * site.hertz_drift * trouble.hertz_times,
        source_ohm=base * site.source_drop * (0.35 + 0.94j),
        cable_ohm=base * site.cable_drop * (0.95 + 0.3j),
        before_ohm=trouble.before_ohm,
        after_ohm=trouble.after_ohm,
        joint_ohm=trouble.joint_ohm,
    )


def wound_of(motor: Motor, trouble: Trouble, celsius: float) -> Wound:
    """Return the windings with their fault, at a temperature."""
    return Wound(
        is_delta=motor.rated.is_delta is not trouble.other_connection,
        stator_heat=copper(celsius, motor),
        rotor_heat=copper(celsius, motor) * trouble.rotor_times,
        extra_ohm=trouble.extra_ohm,
        sense=trouble.sense,
        tap=trouble.tap,
        shorts=trouble.shorts,
    )


def operate(motor: Motor, site: Site, trouble: Trouble) -> Operation:
    """Try to start and run the machine."""
    feeder = feeder_of(motor, site, trouble)
    cold = wound_of(motor, trouble, site.ambient_c)
    if trouble.dead:
        return _dead(motor, site, feeder, cold)
    start = solve(motor.winding, feeder, cold, SLIPS)
    if why := _trips(motor, site, start, trouble):
        states = ("no_load", "loaded", "starting", "stalled")
        return Operation("trips", {}, dict.fromkeys(states, why), feeder.hertz, None, feeder, cold)
    found, why_not = {}, {}
    for state in ("loaded", "no_load"):
        coupled = state == "loaded"
        if not coupled and not site.can_uncouple:
            why_not[state] = "cannot be uncoupled"
            continue
        point = _settled(motor, site, trouble, feeder, start, coupled=coupled)
        if point is None:
            why_not[state] = "does not start"
        else:
            found[state] = point
    stalled = "loaded" not in found
    first = _point(motor, site, trouble, feeder, site.ambient_c, 1.0, 0.0)
    found |= {"starting": first} | ({"stalled": first} if stalled else {})
    if not stalled:
        why_not["stalled"] = "the shaft turns; never arranged"
    took = None if stalled or trouble.runs_on else _starting_time(motor, site, trouble, start, feeder.hertz)
    return Operation("stalls" if stalled else "runs", found, why_not, feeder.hertz, took, feeder, cold)


def _dead(motor: Motor, site: Site, feeder: Feeder, wound: Wound) -> Operation:
    flow = solve(motor.winding, feeder, wound, np.array([1.0]))
    point = Point(flow, 1.0, 0.0, site.ambient_c, site.ambient_c, site.ambient_c, 0.0)
    why = {"loaded": "does not start", "no_load": "does not start"}
    return Operation("dead", {"starting": point, "stalled": point}, why, feeder.hertz, None, feeder, wound)


def _trips(motor: Motor, site: Site, start: Flow, trouble: Trouble) -> str:
    """Return why protection opens at once, if it does."""
    amps = np.max(np.abs(start.line_a), axis=1) / motor.rated.current_a
    if amps[0] > max(INSTANT, 1.45 * motor.rated.locked_ratio) or amps[-8:].min() > 4.5:
        return "short-circuit protection trips at once"
    earth = abs(np.sum(start.line_a[-10]))
    if trouble.fault == "ground_fault" and (
        earth > 0.3 * motor.rated.current_a or (site.earth_leakage_trip and earth > 0.3)
    ):
        return "earth-fault protection trips at once"
    return ""


def load_torque(motor: Motor, site: Site, trouble: Trouble, rpm: np.ndarray, *, coupled: bool) -> np.ndarray:
    """Return the torque that the shaft asks for at a speed, standing included. [N m]"""
    rated, speed = motor.rated, np.clip(rpm, 0, None) / motor.rated.rpm
    share = site.load if trouble.load is None else trouble.load
    if site.law == "constant":
        process = np.where(rpm > 0.02 * rated.rpm, 1.0, site.breakaway)
    else:
        process = np.where(speed > 0.1, speed**2, np.maximum(speed**2, site.breakaway * (1 - 10 * speed)))
    drag = trouble.drag if coupled or trouble.drag_in_motor else 0.0
    own = np.array([motor.drag_nm(float(x)) for x in np.atleast_1d(rpm)])
    return np.asarray(rated.torque_nm * (process * share * coupled + drag) + own)


def _settled(
    motor: Motor, site: Site, trouble: Trouble, feeder: Feeder, start: Flow, *, coupled: bool
) -> Point | None:
    """Return where the machine settles, or None if it does not turn."""
    if trouble.seized == "motor" or (trouble.seized and coupled):
        return None
    sync = 120 * feeder.hertz / motor.rated.poles
    torque = start.torque_nm(motor.winding, feeder.hertz)
    surplus = torque - load_torque(motor, site, trouble, sync * (1 - SLIPS), coupled=coupled)
    if trouble.runs_on and coupled:
        pushing = np.flatnonzero((surplus > 0) & (SLIPS < SLOWEST))
        if not len(pushing):
            return None
        place = int(pushing[-1])
    else:
        if surplus[0] <= 0 or np.min(surplus[:15]) < -0.05 * motor.rated.torque_nm:
            return None
        place = int(np.flatnonzero(surplus > 0)[-1])
    upper = SLIPS[place]
    lower = SLIPS[place + 1] if place + 1 < len(SLIPS) else 1e-5
    celsius = site.ambient_c + motor.rated.rise_k * 0.6
    for _ in range(2):
        wound = wound_of(motor, trouble, celsius)
        slips = np.linspace(upper * 2.0, lower * 0.5, 150)  # hot bars slip further
        flow = solve(motor.winding, feeder, wound, slips)
        wants = load_torque(motor, site, trouble, sync * (1 - slips), coupled=coupled)
        gap = flow.torque_nm(motor.winding, feeder.hertz) - wants
        slip = (
            float(np.interp(0.0, gap[::-1], slips[::-1]))
            if gap[0] > 0 > gap[-1]
            else float(slips[np.argmin(np.abs(gap))])
        )
        point = _point(
            motor, site, trouble, feeder, celsius, slip, float(np.interp(slip, slips[::-1], wants[::-1]))
        )
        celsius = min(point.winding_c, 190.0)
    return point


def _point(
    motor: Motor, site: Site, trouble: Trouble, feeder: Feeder, celsius: float, slip: float, torque: float
) -> Point:
    flow = solve(motor.winding, feeder, wound_of(motor, trouble, celsius), np.array([slip]))
    shaft_w = (
        max(torque - motor.drag_nm((1 - slip) * motor.rated.rpm), 0.0)
        * (1 - slip)
        * 4
        * np.pi
        * feeder.hertz
        / motor.rated.poles
    )
    losses = max(float(flow.power_w(MOTOR)[0]) - shaft_w, 0.0) / motor.rated.losses_w
    heating = min(losses * trouble.cooling, TRIPPED) + 0.05 * min(
        max(losses * trouble.cooling - TRIPPED, 0.0), 6.0
    )
    rise = motor.rated.rise_k * heating
    return Point(
        flow=flow,
        slip=slip,
        torque_nm=torque,
        winding_c=site.ambient_c + rise,
        frame_c=site.ambient_c + 0.52 * rise,
        bearing_c=site.ambient_c + 0.4 * rise + 6 + trouble.bearing_k,
        losses=losses,
    )


def _starting_time(motor: Motor, site: Site, trouble: Trouble, start: Flow, hertz: float) -> float:
    """Integrate the run-up over the slips of the start. [s]"""
    sync = 120 * hertz / motor.rated.poles
    running = 1.3 * motor.rated.slip < SLIPS
    surplus = start.torque_nm(motor.winding, hertz) - load_torque(
        motor, site, trouble, sync * (1 - SLIPS), coupled=True
    )
    surplus = np.maximum(surplus[running], START_STEP * motor.rated.torque_nm)
    step = -np.diff(SLIPS[running]) * sync * np.pi / 30
    inertia = motor.inertia_kgm2 * (1 + site.inertia_times)
    return float(np.sum(inertia * step * 0.5 * (1 / surplus[1:] + 1 / surplus[:-1])))


def volts_at(point: Point, place: str) -> np.ndarray:
    """Return the three line-to-line voltages at the motor or the starter."""
    return np.asarray(np.abs(point.flow.line_to_line(MOTOR if place == "motor" else STARTER)[0]))
