"""Flux, field circuit and operating point of a DC machine, all per unit of rated.

``E = k flux speed`` and ``T = flux current`` (E = K phi omega; any text on DC machines);
the armature circuit adds resistance and a brush drop that does not depend on current.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from calc.dc.plate import COPPER_PER_K
from calc.twin import Flags, Floats

FRICTION_SHARE = 0.4  # of the rotational losses that do not grow with speed; the rest is windage and iron
STEPS = 6


def saturation(excitation: Floats, bend: Floats) -> Floats:
    """Flux over rated flux: Froelich's curve with a soft knee, 1 at rated excitation, odd."""
    knee = bend * bend
    return np.asarray(excitation * np.sqrt((1.0 + knee) / (1.0 + knee * excitation * excitation)))


def at_temperature(temperature_c: Floats | float) -> Floats:
    """Copper resistance at a temperature over that at 20 degC (IEC 60028)."""
    return np.maximum(1.0 + COPPER_PER_K * (np.asarray(temperature_c, dtype=np.float64) - 20.0), 0.3)


@dataclass(frozen=True)
class Magnet:
    """What sets the flux of many machines; every array has shape (rows,).

    ``shunt`` is the excitation by the separate or shunt field at this moment and ``series``
    that by rated armature current, both of rated ampere-turns (negative: it opposes).
    On ``lame`` of the poles only ``lame_share`` of the shunt excitation is left.
    ``factor`` multiplies the flux, ``reaction`` is what rated current takes from it.
    A machine with magnets has ``permanent`` set, and its excitation is not looked at.
    """

    shunt: Floats
    series: Floats
    bend: Floats
    residual: Floats
    factor: Floats
    reaction: Floats
    lame: Floats
    lame_share: Floats
    permanent: bool = False

    def flux(self, current: Floats) -> Floats:
        """Flux over rated flux at an armature current."""
        weakened = self.factor * (1.0 - self.reaction * np.minimum(current, 4.0))
        return np.maximum(self._main(current) * weakened, 0.003)

    def _main(self, current: Floats) -> Floats:
        if self.permanent:
            return np.ones_like(current)
        aid = self.series * current
        curve = saturation(self.shunt + aid, self.bend)
        if np.any(self.lame > 0.0):
            lame = saturation(self.shunt * self.lame_share + aid, self.bend)
            curve = curve + self.lame * (lame - curve)
        return np.asarray(self.residual + (1.0 - self.residual) * curve)

    def growth(self, current: Floats) -> Floats:
        """Return d ln(flux) / d ln(current), which the series field brings about."""
        if self.permanent:
            return np.zeros_like(current)
        aid = self.series * current
        total = self.shunt + aid
        slope = aid / np.where(np.abs(total) < 1e-3, 1e-3, total) / (1.0 + (self.bend * total) ** 2)
        return np.minimum(np.maximum(slope, -0.6), 1.0)


@dataclass(frozen=True)
class Armature:
    """Armature circuit: volts at its terminals, warm resistance, brush drop, rated induced volts."""

    volts: Floats
    resistance: Floats
    brush: Floats
    emf: Floats


@dataclass(frozen=True)
class Point:
    """Where the machine settles: current, speed, flux, and whether it runs at all."""

    current: Floats
    speed: Floats
    flux: Floats
    runs: Flags


def operate(
    armature: Armature, magnet: Magnet, shaft_torque: Floats, rotating: Floats, drag: Floats
) -> Point:
    """Find current and speed at a shaft torque.

    ``shaft_torque``, ``rotating`` (rotational losses at rated speed) and ``drag`` (what a
    fault adds) are of rated air-gap torque. Newton's method in ln(current); where the
    torque cannot be had, or the speed runs away, ``runs`` is false.
    """
    most = np.maximum((armature.volts - armature.brush) / armature.resistance, 1e-3)
    current = np.clip(shaft_torque + rotating + drag, 1e-3, most)
    for _ in range(STEPS):
        flux = magnet.flux(current)
        needed = shaft_torque + drag + _losses(rotating, _speed(armature, current, flux))
        step = np.log(needed / (flux * current)) / (1.0 + magnet.growth(current))
        grown = current * np.exp(np.minimum(np.maximum(step, -1.5), 1.5))
        current = np.minimum(np.maximum(grown, 1e-3), most)
    flux = magnet.flux(current)
    speed = _speed(armature, current, flux)
    needed = shaft_torque + drag + _losses(rotating, speed)
    settled = (np.abs(flux * current / needed - 1.0) < 0.03) & (speed > 0.02) & (speed < 2.5)
    return Point(current=current, speed=np.minimum(speed, 4.0), flux=flux, runs=settled & (current < 6.0))


def _speed(armature: Armature, current: Floats, flux: Floats) -> Floats:
    induced = armature.volts - current * armature.resistance - armature.brush
    return np.asarray(np.maximum(induced, 0.0) / (armature.emf * flux))


def _losses(rotating: Floats, speed: Floats) -> Floats:
    return np.asarray(rotating * (FRICTION_SHARE + (1.0 - FRICTION_SHARE) * np.minimum(speed, 4.0)))


def field_circuit(
    *, supply_v: Floats, held_a: Floats, held: Floats, series_ohm: Floats, winding_ohm: Floats
) -> tuple[Floats, Floats]:
    """Return field current in A and volts at the field terminals.

    ``held`` is 1 where a regulator keeps the current at ``held_a`` as long as its volts
    suffice, 0 where the supply feeds winding and rheostat in series. An open winding
    carries nothing and shows the whole supply.
    """
    free = supply_v / (series_ohm + winding_ohm)
    regulated = np.minimum(held_a, supply_v / winding_ohm)
    current = held * regulated + (1.0 - held) * free
    return current, np.asarray(current * winding_ohm)
