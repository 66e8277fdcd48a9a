"""What a motor does in each state: standing, starting, without load, with its load."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from calc.induction_1ph import priors
from calc.induction_1ph.chances import found_in
from calc.induction_1ph.circuit import Phasors
from calc.induction_1ph.machine import OPEN_OHM, Motor, Setting, capacitor_ohm, connect, in_parallel, run_at
from calc.induction_1ph.slip import Running, run_loaded
from calc.quantities import RUNNING_STATES
from calc.twin import Flags, Floats

Attributes = Mapping[str, Floats]


@dataclass(frozen=True)
class Site:
    """Motor, supply, load and warmth of each row; all of shape (rows,).

    ``load`` is in rated torque, ``lock`` the factor on leakage at standstill, ``rise_k`` the
    rise of the winding at rated losses, ``rated_loss_w`` those losses.
    """

    machine: Motor
    has_run: Floats
    has_start: Floats
    has_switch: Floats
    start_f: Floats
    supply_v: Floats
    source_ohm: Floats
    lock: Floats
    load: Floats
    rise_k: Floats
    ambient_c: Floats
    rated_loss_w: Floats


@dataclass(frozen=True)
class Standing:
    """One state of each row: the solved circuit, currents at the terminals, and heat."""

    running: Running
    line: Phasors
    capacitor_v: Floats
    input_w: Floats
    winding_c: Floats


def capacitances(site: Site, attributes: Attributes) -> tuple[Floats, Floats]:
    """Run and start capacitor as a meter reads them: 0 F where open, shorted or not fitted."""
    gone = (1.0 - attributes["run_open"]) * (1.0 - attributes["run_shorted"])
    run = site.machine.run_f * site.has_run * gone * (1.0 - attributes["run_lost"])
    gone = (1.0 - attributes["start_open"]) * (1.0 - attributes["start_shorted"])
    start = site.start_f * site.has_start * gone * (1.0 - attributes["start_lost"])
    return run, start


def auxiliary_path(site: Site, attributes: Attributes, *, at_start: bool) -> tuple[Phasors, Phasors]:
    """Impedance [ohm] in series with the auxiliary winding, and of the capacitor that a meter sees.

    The start branch (start capacitor, or nothing but the switch) lies across the run
    capacitor; the switch is closed in a start and open in running, unless it is stuck.
    """
    omega = site.machine.angular_frequency
    run_f, start_f = capacitances(site, attributes)
    run = capacitor_ohm(run_f, omega, loss_factor=priors.RUN_LOSS_FACTOR)
    run = run * (1.0 - attributes["run_shorted"] * site.has_run)
    start = capacitor_ohm(start_f, omega, loss_factor=priors.START_LOSS_FACTOR)
    start = start * (1.0 - attributes["start_shorted"]) * site.has_start
    closed = 1.0 - attributes["switch_open"] if at_start else attributes["switch_closed"]
    closed = closed * site.has_switch
    switch = OPEN_OHM * (1.0 - closed)
    path = in_parallel(run, start + switch)
    # A start capacitor behind an open switch carries no voltage; a run capacitor has the branch's.
    seen = np.where(site.has_run > 0.0, path, start * site.has_start * closed)
    return path + OPEN_OHM * attributes["auxiliary_open"], np.asarray(seen)


def settle(site: Site, attributes: Attributes, *, warm_c: Floats, path: Phasors) -> Setting:
    """Return the setting of a state: what is in circuit, at which supply."""
    one = np.ones_like(site.load)
    return Setting(
        temperature_c=warm_c,
        auxiliary_extra_ohm=path,
        main_extra_ohm=OPEN_OHM * attributes["main_open"],
        supply_v=supply(site, attributes),
        source_ohm=site.source_ohm,
        turn_share=attributes["turns_shorted"],
        loop_leakage=attributes["loop_leakage"],
        leakage=one,
        rotor_rise=one,
        winding_ohm=attributes["winding_ohm"],
    )


def supply(site: Site, attributes: Attributes) -> Floats:
    """Voltage [V] behind the source impedance."""
    changed = (1.0 - attributes["volts_lost"]) * (1.0 + attributes["volts_over"])
    # Where the fault sets the level, the site's own spread is not counted twice.
    rated = site.machine.voltage_v
    own = np.where(attributes["set_volts"] > 0.0, rated + 0.3 * (site.supply_v - rated), site.supply_v)
    return np.asarray(own * changed * attributes["live"])


def at_standstill(site: Site, attributes: Attributes) -> Standing:
    """Locked rotor with the start circuit as it is; a motor that starts is taken to have run before."""
    stands = found_in(attributes, site.has_switch).stands
    warm = np.maximum((1.0 - stands) * priors.RESTART_HEAT * site.rise_k, 5.0)
    path, seen = auxiliary_path(site, attributes, at_start=True)
    setting = _locked(site, settle(site, attributes, warm_c=site.ambient_c + warm, path=path))
    slip = np.ones_like(site.load)
    currents, volt = run_at(connect(site.machine, setting), slip, 0.5 * setting.supply_v)
    stalled = np.ones(len(slip), dtype=np.bool_)
    found = Running(slip, currents, volt, stalled=stalled, carries=~stalled)
    return _standing(site, attributes, found, seen)


def _locked(site: Site, setting: Setting) -> Setting:
    rise = np.full_like(site.lock, priors.LOCKED_ROTOR_RESISTANCE)
    return replace(setting, leakage=site.lock, rotor_rise=rise)


def torque_asked(site: Site, attributes: Attributes, state: str) -> Floats:
    """Load and friction in a running state, as synchronous watts."""
    machine = site.machine
    rated = machine.power_w / (1.0 - machine.slip)
    load = np.where(attributes["load_set"] > 0.0, attributes["load_set"], site.load)
    share = {"loaded": 1.0, "light_load": priors.LIGHT_LOAD, "no_load": 0.0}[state]
    coupled = 1.0 if share else 0.0
    drag = attributes["friction"] * np.where(attributes["load_drags"] > 0.0, coupled, 1.0)
    return np.asarray((share * load + drag) * rated + machine.friction_w)


@dataclass(frozen=True)
class States:
    """Rows in every state; what several states share, the shaft at standstill, is worked out once."""

    site: Site
    attributes: Attributes

    def solve(self, state: str) -> Standing | None:
        """Return the rows in a running state or under voltage at standstill; None where nothing flows."""
        if state in RUNNING_STATES:
            return self._turning(state)
        return self._standstill if state in {"starting", "stalled"} else None

    def carries(self) -> Flags:
        """Whether each row carries its load."""
        running, _ = self._running("loaded")
        return running.carries

    @cached_property
    def _standstill(self) -> Standing:
        return at_standstill(self.site, self.attributes)

    def _running(self, state: str) -> tuple[Running, Phasors]:
        """The slip that a running state settles at, and what a meter across the capacitor sees. [ohm]"""
        site, attributes = self.site, self.attributes
        asked = torque_asked(site, attributes, state)
        share = asked / site.machine.power_w
        heat = priors.IDLE_HEAT + (1.0 - priors.IDLE_HEAT) * np.minimum(share, 2.0) ** 2
        warm = site.ambient_c + site.rise_k * attributes["rise"] * heat
        path, seen = auxiliary_path(site, attributes, at_start=False)
        setting = settle(site, attributes, warm_c=np.minimum(warm, 220.0), path=path)
        stands = (attributes["live"] < 0.5) | (attributes["jammed"] * (state != "no_load") > 0.5)
        return run_loaded(site.machine, setting, asked, stands), seen

    def _turning(self, state: str) -> Standing:
        """``no_load``, ``light_load`` or ``loaded``; a motor that cannot run is at standstill."""
        running, seen = self._running(state)
        found = _standing(self.site, self.attributes, running, seen)
        if not running.stalled.any():
            return found
        return _merge(running.stalled, self._standstill, found)


def _standing(site: Site, attributes: Attributes, running: Running, seen: Phasors) -> Standing:
    currents, volt = running.currents, running.voltage_v
    earth = 0.4 * volt / attributes["earth_ohm"]
    line = currents.main + currents.auxiliary + earth
    given = volt * line.real
    output = (currents.torque_w - site.machine.friction_w) * (1.0 - running.slip)
    share = settled_heat((given - output - volt * earth) / site.rated_loss_w)
    winding = site.ambient_c + site.rise_k * attributes["rise"] * share
    return Standing(
        running=running,
        line=np.asarray(line),
        capacitor_v=np.abs(currents.auxiliary * seen),
        input_w=np.asarray(given),
        winding_c=np.asarray(np.minimum(winding, 350.0)),
    )


def settled_heat(loss: Floats) -> Floats:
    """Rise over rated rise as it is found, from losses over rated losses.

    A motor with far too much loss trips before it is warm.
    """
    most, fall, least = priors.SETTLED_HEAT
    kept = np.maximum(most - fall * (loss - most), least)
    return np.asarray(np.where(loss < most, np.maximum(loss, 0.0), kept), dtype=np.float64)


def _merge(pick: np.ndarray[tuple[int], np.dtype[np.bool_]], yes: Standing, no: Standing) -> Standing:
    """Rows of one state where picked, of another elsewhere."""
    currents = yes.running.currents
    other = no.running.currents
    mixed = {
        name: np.where(pick, getattr(currents, name), getattr(other, name))
        for name in ("main", "auxiliary", "forward_emf", "backward_emf", "torque_w")
    }
    return Standing(
        running=Running(
            slip=np.where(pick, 1.0, no.running.slip),
            currents=replace(currents, **mixed),
            voltage_v=np.where(pick, yes.running.voltage_v, no.running.voltage_v),
            stalled=no.running.stalled,
            carries=no.running.carries,
        ),
        line=np.where(pick, yes.line, no.line),
        capacitor_v=np.where(pick, yes.capacitor_v, no.capacitor_v),
        input_w=np.where(pick, yes.input_w, no.input_w),
        winding_c=np.where(pick, yes.winding_c, no.winding_c),
    )
