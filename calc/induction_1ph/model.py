"""The twin of a single-phase induction motor."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from calc.induction_1ph import priors
from calc.induction_1ph.chances import found_in
from calc.induction_1ph.circuit import square
from calc.induction_1ph.designs import HAS_START_CAPACITOR, SPLIT_PHASE
from calc.induction_1ph.effects import DEFAULTS, VARIANTS, enumerate_modes
from calc.induction_1ph.machine import connect, run_at
from calc.induction_1ph.plate import Plate, read_plate
from calc.induction_1ph.plate_fit import NDIndex, fit_plate, rated_setting
from calc.induction_1ph.readings import COVERED, error_of, predict_one, transform_of
from calc.induction_1ph.states import Attributes, Site, States
from calc.quantities import RUNNING_STATES
from calc.sheet import Machine, Reading
from calc.twin import Ask, Floats, Mode, ModelError, Transform

_SITE = ("lock", "supply", "source", "load", "rise", "ambient")
_BIG = 4.5


def fit(machine: Machine, *, readings: Sequence[Reading] = ()) -> SinglePhaseTwin:
    """Fit the single-phase model to a nameplate.

    Parameters
    ----------
    machine : Machine
        Any subset of plate fields, down to none.
    readings : sequence of Reading
        Context only: which capacitors were measured, which voltage class.

    Returns
    -------
    SinglePhaseTwin
        Implements ``calc.twin.Twin``.

    """
    return SinglePhaseTwin(read_plate(machine, readings))


class SinglePhaseTwin:
    """A single-phase motor as its plate describes it; every design that the plate allows at once.

    Latents: what the plate leaves open of the circuit, start capacitor, leakage at
    standstill, supply level and impedance, load, temperature rise, ambient, two severities.
    """

    kind = "induction_1ph"

    def __init__(self, plate: Plate) -> None:
        self.plate = plate
        self._fit = fit_plate(plate)
        self.designs = self._fit.known.designs
        has_start = [design in HAS_START_CAPACITOR for design in self.designs]
        names = (*(("start",) if any(has_start) else ()), *_SITE)
        self._places = {name: self._fit.size + index for index, name in enumerate(names)}
        self._dim = self._fit.size + len(names) + 2
        self._has_start = np.array(has_start, dtype=np.float64)
        self._has_switch = np.array(
            [design in HAS_START_CAPACITOR or design == SPLIT_PHASE for design in self.designs],
            dtype=np.float64,
        )
        self._start = [self._start_capacitor(design) for design in self.designs]
        self._rated_loss_w = self._rated_losses()
        self.weights = self._fit.weights

    @property
    def dim(self) -> int:
        """Number of latents; the last two are severities."""
        return self._dim

    @property
    def defaults(self) -> Mapping[str, float]:
        """Attributes of a healthy machine."""
        return DEFAULTS

    @property
    def effects(self) -> tuple[str, ...]:
        """Effects that :meth:`modes` knows."""
        return tuple(VARIANTS)

    def modes(self, effect: str, severity: tuple[float, float] | None = None) -> tuple[Mode, ...]:
        """Enumerate the ways of an effect over designs, the likeliest design first.

        The weights add up to the chance that the motor has the part. Raises KeyError for an
        unknown effect.
        """
        order = np.argsort(-self._fit.weights, kind="stable")
        picked = [int(i) for i in order if self._fit.weights[i] >= _LEAST_SHARE]
        weights = [float(weight) for weight in self._fit.weights]
        return enumerate_modes(effect, self.designs, weights, severity, picked)

    def covers(self, ask: Ask) -> bool:
        """Whether the model predicts this reading; none of a part that the motor most likely has not."""
        if ask.state not in COVERED.get(ask.measure, frozenset()):
            return False
        return self.chance_of_part(ask) >= _LEAST_PART

    def chance_of_part(self, ask: Ask) -> float:
        """Chance that the motor has the capacitor that is to be read."""
        run, start = self._fit.known.has_run, self._has_start
        has = {
            "run_capacitance": run,
            "start_capacitance": start,
            "capacitor_voltage": run if ask.state in RUNNING_STATES else np.maximum(run, start),
        }.get(ask.measure)
        return 1.0 if has is None else float(has @ self.weights)

    def predict(self, z: Floats, attributes: Attributes, asks: Sequence[Ask]) -> list[Floats]:
        """Predict readings: one array of shape (rows, 1) per reading asked for, in inner units."""
        site = self.site(z, attributes)
        states = States(site, attributes)
        solved = {state: states.solve(state) for state in dict.fromkeys(ask.state for ask in asks)}
        return [predict_one(self.plate, site, attributes, ask, solved[ask.state])[:, None] for ask in asks]

    def plate_misfit(self, z: Floats) -> Floats:
        """No residuals: the latents span only what the plate leaves open."""
        return np.zeros((len(z), 0))

    def possible(self, z: Floats, attributes: Attributes) -> Mapping[str, Floats]:
        """For each state, the chance that such a motor can be in it: shape (rows,), 0.0 to 1.0."""
        site = self.site(z, attributes)
        pulled_out = ~States(site, attributes).carries()
        found = found_in(attributes, site.has_switch)
        always = np.ones(len(z))
        return {
            "isolated": always,
            "standby": always,
            "spun": 0.0 * always,
            "starting": found.starts,
            "stalled": np.where(pulled_out, np.maximum(found.stands, 0.5), found.stands) * found.starts,
            "no_load": found.turns_free,
            "light_load": found.turns_loaded,
            "loaded": np.where(pulled_out, 0.0, found.turns_loaded),
            "coasting": np.maximum(found.turns_free, found.turns_loaded),
        }

    def transform(self, measure: str) -> Transform:
        """How a measure enters the comparison on this machine."""
        return transform_of(measure, self.plate, self._amps())

    def model_error(self, ask: Ask) -> ModelError:
        """How far the model may be off for this reading, in transformed units."""
        return error_of(ask, self.plate)

    def site(self, z: Floats, attributes: Attributes) -> Site:
        """Motor and surroundings of rows of latents, with the design that the attributes name."""
        z = np.clip(z, -_BIG, _BIG)
        design = attributes["design"].astype(np.intp)
        machine = self._fit.motors(z[:, : self._fit.size], design)
        ohm = self.plate.voltage_v / self._fit.known.base_current_a[design]
        start = np.array([median for median, _ in self._start])
        spread = np.array([sigma for _, sigma in self._start])
        lock = np.array([priors.LOCKED_LEAKAGE[name] for name in self.designs])
        return Site(
            machine=machine,
            has_run=self._fit.known.has_run[design],
            has_start=self._has_start[design],
            has_switch=self._has_switch[design],
            start_f=start[design] * np.exp(spread[design] * self._latent(z, "start")),
            supply_v=self.plate.supply_v * (1.0 + priors.SUPPLY[1] * self._latent(z, "supply")),
            source_ohm=ohm * self._spread(z, "source", priors.SOURCE_PER_UNIT),
            lock=lock[design, 0] * np.exp(lock[design, 1] * self._latent(z, "lock")),
            load=self._spread(z, "load", priors.LOAD),
            rise_k=self._spread(z, "rise", (self.plate.rise_k, priors.RISE_SPREAD)),
            ambient_c=self.plate.ambient_c + priors.AMBIENT_SPREAD_K * self._latent(z, "ambient"),
            rated_loss_w=self._rated_loss_w[design],
        )

    def _latent(self, z: Floats, name: str) -> Floats:
        place = self._places.get(name)
        return np.zeros(len(z)) if place is None else z[:, place]

    def _spread(self, z: Floats, name: str, spread: priors.Spread) -> Floats:
        return np.asarray(spread[0] * np.exp(spread[1] * self._latent(z, name)))

    def _amps(self) -> float:
        return float(self._fit.known.base_current_a @ self._fit.weights)

    def _start_capacitor(self, design: str) -> tuple[float, float]:
        """Median [F] and spread of the start capacitor of a design."""
        plate = self.plate
        if design not in HAS_START_CAPACITOR:
            return 1e-12, 0.0
        if plate.start_f is not None:
            return plate.start_f, plate.start_sigma
        ratio, sigma = priors.START_VAR_PER_WATT[design]
        rated = plate.power_w / (2.0 * np.pi * plate.frequency_hz * plate.voltage_v**2)
        return ratio * rated, sigma

    def _rated_losses(self) -> Floats:
        """Losses [W] of the base point of each design at rated load."""
        design: NDIndex = np.arange(len(self.designs), dtype=np.intp)
        machine = self._fit.motors(np.zeros((len(design), self._fit.size)), design)
        setting = rated_setting(self.plate, machine, self._fit.known.has_run)
        slip = np.minimum(machine.slip, 0.5)
        currents, volt = run_at(connect(machine, setting), slip, priors.RATED_EMF * machine.voltage_v)
        line = currents.main + currents.auxiliary
        output = (currents.torque_w * (1.0 - slip)) - machine.friction_w
        floor = 0.05 * np.sqrt(square(line)) * volt
        return np.asarray(np.maximum(volt * line.real - output, floor))


_LEAST_SHARE = 0.02
"""A design that the plate makes less likely than this is not looked at."""
_LEAST_PART = 0.35
"""A capacitor that the motor less likely has than this is not asked for; one that was read is there."""
