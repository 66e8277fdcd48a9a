"""The twin of a three-phase induction motor: readings in every state from plate, latents and mode."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np

from calc.induction_3ph import effects, thermal
from calc.induction_3ph.equivalent import Circuit, circuit
from calc.induction_3ph.network import terminal_resistance
from calc.induction_3ph.plate import COPPER_K, INDEX, LATENTS, Base, read_base
from calc.induction_3ph.stacking import part, repeated, stacked
from calc.induction_3ph.states import StateResult, Supply, rated_torque, solve, supply
from calc.induction_3ph.windings import line_extra, with_path
from calc.sheet import Machine, Reading
from calc.twin import Ask, Floats, Mode, ModelError, Severity, Transform, standard_normal_cdf

_STANDING = {"stalled", "starting"}
_TURNING = {"no_load", "light_load", "loaded"}
_ELECTRICAL = {"supply_voltage", "supply_frequency", "line_current", "speed", "input_power", "power_factor"}
_TEMPERATURES = {"frame_temperature", "bearing_temperature", "winding_temperature", "ambient_temperature"}
OPEN_OHM = 1e9

# One sigma of the model in the transformed reading: level, contrast, share of the contrast. Judgement, from
# comparing circuit models of this kind with measured machines; instruments come on top.
_ERROR: dict[str, ModelError] = {
    "supply_voltage": ModelError(0.004, 0.0016, 0.04),
    # A start pulls the supply down unevenly; how unevenly depends on transformer and cable.
    "supply_voltage@starting": ModelError(0.008, 0.005, 0.15),
    "supply_voltage@stalled": ModelError(0.008, 0.005, 0.15),
    "line_current@loaded": ModelError(0.012, 0.012, 0.08),
    "line_current@light_load": ModelError(0.35, 0.02, 0.1),
    "line_current@no_load": ModelError(0.03, 0.014, 0.08),
    "line_current@stalled": ModelError(0.07, 0.02, 0.08),
    "line_current@starting": ModelError(0.09, 0.025, 0.08),
    "speed": ModelError(0.00033),
    "input_power": ModelError(0.025),
    "input_power@no_load": ModelError(0.08),
    "power_factor": ModelError(0.03),
    "winding_resistance": ModelError(0.05, 0.0022, 0.06),
    "phase_resistance": ModelError(0.05, 0.0022, 0.06),
    "supply_frequency": ModelError(0.0002),
    "sideband_level": ModelError(5.0),
    "starting_time": ModelError(0.9),
    "frame_temperature": ModelError(3.5),
    "bearing_temperature": ModelError(4.5),
    "winding_temperature": ModelError(6.0),
    "ambient_temperature": ModelError(2.0),
}

# What these starters let through in the first seconds is set on them, not on the motor's plate.
_LIMITS_START = frozenset({"autotransformer", "soft_starter", "inverter", "rotor_resistance"})
_LIMITED_START = frozenset({"line_current@starting", "input_power@starting"})


@dataclass
class InductionTwin:
    """Twin of a three-phase induction motor (``calc.twin.Twin``)."""

    base: Base
    load_exponent: float
    nominal: float
    inverter: bool
    starter: str = ""
    kind: str = "induction_3ph"
    defaults: Mapping[str, float] = field(default_factory=lambda: dict(effects.DEFAULTS))
    effects: tuple[str, ...] = effects.EFFECTS
    _last: tuple[Floats, Circuit] | None = field(default=None, repr=False, compare=False)

    @property
    def dim(self) -> int:
        """Number of latents."""
        return len(LATENTS)

    def modes(self, effect: str, severity: tuple[float, float] | None = None) -> tuple[Mode, ...]:
        """Enumerate the discrete ways of an effect on this machine."""
        if effect == "stuck_in_star" and self.starter != "star_delta":
            return ()
        found = effects.modes(effect, severity, self.base.connection)
        if effect == "excess_load" and self.base.service_factor > 1.0:
            return tuple(_scaled(mode, "load", self.base.service_factor) for mode in found)
        return found

    def covers(self, ask: Ask) -> bool:
        """Whether the model predicts this reading."""
        if ask.measure in {"winding_resistance", "phase_resistance"}:
            return ask.state == "isolated"
        if ask.measure in _TEMPERATURES:
            return ask.state in _TURNING or ask.measure == "ambient_temperature"
        if ask.measure == "starting_time":
            return ask.state == "starting"
        if ask.measure in {"sideband_level", "speed"}:
            return ask.state in _TURNING
        return ask.measure in _ELECTRICAL and ask.state in _STANDING | _TURNING

    def chance_of_part(self, ask: Ask) -> float:
        """Certain: what is covered is there."""
        return 1.0 if self.covers(ask) else 0.0

    def transform(self, measure: str) -> Transform:
        """How a measure enters the comparison on this machine."""
        base = self.base
        return {
            "supply_voltage": Transform("linear", scale=base.voltage_v),
            "supply_frequency": Transform("linear", scale=base.frequency_hz),
            "line_current": Transform("log_mean", floor=0.006 * base.current_a),
            "speed": Transform("linear", scale=base.synchronous_rpm),
            "input_power": Transform("log", floor=0.004 * base.power_w),
            "winding_resistance": Transform(
                "log", cap=1100.0 * base.impedance_ohm, floor=1e-6 * base.impedance_ohm
            ),
            "phase_resistance": Transform(
                "log", cap=1100.0 * base.impedance_ohm, floor=1e-6 * base.impedance_ohm
            ),
            "starting_time": Transform("log", floor=0.1),
        }.get(measure, Transform("linear"))

    def model_error(self, ask: Ask) -> ModelError:
        """How far the model may be off for this reading."""
        if ask.key in _LIMITED_START and self.starter in _LIMITS_START:
            return ModelError(0.6, 0.03, 0.1)
        error = _ERROR.get(ask.key) or _ERROR.get(ask.measure) or ModelError(0.1)
        if ask.measure == "speed" and ask.state in _TURNING:
            share = 0.05 if ask.state == "loaded" else 0.02
            return ModelError(float(np.hypot(error.level, share * self.base.slip)))
        return error

    def plate_misfit(self, z: Floats) -> Floats:
        """Power factor of the plate against the one of the circuit: (rows, 0 or 1)."""
        if self.base.power_factor is None:
            return np.zeros((len(z), 0))
        base = self.base
        machine = self._circuit(z)
        current = np.exp(base.current_spread * z[:, INDEX["current"]])
        pf = (machine.p_out + machine.losses) / current
        misfit = (pf - float(base.power_factor or 0.0)) / base.power_factor_spread
        return np.asarray(misfit[:, None])

    def possible(self, z: Floats, attributes: Mapping[str, Floats]) -> Mapping[str, Floats]:
        """For each state, 1.0 where such a machine can be in it."""
        rows, machine, feed = self._prepare(z, attributes)
        loaded = self._solve(machine, rows, feed, z, ["loaded"])["loaded"]
        turns = 1.0 - np.maximum(rows["stall"], loaded.stalled)
        one = np.ones(len(z))
        free = 1.0 - np.maximum(rows["stall"] * (1.0 - rows["load_stalls"]), rows["no_supply"])
        return {
            "isolated": one,
            "standby": one,
            "starting": one,
            "stalled": 1.0 - turns,
            "loaded": turns,
            "light_load": turns,
            "no_load": free,
            "coasting": turns,
            "spun": 0.0 * one,
        }

    def predict(self, z: Floats, attributes: Mapping[str, Floats], asks: Sequence[Ask]) -> list[Floats]:
        """Predict readings: one array of shape (rows, arity) per ask."""
        rows, machine, feed = self._prepare(z, attributes)
        circuitless = {"winding_resistance", "phase_resistance", "ambient_temperature"}
        states = dict.fromkeys(ask.state for ask in asks if ask.measure not in circuitless)
        solved = self._solve(machine, rows, feed, z, list(states)) if states else {}
        return [self._answer(ask, z, rows, machine, feed, solved.get(ask.state)) for ask in asks]

    def _circuit(self, z: Floats) -> Circuit:
        """The circuits of these rows; asked for twice running, they are worked out once."""
        last = self._last
        if last is None or last[0] is not z:
            last = self._last = (z, circuit(self.base, z))
        return last[1]

    def _prepare(
        self, z: Floats, attributes: Mapping[str, Floats]
    ) -> tuple[dict[str, Floats], Circuit, Supply]:
        rows = dict(attributes)
        ohm = rows["earth_ohm"]
        rows["earth_pu"] = np.where(ohm > 0.0, ohm / self.base.impedance_ohm, 0.0)
        machine = self._circuit(z)
        return rows, machine, supply(self.base, z, rows, self.nominal, self.inverter)

    def _solve(
        self, machine: Circuit, rows: Mapping[str, Floats], feed: Supply, z: Floats, states: Sequence[str]
    ) -> dict[str, StateResult]:
        """Solve all states at once, each with the torque and the winding temperature that belong to it."""
        load = self._load(rows, z, feed)
        parts = [self._in_state(state, machine, rows, load, thermal.ambient_c(z)) for state in states]
        changes, torque, r1 = zip(*parts, strict=True)
        count, size = len(states), len(z)
        standing = np.repeat([1.0 if state in _STANDING else 0.0 for state in states], size)
        found = solve(
            repeated(machine, count),
            stacked(rows, changes),
            repeated(feed, count),
            np.concatenate(torque),
            standing=standing,
            r1=np.concatenate(r1),
        )
        return {state: part(found, slice(k * size, (k + 1) * size)) for k, state in enumerate(states)}

    def _in_state(
        self, state: str, machine: Circuit, rows: Mapping[str, Floats], load: Floats, ambient: Floats
    ) -> tuple[Mapping[str, Floats], Floats, Floats]:
        """What one state changes in the attributes, the torque demanded and the stator resistance in it."""
        changes = {}
        if state == "no_load":
            changes["stall"] = rows["stall"] * (1.0 - rows["load_stalls"])
        if state == "starting" and self.starter == "star_delta":
            # The first seconds are in star: a third of line current and torque.
            changes["running_star"] = np.ones(len(load))
        share = {"loaded": 1.0, "light_load": 0.4}.get(state, 0.0)
        useful = load * share * machine.p_out + machine.p_friction + share * load**2 * machine.p_stray
        torque = useful / (1.0 - machine.slip) + rows["friction"] * rated_torque(machine)
        warm = ambient + (0.6 * machine.rise_k if share else 0.25 * machine.rise_k)
        return changes, torque, machine.r1 * (COPPER_K + warm) / (COPPER_K + 25.0 + machine.rise_k)

    def _load(self, rows: Mapping[str, Floats], z: Floats, feed: Supply) -> Floats:
        """Load torque over rated; pumps and fans ask for torque as the square of speed."""
        span = rows["load_high"] - rows["load_low"]
        drawn = rows["load_low"] + span * standard_normal_cdf(z[:, INDEX["load"]])
        torque = np.where(rows["load"] > 0.0, rows["load"], drawn)
        return torque * feed.frequency**self.load_exponent

    def _answer(
        self,
        ask: Ask,
        z: Floats,
        rows: Mapping[str, Floats],
        machine: Circuit,
        feed: Supply,
        state: StateResult | None,
    ) -> Floats:
        base = self.base
        if ask.measure in {"winding_resistance", "phase_resistance"}:
            return self._resistance(ask, z, rows, machine)
        if ask.measure == "ambient_temperature" or state is None:
            return thermal.ambient_c(z)[:, None]
        if ask.measure == "line_current":
            amps = state.current * base.current_a
            # A meter follows a start with delay: the current read is the locked one already falling.
            return amps * (0.94 if ask.state == "starting" else 1.0)
        if ask.measure == "supply_voltage":
            return state.voltage * base.voltage_v
        column = {
            "supply_frequency": lambda: feed.frequency * base.frequency_hz,
            "speed": lambda: (1.0 - state.slip) * feed.frequency * base.synchronous_rpm,
            "input_power": lambda: np.maximum(state.power, 0.0) * base.apparent_va,
            "power_factor": lambda: state.power / np.maximum(state.apparent, 1e-6),
            "sideband_level": lambda: thermal.sideband_db(rows["bars"], ask.state, base.poles),
            "starting_time": lambda: thermal.starting_time_s(machine, rows, state, base),
        }.get(ask.measure)
        if column is not None:
            return np.asarray(column())[:, None]
        return thermal.temperature_c(ask.measure, z, rows, machine, state)[:, None]

    def _resistance(self, ask: Ask, z: Floats, rows: Mapping[str, Floats], machine: Circuit) -> Floats:
        """Winding resistance at the temperature noted, else at the ambient latent's."""
        at_c = thermal.ambient_c(z) if ask.temperature_c is None else np.full(len(z), ask.temperature_c)
        cold = machine.r1 * rows["impedance"] * (COPPER_K + at_c) / (COPPER_K + 25.0 + machine.rise_k)
        delta = rows["delta"]
        phases = np.repeat(cold[:, None], 3, axis=1)
        index = np.arange(len(z))
        phase = rows["phase"].astype(np.int64)
        phases[index, phase] *= 1.0 - rows["turns"]
        phases[index, phase] += rows["phase_r"] * np.where(rows["phase_r"] >= effects.OPEN, 1e4, 1.0)
        if ask.measure == "phase_resistance":
            own = np.where(delta > 0.5, 3.0, 1.0)[:, None] * phases
            return np.minimum(own * self.base.impedance_ohm, OPEN_OHM)
        between = terminal_resistance(phases, delta)
        between = with_path(rows, phases, between) + line_extra(rows)
        return np.minimum(between * self.base.impedance_ohm, OPEN_OHM)


def _scaled(mode: Mode, attribute: str, factor: float) -> Mode:
    severity = tuple(
        Severity(s.attribute, s.low * factor, s.high * factor) if s.attribute == attribute else s
        for s in mode.severity
    )
    return replace(mode, severity=severity)


def fit(machine: Machine, *, readings: Sequence[Reading] = ()) -> InductionTwin:
    """Make the twin of a machine from its sheet.

    Any plate field may be blank; what is missing becomes spread, and ``readings`` then tell
    its class (poles, nominal voltage, rough size), never its state.
    """
    base = read_base(machine, readings)
    nominal = machine.supply.nominal_voltage
    volts = nominal.number if nominal is not None and nominal.is_read else base.voltage_v
    exponent = {"fan": 2.0, "pump_centrifugal": 2.0}.get(machine.load_type or "", 0.0)
    return InductionTwin(
        base=base,
        load_exponent=exponent if machine.load_type else 1.0,
        nominal=volts / base.voltage_v,
        inverter=machine.supply.source == "inverter",
        starter=machine.starter or "",
    )
