"""One motor per row: physical quantities from per-unit ones, and what they make of a state.

Resistances are kept at 20 °C and brought to the temperature of the state.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, fields, replace
from typing import TypeVar

import numpy as np

from calc.induction_1ph import priors
from calc.induction_1ph.circuit import Currents, Phasors, Rotor, Windings, solve_currents
from calc.induction_1ph.plate import Plate
from calc.twin import Floats

OPEN_OHM = 1e9
_COPPER_K = 234.5


@dataclass(frozen=True)
class Motor:
    """Quantities of a motor, each of shape (rows,); ohms at 20 °C, farads, watts, volts."""

    voltage_v: Floats
    angular_frequency: Floats
    main_ohm: Floats
    main_reactance_ohm: Floats
    auxiliary_ohm: Floats
    auxiliary_reactance_ohm: Floats
    rotor_ohm: Floats
    magnetising_ohm: Floats
    core_ohm: Floats
    turns_ratio: Floats
    power_w: Floats
    friction_w: Floats
    slip: Floats
    run_f: Floats


@dataclass(frozen=True)
class Setting:
    """How a motor stands in one state; shapes as the motor's.

    ``leakage`` and ``rotor_rise`` are factors on leakage reactance and rotor resistance,
    ``loop_leakage`` the loop's of shorted turns over its share of the winding's;
    ``winding_ohm`` one on all impedances: the winding linked for another voltage.
    """

    temperature_c: Floats
    auxiliary_extra_ohm: Phasors
    main_extra_ohm: Floats
    supply_v: Floats
    source_ohm: Floats
    turn_share: Floats
    loop_leakage: Floats
    leakage: Floats
    rotor_rise: Floats
    winding_ohm: Floats


def motor(plate: Plate, values: Mapping[str, Floats], *, base_current_a: Floats) -> Motor:
    """Turn per-unit quantities into a motor.

    Parameters
    ----------
    plate : Plate
        Rated values.
    values : mapping
        Per-unit quantities by the names of ``priors.MEDIAN_AND_SPREAD``, with ``slip``,
        ``current``, ``power`` (factors on the plate's) and ``run`` [F]; each (rows,).
    base_current_a : ndarray
        Rated current of each row's design. [A]

    """
    ohm = plate.voltage_v / (base_current_a * values["current"])
    power = plate.power_w * values["power"]
    main_reactance = values["leakage"] * ohm
    main = values["main_resistance"] * ohm
    return Motor(
        voltage_v=np.full_like(ohm, plate.voltage_v),
        angular_frequency=np.full_like(ohm, 2.0 * np.pi * plate.frequency_hz),
        main_ohm=main,
        main_reactance_ohm=main_reactance,
        auxiliary_ohm=main * values["auxiliary_resistance"],
        auxiliary_reactance_ohm=main_reactance * values["auxiliary_leakage"],
        rotor_ohm=values["rotor_resistance"] * ohm,
        magnetising_ohm=values["magnetising"] * ohm,
        core_ohm=values["core"] * ohm,
        turns_ratio=values["turns_ratio"],
        power_w=power,
        friction_w=values["friction"] * power,
        slip=values["slip"],
        run_f=values["run"],
    )


def copper_factor(temperature_c: Floats) -> Floats:
    """Resistance at a temperature over that at 20 °C: (234.5 + t) / 254.5 for copper (IEEE 112)."""
    return np.asarray((_COPPER_K + temperature_c) / (_COPPER_K + 20.0))


def capacitor_ohm(farad: Floats, angular_frequency: Floats, *, loss_factor: float) -> Phasors:
    """Impedance of a capacitor with its losses; 1e9 ohm where there is none.

    ``loss_factor`` is series resistance over reactance.
    """
    reactance = 1.0 / np.maximum(angular_frequency * farad, 1e-9)
    ohm = np.minimum(reactance, OPEN_OHM)
    return np.asarray(ohm * (loss_factor - 1j))


def in_parallel(one: Phasors, other: Phasors) -> Phasors:
    """Two impedances side by side; either may be zero (shorted)."""
    total = one + other
    return np.asarray(one * other / np.where(total == 0.0, 1.0, total))


def saturation(emf: Floats) -> Floats:
    """Magnetising reactance at an induced voltage over that at rated voltage; ``emf`` is per unit of it."""
    share = priors.SATURATION_SHARE
    risen = np.exp(priors.SATURATION_POWER * np.log(np.clip(emf, 1e-6, 1.6)))
    return np.asarray((1.0 + share) / (1.0 + share * risen), dtype=np.float64)


@dataclass(frozen=True)
class Connected:
    """A motor in a setting: all that does not change with slip and magnetisation, fed with one volt."""

    windings: Windings
    rotor: Rotor
    magnetising_ohm: Floats
    rated_emf_v: Floats
    backward_rise: Floats
    supply_v: Floats
    source_ohm: Floats

    def column(self) -> Connected:
        """Return the same with shape (rows, 1), to be spread over slips."""
        return replace(
            self,
            windings=_column(self.windings),
            rotor=_column(self.rotor),
            **{f.name: getattr(self, f.name)[:, None] for f in fields(self)[2:]},
        )


_Arrays = TypeVar("_Arrays", Windings, Rotor)


def _column(arrays: _Arrays) -> _Arrays:
    return replace(arrays, **{f.name: getattr(arrays, f.name)[:, None] for f in fields(arrays)})


def connect(machine: Motor, setting: Setting) -> Connected:
    """Put a motor into a setting."""
    linked = setting.winding_ohm
    warm = copper_factor(setting.temperature_c) * linked
    main_x = machine.main_reactance_ohm * setting.leakage * linked
    main_ohm = machine.main_ohm * warm
    left = 1.0 - setting.turn_share
    series_ohm = main_ohm * left + 1j * main_x * left**2 + setting.main_extra_ohm
    loop_ohm = main_ohm + 1j * setting.loop_leakage * main_x
    auxiliary_x = machine.auxiliary_reactance_ohm * setting.leakage * linked
    unit = np.ones(linked.shape, dtype=np.complex128)
    return Connected(
        windings=Windings(
            main_ohm=np.asarray(series_ohm, dtype=np.complex128),
            auxiliary_ohm=machine.auxiliary_ohm * warm + 1j * auxiliary_x + setting.auxiliary_extra_ohm,
            turns_ratio=machine.turns_ratio,
            main_volt=unit,
            auxiliary_volt=unit,
            turn_share=setting.turn_share,
            loop_siemens=np.asarray(1.0 / loop_ohm, dtype=np.complex128),
        ),
        rotor=Rotor(
            magnetising_ohm=machine.magnetising_ohm * linked,
            core_ohm=machine.core_ohm * linked,
            rotor_ohm=machine.rotor_ohm * warm * setting.rotor_rise,
            rotor_reactance_ohm=main_x,
            backward_ratio=np.ones_like(linked),
        ),
        magnetising_ohm=machine.magnetising_ohm * linked,
        rated_emf_v=machine.voltage_v * np.sqrt(linked),
        backward_rise=(priors.BACKWARD_RESISTANCE - 1.0) / setting.rotor_rise,
        supply_v=setting.supply_v,
        source_ohm=setting.source_ohm,
    )


def run_at(connected: Connected, slip: Floats, emf_v: Floats) -> tuple[Currents, Floats]:
    """Currents of a motor in a setting at a slip, and the voltage left at its terminals.

    Parameters
    ----------
    connected : Connected
        From :func:`connect`.
    slip : ndarray
        Slip, of the same shape or to be spread over. [1]
    emf_v : ndarray
        Induced voltage that the iron is magnetised for. [V]

    Returns
    -------
    Currents
        At the terminal voltage that the source impedance leaves.
    ndarray
        That voltage. [V]

    """
    rotor = replace(
        connected.rotor,
        magnetising_ohm=connected.magnetising_ohm * saturation(emf_v / connected.rated_emf_v),
        backward_ratio=1.0 + connected.backward_rise * (1.0 - slip),
    )
    one_volt = solve_currents(connected.windings, rotor, slip)
    drop = 1.0 + connected.source_ohm * (one_volt.main + one_volt.auxiliary)
    volt = np.asarray(connected.supply_v / np.abs(drop))
    currents = Currents(
        main=one_volt.main * volt,
        auxiliary=one_volt.auxiliary * volt,
        forward_emf=one_volt.forward_emf * volt,
        backward_emf=one_volt.backward_emf * volt,
        torque_w=one_volt.torque_w * volt**2,
    )
    return currents, volt
