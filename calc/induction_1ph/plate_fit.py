"""Latents that meet the nameplate: the doubt that is left after the plate, as independent standard normals.

The usual quantities of a design (``priors``) are pulled to what the plate says at rated
slip: current, output, power factor, losses. What is left of their spread, in its principal
directions, is what the latents span; a step back onto the plate keeps them on it where
the linear span does not.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from calc.induction_1ph import priors
from calc.induction_1ph.designs import DESIGNS, HAS_RUN_CAPACITOR
from calc.induction_1ph.machine import Motor, Setting, capacitor_ohm, connect, motor, run_at
from calc.induction_1ph.plate import Plate
from calc.twin import Flags, Floats

NDIndex = NDArray[np.intp]

NAMES = (
    "main_resistance",
    "leakage",
    "rotor_resistance",
    "magnetising",
    "core",
    "friction",
    "turns_ratio",
    "auxiliary_resistance",
    "auxiliary_leakage",
    "slip",
    "current",
    "power",
    "run",
)
_ITERATIONS = 8
_SETTLED = 0.03
_SHARES = (1.0, 0.5, 0.2, 0.0)
_PINNED = 0.15
"""A direction left with less than this share of its spread is given by the plate."""
_FAR = 6.0


@dataclass(frozen=True)
class Base:
    """What is known of one or more designs, a row each: medians, and spreads in the logarithm."""

    designs: tuple[str, ...]
    median: Floats
    spread: Floats
    base_current_a: Floats
    has_run: Floats


@dataclass(frozen=True)
class PlateFit:
    """Base points and spans: log quantities are ``base + z @ span``, shapes (designs, n) and (designs, k, n).

    ``onto`` (designs, n, m) leads back onto the plate's residuals, ``rest`` (designs, m) and
    ``slope`` (designs, k, m) are what those are at the base point and along the span.
    ``weights`` are the designs' shares given the plate.
    """

    plate: Plate
    known: Base
    base: Floats
    span: Floats
    onto: Floats
    rest: Floats
    slope: Floats
    weights: Floats

    @property
    def size(self) -> int:
        """Number of latents that the span takes."""
        return int(self.span.shape[1])

    def motors(self, z: Floats, design: NDIndex) -> Motor:
        """Motors of rows of latents, shape (rows, size), with the index of each row's design."""
        steps = _along(z, self.span, design)
        u = self.base[design] + steps
        off = residuals(self.plate, self.known, u, design) - self.rest[design] - _along(z, self.slope, design)
        back = _along(np.clip(off, -_FAR, _FAR), self.onto.transpose(0, 2, 1), design)
        return motors_of(self.plate, self.known, u - back, design)


def _along(z: Floats, span: Floats, design: NDIndex) -> Floats:
    if len(span) == 1:
        return np.asarray(z @ span[0])
    return np.asarray(np.einsum("rk,rkn->rn", z, span[design]))


def usual(plate: Plate) -> Base:
    """Return medians and spreads of the quantities for each design that the plate allows."""
    designs = tuple(name for name in DESIGNS if name in plate.design_shares)
    median = np.ones((len(designs), len(NAMES)))
    spread = np.zeros((len(designs), len(NAMES)))
    for row, design in enumerate(designs):
        for name, (middle, sigma) in priors.MEDIAN_AND_SPREAD[design].items():
            factor = priors.size_factor(design, name, power_w=plate.power_w, poles=plate.poles)
            median[row, NAMES.index(name)] = middle * factor
            spread[row, NAMES.index(name)] = sigma
        entries = _of_plate(plate, design)
        for name, (middle, sigma) in entries.items():
            median[row, NAMES.index(name)] = middle
            spread[row, NAMES.index(name)] = sigma
    return Base(
        designs=designs,
        median=median,
        spread=spread,
        base_current_a=np.array([plate.base_current_a(design) for design in designs]),
        has_run=np.array([float(design in HAS_RUN_CAPACITOR) for design in designs]),
    )


def _of_plate(plate: Plate, design: str) -> dict[str, priors.Spread]:
    """Quantities that the plate gives, or that stand in for them."""
    rated_var = plate.power_w / (2.0 * math.pi * plate.frequency_hz * plate.voltage_v**2)
    run = (1e-12, 0.0)
    if design in HAS_RUN_CAPACITOR:
        ratio, sigma = priors.RUN_VAR_PER_WATT
        ratio *= priors.size_factor(design, "run", power_w=plate.power_w, poles=plate.poles)
        run = (plate.run_f, priors.RUN_TOLERANCE) if plate.run_f else (ratio * rated_var, sigma)
    return {
        "slip": (plate.slip, plate.slip_sigma),
        "current": plate.current_prior(design),
        "power": plate.power_prior(design),
        "run": run,
    }


def motors_of(plate: Plate, known: Base, u: Floats, design: NDIndex) -> Motor:
    """Motors whose log quantities stand ``u`` spreads from their medians, shape (rows, n)."""
    values = known.median[design] * np.exp(np.clip(u, -_FAR, _FAR) * known.spread[design])
    columns = {name: values[:, index] for index, name in enumerate(NAMES)}
    return motor(plate, columns, base_current_a=known.base_current_a[design])


def residuals(plate: Plate, known: Base, u: Floats, design: NDIndex) -> Floats:
    """Return what the motors do at rated slip less what the plate says, in sigmas, shape (rows, m).

    Output always; current, power factor and losses where they are on the plate.
    """
    machine = motors_of(plate, known, u, design)
    setting = rated_setting(plate, machine, known.has_run[design])
    slip = np.minimum(machine.slip, 0.5)
    currents, _ = run_at(connect(machine, setting), slip, priors.RATED_EMF * machine.voltage_v)
    line = currents.main + currents.auxiliary
    amps = np.abs(line)
    given = np.maximum(machine.voltage_v * line.real, 1e-3 * machine.power_w)
    output = np.maximum(currents.torque_w * (1.0 - slip) - machine.friction_w, 0.02 * machine.power_w)
    columns = [np.log(output / machine.power_w) / 0.012]
    if plate.current_a is not None:
        columns.append(np.log(amps / plate.current_a) / plate.current_sigma)
    if plate.power_factor is not None:
        sigma = 0.012 + 0.03 * (1.0 - plate.power_factor)
        columns.append((given / (machine.voltage_v * amps) - plate.power_factor) / sigma)
    if plate.efficiency is not None:
        losses = np.maximum(given - output, 0.01 * machine.power_w) / output
        columns.append(np.log(losses / (1.0 / plate.efficiency - 1.0)) / 0.06)
    return np.stack(columns, axis=1)


def rated_setting(plate: Plate, machine: Motor, has_run: Floats) -> Setting:
    """Return the setting of the nameplate: rated voltage, warm, run capacitor or open auxiliary winding."""
    run_ohm = capacitor_ohm(
        machine.run_f * has_run, machine.angular_frequency, loss_factor=priors.RUN_LOSS_FACTOR
    )
    one = np.ones_like(machine.voltage_v)
    return Setting(
        temperature_c=(25.0 + plate.rise_k) * one,
        auxiliary_extra_ohm=run_ohm,
        main_extra_ohm=0.0 * one,
        supply_v=machine.voltage_v,
        source_ohm=0.0 * one,
        turn_share=0.0 * one,
        loop_leakage=one,
        leakage=one,
        rotor_rise=one,
        winding_ohm=one,
    )


def fit_plate(plate: Plate) -> PlateFit:
    """Fit each design that the plate allows to it, by Gauss-Newton.

    Returns
    -------
    PlateFit
        Base point and span of each design, and the designs' weights.

    """
    known = usual(plate)
    count, size = known.median.shape
    u = np.zeros((count, size))
    for _ in range(_ITERATIONS):
        value, slope = _slopes(plate, known, u)
        target = np.einsum("dmn,dn->dm", slope, u) - value
        gram = slope @ slope.transpose(0, 2, 1) + np.eye(slope.shape[1])
        step = np.einsum("dmn,dm->dn", slope, np.linalg.solve(gram, target[:, :, None])[:, :, 0]) - u
        u = _best_step(plate, known, u, step)
        if np.abs(step).max() < _SETTLED:
            break
    value, slope = _slopes(plate, known, u)
    span = _spans(slope, known.spread > 0.0)
    gram = slope @ slope.transpose(0, 2, 1)
    onto = slope.transpose(0, 2, 1) @ np.linalg.inv(gram + 1e-6 * np.eye(slope.shape[1]))
    return PlateFit(
        plate=plate,
        known=known,
        base=u,
        span=span,
        onto=onto,
        rest=value,
        slope=np.einsum("dkn,dmn->dkm", span, slope),
        weights=_weights(plate, known.designs, u, value, slope),
    )


def _best_step(plate: Plate, known: Base, u: Floats, step: Floats) -> Floats:
    """Go the share of a step, at most 2.5 spreads, that fits plate and usual values best."""
    step = step * np.minimum(1.0, 2.5 / np.maximum(np.abs(step).max(axis=1, keepdims=True), 1e-9))
    tries = u[:, None, :] + np.array(_SHARES)[:, None] * step[:, None, :]
    count, ways, size = tries.shape
    design = np.repeat(np.arange(count), ways)
    off = residuals(plate, known, tries.reshape(-1, size), design).reshape(count, ways, -1)
    cost = np.sum(off**2, axis=2) + np.sum(tries**2, axis=2)
    return np.asarray(tries[np.arange(count), np.argmin(cost, axis=1)])


def _slopes(plate: Plate, known: Base, u: Floats) -> tuple[Floats, Floats]:
    """Residuals at a base point of each design, and their slopes (designs, m, n) by differences."""
    count, size = u.shape
    step = 0.1
    moved = np.repeat(u[:, None, :], size + 1, axis=1)
    moved[:, np.arange(size), np.arange(size)] += step
    design = np.repeat(np.arange(count), size + 1)
    values = residuals(plate, known, moved.reshape(-1, size), design).reshape(count, size + 1, -1)
    base = values[:, -1, :]
    slope = (values[:, :-1, :] - base[:, None, :]) / step
    return base, slope.transpose(0, 2, 1)


def _spans(slope: Floats, active: Flags) -> Floats:
    """Principal directions of what the plate leaves open, scaled by what is left, widest first."""
    spans: list[Floats] = []
    for row in range(len(slope)):
        picked = np.flatnonzero(active[row])
        part = slope[row][:, picked]
        left, directions = np.linalg.eigh(np.linalg.inv(np.eye(len(picked)) + part.T @ part))
        kept = [i for i in reversed(range(len(picked))) if math.sqrt(max(left[i], 0.0)) > _PINNED]
        span = np.zeros((len(kept), slope.shape[2]))
        span[:, picked] = (directions[:, kept] * np.sqrt(left[kept])).T
        spans.append(span)
    width = max(len(span) for span in spans)
    return np.stack([np.pad(span, ((0, width - len(span)), (0, 0))) for span in spans])


def _weights(plate: Plate, designs: Sequence[str], u: Floats, value: Floats, slope: Floats) -> Floats:
    """Shares of the designs given the plate: usual share times the plate's evidence (Laplace)."""
    shape = np.eye(slope.shape[1]) + slope @ slope.transpose(0, 2, 1)
    log_det = np.linalg.slogdet(shape)[1]
    evidence = -0.5 * (np.sum(value**2, axis=1) + np.sum(u**2, axis=1) + log_det)
    shares = np.log([plate.design_shares[design] for design in designs])
    # The spreads are judgement, and a plate may have a slip: it does not count in full.
    evidence = np.maximum(evidence - evidence.max(), -10.0) * 0.7
    weights = np.exp(evidence + shares)
    return np.asarray(weights / weights.sum())
