"""The operating point of the DC model against differential equations left to settle."""

from __future__ import annotations

import numpy as np
import pytest

from calc.dc.circuit import Armature, Magnet, operate
from tests.published.sources import published

integrate = pytest.importorskip("scipy.integrate")

MACHINES = {
    "shunt": {"series": 0.0, "shunt": 1.0},
    "cumulative": {"series": 0.15, "shunt": 0.85},
    "series": {"series": 1.0, "shunt": 0.0},
}
RESISTANCE, ROTATING = 0.06, 0.04


def one(number: float) -> np.ndarray:
    return np.array([float(number)])


def magnet(kind: str, bend: float) -> Magnet:
    rest = {"residual": 0.02, "factor": 1.0, "reaction": 0.03, "lame": 0.0, "lame_share": 1.0, "bend": bend}
    return Magnet(**{k: one(v) for k, v in (MACHINES[kind] | rest).items()})


@published(
    "own differential equations",
    "L di/dt and J dw/dt, integrated with scipy",
    known="another road",
    checks="calc.dc.circuit.operate",
    says="shunt, compound and series with saturation settle at the operating point",
)
@pytest.mark.parametrize("kind", MACHINES)
@pytest.mark.parametrize("torque", [0.3, 0.9])
def test_the_operating_point_is_where_the_motion_settles(kind: str, torque: float) -> None:
    """L di/dt = v - i r - b - k flux w and J dw/dt = flux i - load, per unit."""
    field = magnet(kind, 1.1)
    armature = Armature(one(1.0), one(RESISTANCE), one(0.008), one(0.93))

    def slope(_: float, state: np.ndarray) -> list[float]:
        current, speed = state
        flux = float(field.flux(one(max(current, 0.0)))[0])
        load = torque + ROTATING * (0.4 + 0.6 * speed)
        return [
            (1.0 - current * RESISTANCE - 0.008 - 0.93 * flux * speed) / 0.02,
            (flux * current - load) / 0.4,
        ]

    end = integrate.solve_ivp(slope, (0, 60), [1.5, 0.5], rtol=1e-8, atol=1e-9, method="LSODA").y[:, -1]
    point = operate(armature, field, one(torque), one(ROTATING), one(0.0))
    assert point.current[0] == pytest.approx(end[0], rel=2e-3)
    assert point.speed[0] == pytest.approx(end[1], rel=2e-3)


@published(
    "gym-electric-motor",
    "electrical equations at a held speed",
    known="another road",
    checks="calc.dc.circuit.operate",
    says="shunt, series, magnet and separately excited: current and torque",
)
@pytest.mark.parametrize("kind", ["shunt", "series", "permanent", "separate"])
def test_the_operating_point_agrees_with_an_independent_motor_library(kind: str) -> None:
    """Electrical equations of gym-electric-motor (no saturation there), run to standstill at our speed."""
    motors = pytest.importorskip("gym_electric_motor.physical_systems.electric_motors")
    volts, ampere, speed_rad = 240.0, 40.0, 120.0
    resistance = 0.4
    permanent = kind == "permanent"
    rest = {"residual": 0.0, "factor": 1.0, "reaction": 0.0, "lame": 0.0, "lame_share": 1.0, "bend": 1e-4}
    share = {"series": 1.0, "shunt": 0.0} if kind == "series" else {"series": 0.0, "shunt": 1.0}
    field = Magnet(**{k: one(v) for k, v in (share | rest).items()}, permanent=permanent)
    emf = 1.0 - resistance * ampere / volts
    point = operate(
        Armature(one(1.0), one(resistance * ampere / volts), one(0.0), one(emf)),
        field,
        one(0.7),
        one(0.0),
        one(0.0),
    )
    psi = emf * volts / speed_rad
    omega = float(point.speed[0]) * speed_rad
    base = {"r_a": resistance, "l_a": 1e-3, "j_rotor": 0.5}
    wound = base | {"r_e": 120.0, "l_e": 5.0, "l_e_prime": psi / 2.0}
    if kind == "permanent":
        motor, supply, start = (
            motors.DcPermanentlyExcitedMotor(motor_parameter=base | {"psi_e": psi}),
            [volts],
            [0.0],
        )
    elif kind == "series":
        turned = base | {"r_e": 0.0, "l_e": 1e-3, "l_e_prime": psi / ampere}
        motor, supply, start = motors.DcSeriesMotor(motor_parameter=turned), [volts], [0.0]
    elif kind == "shunt":
        motor, supply, start = motors.DcShuntMotor(motor_parameter=wound), [volts], [0.0, 0.0]
    else:
        motor, supply, start = (
            motors.DcExternallyExcitedMotor(motor_parameter=wound),
            [volts, volts],
            [0.0, 0.0],
        )
    end = integrate.solve_ivp(
        lambda t, y: motor.electrical_ode(y, supply, omega),
        (0, 3),
        start,
        rtol=1e-9,
        atol=1e-9,
        method="LSODA",
    ).y[:, -1]
    assert end[0] == pytest.approx(point.current[0] * ampere, rel=1e-3)
    assert motor.torque(end) == pytest.approx(0.7 * psi * ampere, rel=1e-3)
