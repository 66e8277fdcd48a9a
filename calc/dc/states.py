"""What a DC machine with given attributes does in each state.

One :class:`Bench` holds the rows of one call; each state is worked out once, when it is
first asked for.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from calc.dc.circuit import Armature, Magnet, Point, at_temperature, field_circuit, operate
from calc.dc.latents import Rows
from calc.dc.plate import Plate
from calc.twin import Flags, Floats

OPEN_OHM = 1e9
STATES = ("isolated", "standby", "stalled", "starting", "no_load", "light_load", "loaded", "spun")
LIGHT_LOAD = 0.25  # share of the load of the day that remains with the process idle
# Rise of the field winding over its rated rise in each state; machines that were read at
# a standstill had usually been running or tried.
_FIELD_HEAT = {
    "loaded": 0.64,
    "light_load": 0.60,
    "no_load": 0.58,
    "starting": 0.63,
    "stalled": 0.61,
    "standby": 0.3,
}
_SPUN_RISE_K = 5.0
_TURN_BRAKE = 0.08  # torque of a shorted coil: share of turns over resistance per unit
_SHIFT_RAD = 2.5  # brush shift in electrical radian over the ampere-turns that come to act on the field


@dataclass(frozen=True)
class Condition:
    """One state: armature volts and current and speed per unit, field in V and A."""

    volts: Floats
    current: Floats
    speed: Floats
    flux: Floats
    field_v: Floats
    field_a: Floats
    runs: Floats


class Bench:
    """Machines with their attributes, ready to be asked what they read in any state."""

    def __init__(self, plate: Plate, machine: Rows, attributes: Mapping[str, Floats]) -> None:
        self.plate = plate
        self.machine = machine
        self.attributes = attributes
        self._known: dict[str, Condition] = {}

    def state(self, name: str) -> Condition:
        """Return the condition in a state of :data:`STATES`."""
        if name not in self._known:
            work = {
                "stalled": self._locked,
                "starting": self._locked,
                "spun": self._spun,
                "standby": self._standby,
            }
            self._known[name] = work[name](name) if name in work else self._running(name)
        return self._known[name]

    @cached_property
    def supply(self) -> Floats:
        """Armature supply volts of rated, with what the fault does to them."""
        a = self.attributes
        return np.asarray(
            self.machine.level * (1.0 - a["volts_below"]) * (1.0 + a["volts_above"]) * (1.0 - a["volts_lost"])
        )

    @cached_property
    def field_cold(self) -> Floats:
        """Field resistance at 20 degC with its fault, ohm."""
        a = self.attributes
        return np.where(a["field_open"] > 0.5, OPEN_OHM, self.machine.field_cold * (1.0 - a["field_shorted"]))

    @cached_property
    def armature_cold(self) -> Floats:
        """Resistance at 20 degC between the armature terminals, series field excluded, per unit."""
        m, a = self.machine, self.attributes
        sound = m.resistance * (1.0 - m.series_share)
        return np.asarray(sound * (1.0 - 0.75 * np.minimum(a["coil_shorted"], 0.9)) * (1.0 + a["coil_open"]))

    @cached_property
    def series_cold(self) -> Floats:
        """Resistance of the series field at 20 degC, per unit; on a series motor it has the shorted turns."""
        whole = self.machine.resistance * self.machine.series_share
        return np.asarray(whole * (1.0 - self._series_shorted))

    @cached_property
    def _series_shorted(self) -> Floats:
        shorted = self.attributes["field_shorted"]
        return shorted if self.plate.kind == "dc_series" else np.zeros_like(shorted)

    def resistance(self, rise_share: Floats | float) -> Floats:
        """Resistance of the armature circuit in service, per unit, at a share of the rated rise."""
        m, a = self.machine, self.attributes
        warm = at_temperature(m.ambient + m.rise * a["heat"] * rise_share)
        copper = self.armature_cold + self.series_cold
        return np.asarray(copper * warm + a["brush_ohm"])

    def magnet(self, field_a: Floats) -> Magnet:
        """Return what sets the flux at a field current."""
        m, a = self.machine, self.attributes
        shift = _SHIFT_RAD * np.minimum(a["off_neutral"], 0.5)
        turns = 1.0 - a["field_shorted"]
        poles = np.maximum(a["short_poles"], a["field_shorted"])
        left = np.maximum(1.0 - a["field_shorted"] / poles, 0.0)
        scale = self._reaction_at_rated
        return Magnet(
            shunt=m.shunt_share * field_a / m.field_ampere,
            series=(1.0 - m.shunt_share) * a["series_sense"] * (1.0 - self._series_shorted),
            bend=m.bend,
            residual=m.residual,
            factor=(1.0 - a["magnets_lost"]) * np.cos(shift) / (1.0 - scale),
            reaction=m.reaction + 0.2 * a["shift_sense"] * a["off_neutral"],
            lame=np.where(turns < 1.0, poles, 0.0),
            lame_share=left,
            permanent=self.plate.kind == "dc_permanent_magnet",
        )

    @cached_property
    def _reaction_at_rated(self) -> Floats:
        return np.minimum(self.machine.reaction, 0.3)

    def field(self, state: str) -> tuple[Floats, Floats]:
        """Return field current in A and field volts in a state."""
        m, a = self.machine, self.attributes
        if not self.plate.has_field:
            return np.zeros_like(m.volt), np.zeros_like(m.volt)
        if state == "spun":
            rise = np.full_like(m.rise, _SPUN_RISE_K)
        else:
            rise = m.rise * a["heat"] * _FIELD_HEAT[state] * m.field_heat
        own = self.plate.kind == "dc_separately_excited" or state == "spun"
        fed = 1.0 - a["field_unfed"]
        supply = (m.field_volt if own else m.field_volt * self.supply) * fed
        return field_circuit(
            supply_v=supply,
            held_a=m.field_ampere,
            held=m.field_held * fed,
            series_ohm=m.field_series,
            winding_ohm=self.field_cold * at_temperature(m.ambient + rise),
        )

    def _running(self, name: str) -> Condition:
        """Uncoupled, idle or loaded, at the supply's volts; a stalled machine stands."""
        m, a = self.machine, self.attributes
        load = np.where(a["torque"] > 0.0, a["torque"], m.load)
        share = {"no_load": 0.0, "light_load": LIGHT_LOAD, "loaded": 1.0}[name] * load
        rise = {"no_load": 0.3 + 0.0 * load, "light_load": 0.35 + 0.0 * load}.get(
            name, 0.25 + 0.5 * np.minimum(load, 1.5)
        )
        field = self.field(name)
        circuit = Armature(self.supply, self.resistance(rise), m.brush, m.emf)
        torque = share * (1.0 - m.rotating)
        point = operate(circuit, self.magnet(field[0]), torque, m.rotating, self.drag)
        stands = (a["stalled"] > 0.5) & ((name != "no_load") | (a["seized"] > 0.5))
        return self._settle(point, stands, torque, field)

    @cached_property
    def drag(self) -> Floats:
        """Torque that a fault adds: rubbing or a bad bearing, and the current in a shorted coil."""
        a = self.attributes
        loop = _TURN_BRAKE * a["coil_shorted"] / (self.machine.resistance + 0.3 * a["coil_shorted"])
        return np.asarray(a["friction"] + loop)

    def _settle(self, point: Point, stands: Flags, load: Floats, field: tuple[Floats, Floats]) -> Condition:
        """Take the running point, the drive's current limit, or standstill where it cannot run."""
        still = self._locked("stalled")
        dead = self.attributes["armature_open"] > 0.5
        limited = self._limited(point, load, field[0])
        held = limited.runs > 0.5
        down = stands | dead | (~point.runs & ~held & (point.speed < 0.5))

        def pick(run: Floats, hold: Floats, stop: Floats | float) -> Floats:
            return np.where(down, stop, np.where(held, hold, run))

        return Condition(
            volts=pick(self.supply, limited.volts, still.volts),
            current=pick(point.current, limited.current, still.current),
            speed=pick(point.speed, limited.speed, 0.0),
            flux=np.where(held, limited.flux, point.flux),
            field_v=field[1],
            field_a=field[0],
            runs=((point.runs | held) & ~down).astype(np.float64),
        )

    def _limited(self, point: Point, load: Floats, field_a: Floats) -> Condition:
        """Where the load asks a converter for more than its limit, current is held and volts give way.

        The load is taken to fall with the square of speed; ``runs`` marks the rows concerned.
        """
        m = self.machine
        forced = self.attributes["at_limit"] > 0.5
        asked = (forced | ((point.current > m.limit) & (m.source > 0.5))) & (load > 1e-3)
        if not np.any(asked):
            zero = np.zeros_like(load)
            return Condition(zero, zero, zero, zero, zero, zero, zero)
        flux = self.magnet(field_a).flux(m.limit)
        spare = flux * m.limit - m.rotating - self.drag
        speed = np.sqrt(np.clip(spare / np.maximum(load, 1e-3), 0.0, 4.0))
        volts = m.emf * flux * speed + m.limit * self.resistance(0.7) + m.brush
        runs = asked & (speed > 0.2) & (speed < 1.8) & (volts < self.supply)
        return Condition(volts, m.limit, speed, flux, 0.0 * flux, field_a, runs.astype(np.float64))

    def _locked(self, name: str) -> Condition:
        """Shaft at rest, current as starter or drive lets it through; ohms and brushes take all volts."""
        m, a = self.machine, self.attributes
        resistance = self.resistance(0.5)
        most = np.maximum(self.supply - m.brush, 0.0) / resistance
        current = np.minimum(m.limit, most)
        volts = current * resistance + m.brush
        dead = a["armature_open"] > 0.5
        field_a, field_v = self.field(name)
        zero = np.zeros_like(volts)
        return Condition(
            volts=np.where(dead, self.supply, volts),
            current=np.where(dead, 0.0, current),
            speed=zero,
            flux=zero,
            field_v=field_v,
            field_a=field_a,
            runs=zero,
        )

    def _standby(self, name: str) -> Condition:
        """Live but not commanded: the armature has no volts, the field may have its own."""
        field_a, field_v = self.field(name)
        zero = np.zeros_like(field_a)
        return Condition(zero, zero, zero, zero, field_v, field_a, zero)

    def _spun(self, name: str) -> Condition:
        """Driven from outside at rated speed: induced volts at the field current of the moment."""
        m, a = self.machine, self.attributes
        field_a, field_v = self.field(name)
        flux = self.magnet(field_a).flux(np.zeros_like(m.volt))
        seen = np.where(a["armature_reads_open"] > 0.5, 0.0, m.emf * flux)
        ones = np.ones_like(m.volt)
        return Condition(seen, 0.0 * ones, ones, flux, field_v, field_a, 0.0 * ones)
