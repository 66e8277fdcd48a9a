"""Every reading of a DC machine that a circuit, a temperature or a bar test predicts."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

import numpy as np

from calc.dc.circuit import at_temperature
from calc.dc.converter import ripple_frequency, ripple_share
from calc.dc.states import OPEN_OHM, Bench
from calc.twin import Ask, Floats

RUNNING: Final = frozenset({"no_load", "light_load", "loaded"})
LIVE: Final = RUNNING | {"starting", "stalled"}
_FIELD_STATES: Final = LIVE | {"spun", "standby"}
_AT_REST: Final = frozenset({"isolated"})
_WARM: Final = RUNNING | {"isolated"}
_ISOLATED_RISE_K = 3.0  # a machine at rest is read somewhat above ambient where no temperature was noted
_OHMMETER_SHARE = 0.10  # brush contact at an ohmmeter's current, of the armature's resistance
_OHMMETER_FAULT = 1.5  # a bad contact reads higher at small current than in service
_INTERPOLE_SHARE = 0.22
_BEARING_RISE_K = 25.0
_BEARING_FAULT_K = 85.0
_RUBBING_DRAG = 0.12  # drag above this heats where the machine rubs rather than the bearing
_RUBBING_K = 25.0


def _volts(bench: Bench, ask: Ask) -> Floats:
    if ask.state == "spun":
        return _open_circuit(bench, ask)
    return np.asarray(bench.state(ask.state).volts * bench.machine.volt)


def _amperes(bench: Bench, ask: Ask) -> Floats:
    return np.asarray(bench.state(ask.state).current * bench.machine.ampere)


def _speed(bench: Bench, ask: Ask) -> Floats:
    return np.asarray(bench.state(ask.state).speed * bench.machine.rpm)


def _field_volts(bench: Bench, ask: Ask) -> Floats:
    return bench.state(ask.state).field_v


def _field_amperes(bench: Bench, ask: Ask) -> Floats:
    return bench.state(ask.state).field_a


def _input_power(bench: Bench, ask: Ask) -> Floats:
    now, m = bench.state(ask.state), bench.machine
    field = 0.0 if bench.plate.kind == "dc_separately_excited" else now.field_a * m.field_volt * bench.supply
    return np.asarray(now.volts * m.volt * now.current * m.ampere + field)


def _open_circuit(bench: Bench, ask: Ask) -> Floats:
    rpm = ask.speed_rpm or bench.plate.spun_rpm
    share = 1.0 if rpm is None else rpm / bench.machine.rpm
    return np.asarray(bench.state("spun").volts * bench.machine.volt * share)


def _temperature(bench: Bench, ask: Ask) -> Floats:
    """Temperature of windings at rest."""
    if ask.temperature_c is not None:
        return np.full_like(bench.machine.ambient, ask.temperature_c)
    return np.asarray(bench.machine.ambient + _ISOLATED_RISE_K)


def _ohm(bench: Bench) -> Floats:
    return np.asarray(bench.machine.volt / bench.machine.ampere)


def _armature_ohms(bench: Bench, ask: Ask) -> Floats:
    """Armature as an ohmmeter sees it through the brushes: always somewhat too much, and it scatters."""
    m, a = bench.machine, bench.attributes
    copper = bench.armature_cold * at_temperature(_temperature(bench, ask))
    contact = _OHMMETER_SHARE * m.resistance * m.contact
    fault = _OHMMETER_FAULT * a["brush_ohm"] * np.sqrt(m.contact)
    value = (copper + contact + fault) * _ohm(bench)
    return np.where(a["armature_reads_open"] > 0.5, OPEN_OHM, value)


def _field_ohms(bench: Bench, ask: Ask) -> Floats:
    return np.minimum(bench.field_cold * at_temperature(_temperature(bench, ask)), OPEN_OHM)


def _series_ohms(bench: Bench, ask: Ask) -> Floats:
    value = bench.series_cold * at_temperature(_temperature(bench, ask)) * _ohm(bench)
    return np.where(bench.attributes["series_open"] > 0.5, OPEN_OHM, value)


def _interpole_ohms(bench: Bench, ask: Ask) -> Floats:
    m = bench.machine
    sound = m.resistance * (1.0 - m.series_share)
    value = _INTERPOLE_SHARE * sound * at_temperature(_temperature(bench, ask)) * _ohm(bench)
    return np.where(bench.attributes["interpole_open"] > 0.5, OPEN_OHM, value)


def _commutator_ripple(bench: Bench) -> Floats:
    """Ripple of rated volts that a damaged armature or a dirty commutator adds."""
    a = bench.attributes
    coils = a["coil_shorted"] * bench.machine.bars
    shorted = 0.012 * np.minimum(coils, 1.5)
    return np.asarray(np.where(a["coil_open"] > 0.0, 0.028, 0.0) + shorted + 0.0022 * a["unevenness"])


def _ripple(bench: Bench, ask: Ask) -> Floats:
    now, m = bench.state(ask.state), bench.machine
    volts = np.maximum(now.volts, 0.02)
    share = ripple_share(
        source=m.source,
        ripple=m.ripple,
        smoothing=m.smoothing,
        volts=volts,
        current=now.current,
        lost=bench.attributes["pulses_lost"],
        commutator=_commutator_ripple(bench),
    )
    return np.asarray(share * volts * m.volt)


def _ripple_hz(bench: Bench, ask: Ask) -> Floats:
    m = bench.machine
    bars = m.bars * bench.state(ask.state).speed * m.rpm / 60.0
    mains = bench.plate.mains_hz or 55.0
    return ripple_frequency(
        source=m.source, mains_hz=mains, lost=bench.attributes["pulses_lost"], bars_per_second=bars
    )


def _bar_rise(bench: Bench) -> Floats:
    """Highest drop between bars above the mean, %; an open coil shows nearly all of the drop."""
    m, a = bench.machine, bench.attributes
    opened = np.where(a["coil_open"] > 0.0, 260.0 * (m.bars / 60.0) ** 0.3 * m.evenness / 1.3, 0.0)
    uneven = a["unevenness"] * (0.5 + 4.0 * np.minimum(a["brush_ohm"], 0.3))
    return np.asarray(m.evenness + opened + uneven)


def _bar_fall(bench: Bench) -> Floats:
    """Lowest drop between bars below the mean, %; a shorted coil drops nothing."""
    m, a = bench.machine, bench.attributes
    fallen = 90.0 * (1.0 - np.exp(-a["coil_shorted"] * m.bars)) + 0.5 * a["unevenness"]
    return np.minimum(m.evenness + fallen, 100.0)


def _bar_high(bench: Bench, ask: Ask) -> Floats:
    """Highest drop between bars, % of the mean."""
    return np.asarray(100.0 + _bar_rise(bench))


def _bar_low(bench: Bench, ask: Ask) -> Floats:
    """Lowest drop between bars, % of the mean."""
    return np.asarray(100.0 - _bar_fall(bench))


def _bar_spread(bench: Bench, ask: Ask) -> Floats:
    return np.maximum(_bar_rise(bench), _bar_fall(bench))


def _ambient(bench: Bench, ask: Ask) -> Floats:
    return bench.machine.ambient


def _duty(bench: Bench, ask: Ask) -> Floats:
    """Square of the current, as far as it has heated the machine by the time it is read."""
    return np.minimum(bench.state(ask.state).current ** 2, 2.5)


def _frame(bench: Bench, ask: Ask) -> Floats:
    m = bench.machine
    if ask.state == "isolated":
        return m.ambient + _ISOLATED_RISE_K
    rise = m.frame * m.rise * bench.attributes["heat"] * (0.6 + 0.4 * _duty(bench, ask))
    return np.asarray(m.ambient + rise)


def _winding(bench: Bench, ask: Ask) -> Floats:
    m = bench.machine
    if ask.state == "isolated":
        return m.ambient + _ISOLATED_RISE_K
    return np.asarray(m.ambient + m.rise * bench.attributes["heat"] * (0.3 + 0.7 * _duty(bench, ask)))


def _bearing(bench: Bench, ask: Ask) -> Floats:
    m, a = bench.machine, bench.attributes
    if ask.state == "isolated":
        return m.ambient + _ISOLATED_RISE_K
    drag = a["friction"]
    in_bearing = 1.0 / (1.0 + (drag / _RUBBING_DRAG) ** 4)
    fault = _BEARING_FAULT_K * (1.0 - np.exp(-drag / 0.06)) * in_bearing + _RUBBING_K * (1.0 - in_bearing)
    return np.asarray(m.ambient + _BEARING_RISE_K * (0.7 + 0.3 * a["heat"]) + fault)


def _starting_time(bench: Bench, ask: Ask) -> Floats:
    """Rough: the torque that is left to speed up decides; a machine that stands never gets there."""
    m, a = bench.machine, bench.attributes
    torque = bench.state("starting").current - np.where(a["torque"] > 0.0, a["torque"], m.load) - bench.drag
    runs = bench.state("loaded").runs
    return np.where(runs > 0.5, 3.0 / np.maximum(torque, 0.1), 120.0)


Predictor = Callable[[Bench, Ask], Floats]
TABLE: Final[dict[str, tuple[frozenset[str], Predictor]]] = {
    "armature_voltage": (LIVE | {"spun", "standby"}, _volts),
    "armature_current": (LIVE | {"standby"}, _amperes),
    "speed": (RUNNING | {"stalled"}, _speed),
    "field_voltage": (_FIELD_STATES, _field_volts),
    "field_current": (_FIELD_STATES, _field_amperes),
    "input_power": (LIVE, _input_power),
    "armature_resistance": (_AT_REST, _armature_ohms),
    "field_resistance": (_AT_REST, _field_ohms),
    "series_field_resistance": (_AT_REST, _series_ohms),
    "interpole_resistance": (_AT_REST, _interpole_ohms),
    "ripple_voltage": (RUNNING, _ripple),
    "ripple_frequency": (RUNNING, _ripple_hz),
    "open_circuit_voltage": (frozenset({"spun"}), _open_circuit),
    "bar_drop_spread": (_AT_REST, _bar_spread),
    "bar_drop_max": (_AT_REST, _bar_high),
    "bar_drop_min": (_AT_REST, _bar_low),
    "frame_temperature": (_WARM, _frame),
    "ambient_temperature": (_WARM | LIVE | {"standby"}, _ambient),
    "bearing_temperature": (_WARM, _bearing),
    "winding_temperature": (_WARM, _winding),
    "starting_time": (frozenset({"starting"}), _starting_time),
}
