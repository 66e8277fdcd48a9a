"""Published motors: their exact circuits solved here, and the same circuits handed to Plateside's model.

The parameters of the four Krause machines (P. C. Krause, "Analysis of Electric Machinery") and of the
25 hp machine (S. J. Chapman, "Electric Machinery Fundamentals") are from memory; those of the 7.5 hp
machine (Fitzgerald, Kingsley and Umans, "Electric Machinery", example 6.2) were looked up in an open
solution notebook.
"""

import math
from dataclasses import dataclass, replace

import numpy as np

from calc.induction_3ph.effects import DEFAULTS
from calc.induction_3ph.equivalent import Circuit
from calc.induction_3ph.states import StateResult, Supply, solve

HP_W = 745.69987


@dataclass(frozen=True)
class Published:
    """A T circuit without core loss, ohms per star phase, reactances at rated frequency."""

    name: str
    voltage_v: float
    frequency_hz: float
    poles: int
    slip: float
    r1: float
    x1: float
    r2: float
    x2: float
    xm: float
    power_w: float = 0.0
    rotational_w: float = 0.0

    @property
    def phase_v(self) -> float:
        return self.voltage_v / math.sqrt(3.0)

    @property
    def synchronous_rad_s(self) -> float:
        return 4.0 * math.pi * self.frequency_hz / self.poles

    @property
    def base_ohm(self) -> float:
        return self.phase_v / self.current_a(self.slip)

    def phase_ohm(self, slip: float) -> complex:
        rotor = self.r2 / slip + 1j * self.x2
        return self.r1 + 1j * self.x1 + 1j * self.xm * rotor / (rotor + 1j * self.xm)

    def current_a(self, slip: float, *, share: float = 1.0) -> float:
        return abs(share * self.phase_v / self.phase_ohm(slip))

    def input_w(self, slip: float) -> float:
        z = self.phase_ohm(slip)
        return 3.0 * (self.phase_v**2 / z.conjugate()).real

    def gap_w(self, slip: float, *, share: float = 1.0) -> float:
        z = self.phase_ohm(slip)
        return 3.0 * (share * self.phase_v / abs(z)) ** 2 * (z.real - self.r1)

    def output_w(self, slip: float) -> float:
        return (1.0 - slip) * self.gap_w(slip) - self.rotational_w

    def induced_v(self, slip: float) -> float:
        """Voltage behind the stator's resistance and leakage, per star phase."""
        amps = self.phase_v / self.phase_ohm(slip)
        return abs(self.phase_v - amps * (self.r1 + 1j * self.x1))

    def slip_at(self, output_w: float) -> float:
        """Slip on the stable side at which the shaft gives this power, by bisection."""
        low, high = 1e-7, 0.08
        for _ in range(80):
            middle = 0.5 * (low + high)
            low, high = (middle, high) if self.output_w(middle) < output_w else (low, middle)
        return 0.5 * (low + high)


KRAUSE_3 = Published("Krause 3 hp", 220.0, 60.0, 4, 0.05, 0.435, 0.754, 0.816, 0.754, 26.13, power_w=3 * HP_W)
KRAUSE_50 = Published(
    "Krause 50 hp", 460.0, 60.0, 4, 0.053, 0.087, 0.302, 0.228, 0.302, 13.08, power_w=50 * HP_W
)
KRAUSE_500 = Published(
    "Krause 500 hp", 2300.0, 60.0, 4, 0.015, 0.262, 1.206, 0.187, 1.206, 54.02, power_w=500 * HP_W
)
KRAUSE_2250 = Published(
    "Krause 2250 hp", 2300.0, 60.0, 4, 0.0078, 0.029, 0.226, 0.022, 0.226, 13.04, power_w=2250 * HP_W
)
CHAPMAN_25 = Published(
    "Chapman 25 hp", 460.0, 60.0, 4, 0.04, 0.641, 1.106, 0.332, 0.464, 26.3,
    power_w=25 * HP_W, rotational_w=1100.0,
)  # fmt: skip
FITZGERALD_7 = Published(
    "Fitzgerald 7.5 hp", 220.0, 60.0, 6, 0.02, 0.294, 0.503, 0.144, 0.209, 13.25,
    power_w=7.5 * HP_W, rotational_w=403.0,
)  # fmt: skip
MACHINES = (KRAUSE_3, KRAUSE_50, KRAUSE_500, KRAUSE_2250, CHAPMAN_25, FITZGERALD_7)


def one(number: complex) -> np.ndarray:
    """A row of one number."""
    return np.array([number], dtype=np.complex128 if isinstance(number, complex) else np.float64)


def product_circuit(machine: Published, saturation: float = 0.0) -> Circuit:
    """The same circuit as Plateside's model holds it, per unit of rated voltage and current.

    ``saturation`` is the share of the magnetising current that grows with the sixth power of the
    flux; the published reactance is then that at the flux of rated load.
    """
    base = machine.base_ohm
    nothing = one(0.0)
    return Circuit(
        **{name: one(getattr(machine, name) / base) for name in ("r1", "x1", "r2", "x2", "xm")},
        gc=nothing,
        saturation=one(saturation),
        r2_locked=one(machine.r2 / base),
        x_locked=one((machine.x1 + machine.x2) / base),
        p_out=one(1.0),
        p_friction=nothing,
        p_stray=nothing,
        losses=one(1.0),
        slip=one(machine.slip),
        flux=one(machine.induced_v(machine.slip) / machine.phase_v if saturation else 1.0),
        rise_k=one(60.0),
    )


@dataclass(frozen=True)
class Solved:
    """What Plateside's model says of a published machine, in volts, amps and watts."""

    current_a: np.ndarray
    voltage_v: np.ndarray
    input_w: float
    copper_w: float
    slip: float
    stalls: bool
    power_factor: float

    @property
    def gap_w(self) -> float:
        return self.input_w - self.copper_w


def run(
    machine: Published,
    *,
    gap_w: float = 0.0,
    standing: bool = False,
    share: float = 1.0,
    negative: complex = 0j,
    frequency: float = 1.0,
    saturation: float = 0.0,
    **attributes: float,
) -> Solved:
    """Solve a published machine with ``calc.induction_3ph.states.solve`` on a stiff supply.

    ``share`` is the positive-sequence voltage over rated, ``negative`` the negative-sequence one,
    ``frequency`` over rated; attributes are those of the model's fault effects. The torque is given
    as the air-gap power that it takes at rated frequency.
    """
    rows = {name: one(float(attributes.get(name, number))) for name, number in DEFAULTS.items()}
    unknown = set(attributes) - set(DEFAULTS)
    assert not unknown, unknown
    rows["earth_pu"] = rows["earth_ohm"]
    circuit = product_circuit(machine, saturation)
    power_base = 3.0 * machine.phase_v**2 / machine.base_ohm
    feed = Supply(
        positive=one(share), negative=one(complex(negative)), frequency=one(frequency), regulation=one(0.0)
    )
    state: StateResult = solve(
        circuit,
        rows,
        feed,
        one(max(gap_w, 1e-6 * power_base) / power_base),
        standing=one(float(standing)),
        r1=circuit.r1,
    )
    amps = machine.phase_v / machine.base_ohm
    return Solved(
        current_a=state.current[0] * amps,
        voltage_v=state.voltage[0] * machine.voltage_v,
        input_w=float(state.power[0]) * power_base,
        copper_w=float(state.copper[0]) * power_base,
        slip=float(state.slip[0]),
        stalls=bool(state.stalled[0] > 0.5),
        power_factor=float(state.power[0] / state.apparent[0]),
    )


def with_slip(machine: Published, slip: float) -> Published:
    """The same machine, taken as rated at another slip."""
    return replace(machine, slip=slip)
