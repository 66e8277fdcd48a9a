"""Machines as they are designed and built: a plate, the circuit behind it, and the one that left the factory."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import yaml
from scipy.optimize import least_squares

from benchmarks.generator.circuit import MOTOR, Winding, balanced, joined_as_rated, solve

Random = np.random.Generator
HP_W = 745.7


@dataclass(frozen=True)
class Rated:
    """What the designer promises."""

    power_w: float
    power_text: str
    volts: float
    hertz: float
    poles: int
    efficiency: float
    power_factor: float
    slip: float
    locked_ratio: float
    is_delta: bool
    insulation: str
    rise_k: float
    nominal_v: float
    in_hp: bool

    @property
    def current_a(self) -> float:
        """Rated line current."""
        return self.power_w / (np.sqrt(3) * self.volts * self.efficiency * self.power_factor)

    @property
    def sync_rpm(self) -> float:
        """Synchronous speed."""
        return 120.0 * self.hertz / self.poles

    @property
    def rpm(self) -> float:
        """Rated speed."""
        return self.sync_rpm * (1 - self.slip)

    @property
    def torque_nm(self) -> float:
        """Rated torque on the shaft."""
        return self.power_w / (self.rpm * np.pi / 30)

    @property
    def losses_w(self) -> float:
        """All losses at rated load."""
        return self.power_w * (1 / self.efficiency - 1)


@dataclass(frozen=True)
class Motor:
    """One machine that was built, with the plate it got."""

    rated: Rated
    winding: Winding
    friction_w: float
    stray_w: float
    inertia_kgm2: float
    bars: int
    plate: dict[str, Any]
    vibration_mms: float

    def drag_nm(self, rpm: float) -> float:
        """Torque lost in the machine: friction and windage with the speed, stray loss as rated."""
        speed = max(rpm, 0.0) / self.rated.rpm
        rated_w = self.rated.rpm * np.pi / 30
        return (self.friction_w * (0.3 + 0.7 * speed**2) + 0.6 * self.stray_w * min(speed, 1.0)) / rated_w


@cache
def table() -> dict[str, Any]:
    """Return the design tables."""
    text = (Path(__file__).parent / "design.yaml").read_text(encoding="utf-8")
    return dict(yaml.safe_load(text))


def draw_motor(random: Random) -> Motor:
    """Draw a rating, design it, build it with the scatter of manufacture, and stamp its plate."""
    for _ in range(30):
        rated = draw_rated(random)
        designed = design(rated, random)
        if designed is not None:
            winding, friction, stray = designed
            return _built(rated, winding, friction, stray, random)
    raise RuntimeError("no machine could be designed in 30 tries")


def draw_rated(random: Random) -> Rated:
    """Draw what is promised, around the tables."""
    t = table()
    grid = t["grids"][random.choice(len(t["grids"]), p=_shares(t["grids"]))]
    volts, hertz = float(random.choice(grid["plates"])), float(grid["hertz"])
    nominal = float(random.choice(grid["nominal"][volts]))
    number = float(random.choice(t["ratings_hp"] if grid["hp"] else t["ratings_kw"]))
    high = t["high_voltage"]
    if random.random() < high["share"]:
        number, volts = (
            float(random.choice(high["ratings_kw"])),
            float(random.choice(high["plates"][int(hertz)])),
        )
        nominal, grid = volts, {**grid, "hp": False, "delta_from_kw": 1e9}
    kw = number * HP_W / 1000 if grid["hp"] else number
    poles = int(random.choice(list(t["poles"]), p=_shares(list(t["poles"].values()))))
    by = t["poles"][poles]
    quality = random.uniform(0, 1)
    efficiency = (1 - quality) * _at("standard", kw) / 100 + quality * _at("premium", kw) / 100
    losses = (1 / efficiency - 1) * by["losses"] * np.exp(random.normal(0, 0.05))
    insulation = str(random.choice(list(t["insulation_class"]), p=list(t["insulation_class"].values())))
    return Rated(
        power_w=kw * 1000,
        power_text=f"{number:g} {'hp' if grid['hp'] else 'kW'}",
        volts=volts,
        hertz=hertz,
        poles=poles,
        efficiency=1 / (1 + losses),
        power_factor=float(
            np.clip(_at("power_factor", kw) + by["power_factor"] + random.normal(0, 0.02), 0.45, 0.93)
        ),
        slip=_at("slip", kw) * by["slip"] * (1.15 - 0.3 * quality) * np.exp(random.normal(0, 0.15)),
        locked_ratio=float(
            np.clip((_at("locked_ratio", kw) + by["locked_ratio"]) * np.exp(random.normal(0, 0.10)), 2.8, 9.0)
        ),
        is_delta=bool(kw > grid["delta_from_kw"] * 1.01) ^ bool(random.random() < 0.08),
        insulation=insulation,
        rise_k=float(t["rise_k"][insulation] * np.exp(random.normal(0, 0.12))),
        nominal_v=nominal,
        in_hp=bool(grid["hp"]),
    )


def design(rated: Rated, random: Random) -> tuple[Winding, float, float] | None:
    """Find the circuit that keeps the promise; None where none does."""
    kw = rated.power_w / 1000
    friction = rated.losses_w * _at("friction_share", kw) * {2: 1.5, 4: 1.0, 6: 0.8, 8: 0.7}[rated.poles]
    stray = rated.losses_w * _at("stray_share", kw)
    stator_w = rated.losses_w * _at("stator_share", kw) * np.exp(random.normal(0, 0.08))
    rotor_w = rated.slip / (1 - rated.slip) * (rated.power_w + friction + 0.6 * stray)
    if stator_w + rotor_w + friction + stray > 0.93 * rated.losses_w:
        stator_w = 0.93 * rated.losses_w - rotor_w - friction - stray
    if stator_w < 0.15 * rated.losses_w:
        return None
    volts = rated.volts if rated.is_delta else rated.volts / np.sqrt(3)
    amps = rated.current_a / np.sqrt(3) if rated.is_delta else rated.current_a
    ohm = stator_w / (3 * amps**2)
    base = volts / amps
    ratio = _at("cage_ratio", kw) * np.exp(random.normal(0, 0.15))
    split = random.uniform(0.40, 0.60)
    curve = float(random.uniform(0.7, 1.35))

    def winding(x: np.ndarray) -> Winding:
        leakage, magnetising, iron, rotor = base * np.exp(x)
        return Winding(
            voltage_v=volts,
            current_a=amps,
            frequency_hz=rated.hertz,
            poles=rated.poles,
            stator_ohm=ohm,
            stator_leakage_ohm=split * leakage,
            magnetising_ohm=magnetising,
            iron_ohm=iron,
            rotor_leakage_ohm=0.55 * (1 - split) * leakage,
            outer_ohm=rotor * (1 + ratio) / 1.0,
            inner_ohm=rotor * (1 + ratio) / ratio,
            inner_leakage_ohm=1.1 * (1 - split) * leakage,
            curve=curve,
            is_delta=rated.is_delta,
        )

    def misses(x: np.ndarray) -> np.ndarray:
        machine = winding(x)
        flow = solve(
            machine,
            balanced(machine, rated.volts, rated.hertz),
            joined_as_rated(machine),
            np.array([rated.slip, 1.0]),
        )
        line = np.abs(flow.line_a[:, 0])
        power = flow.power_w(MOTOR)[0]
        gap = flow.forward_w[0] / (rated.power_w + friction + 0.6 * stray + rotor_w)
        factor = power / (np.sqrt(3) * rated.volts * line[0])
        return np.array(
            [
                np.log(line[0] / rated.current_a),
                2 * (factor - rated.power_factor),
                np.log(gap),
                np.log(line[1] / rated.current_a / rated.locked_ratio),
            ]
        )

    start = np.log([0.75 / rated.locked_ratio * 1.25, 2.2, 40.0, rated.slip * 0.9])
    found = least_squares(
        misses, start, bounds=(start - 2.5, start + 2.5), diff_step=1e-3, xtol=1e-6, max_nfev=60
    )
    return (winding(found.x), friction, stray) if np.max(np.abs(found.fun)) < 0.02 else None


def _built(rated: Rated, designed: Winding, friction: float, stray: float, random: Random) -> Motor:
    """Scatter the circuit as manufacture, and rewinding in one of ten, scatter it; stamp the designed figures."""
    rewound = random.random() < 0.10

    def near(sd: float) -> float:
        return float(np.exp(np.clip(random.normal(0, sd), -2.5 * sd, 2.5 * sd)))

    winding = replace(
        designed,
        stator_ohm=designed.stator_ohm * near(0.10 if rewound else 0.035),
        stator_leakage_ohm=designed.stator_leakage_ohm * near(0.06),
        magnetising_ohm=designed.magnetising_ohm * near(0.12 if rewound else 0.08),
        iron_ohm=designed.iron_ohm * near(0.20 if rewound else 0.12),
        rotor_leakage_ohm=designed.rotor_leakage_ohm * near(0.06),
        inner_ohm=designed.inner_ohm * near(0.06),
        outer_ohm=designed.outer_ohm * near(0.08),
    )
    kw = rated.power_w / 1000
    inertia = 0.0035 * kw**1.25 * (rated.poles / 4) ** 1.8 * near(0.2)
    return Motor(
        rated=rated,
        winding=winding,
        friction_w=friction * near(0.15),
        stray_w=stray * near(0.2),
        inertia_kgm2=inertia,
        bars=int(random.choice([22, 26, 28, 34, 40, 44, 52, 58])),
        plate=stamp(rated, random),
        vibration_mms=0.75 * kw**0.13 * near(0.35),
    )


def stamp(rated: Rated, random: Random) -> dict[str, Any]:
    """Return the plate as text, with the fields that are still legible."""
    shown = {name for name, chance in table()["plate_field"].items() if random.random() < chance}
    amps = rated.current_a
    plate: dict[str, Any] = {
        "power": rated.power_text,
        "voltage": f"{rated.volts:g} V",
        "current": f"{amps:.{max(0, 2 - int(np.floor(np.log10(amps))))}f} A",
        "speed": f"{_stamped_speed(rated)} rpm",
    }
    optional: dict[str, Any] = {
        "frequency": f"{rated.hertz:g} Hz",
        "power_factor": round(rated.power_factor, 2),
        "efficiency": f"{100 * rated.efficiency:.1f} %",
        "connection": "delta" if rated.is_delta else "star",
        "insulation_class": rated.insulation,
        "ambient": "40 degC",
    }
    if rated.in_hp:
        optional |= {
            "service_factor": float(random.choice([1.0, 1.15])),
            "code_letter": _letter(rated),
            "design_letter": "B",
        }
    else:
        optional |= {"locked_rotor_current_ratio": round(rated.locked_ratio, 1)}
    return plate | {name: value for name, value in optional.items() if name in shown}


def _stamped_speed(rated: Rated) -> int:
    """Speeds are stamped in steps of 5, of 1 where slip is small; never the synchronous speed."""
    step = 1 if rated.slip * rated.sync_rpm < 25 else 5
    return min(round(rated.rpm / step) * step, round(rated.sync_rpm) - step)


def _letter(rated: Rated) -> str:
    """Code letter by locked-rotor kVA per hp (NEMA MG 1-10.37.2)."""
    kva = np.sqrt(3) * rated.volts * rated.current_a * rated.locked_ratio / 1000 / (rated.power_w / HP_W)
    tops = [
        3.15,
        3.55,
        4.0,
        4.5,
        5.0,
        5.6,
        6.3,
        7.1,
        8.0,
        9.0,
        10.0,
        11.2,
        12.5,
        14.0,
        16.0,
        18.0,
        20.0,
        22.4,
    ]
    return "ABCDEFGHJKLMNPRSTUV"[int(np.searchsorted(tops, kva, side="right"))]


def _at(column: str, kw: float) -> float:
    """Read a column of the table at a size, straight between points in the logarithm of size."""
    t = table()
    return float(np.interp(np.log(kw), np.log(t["size_kw"]), t[column]))


def _shares(entries: list[dict[str, Any]]) -> np.ndarray:
    shares = np.array([entry["share"] for entry in entries], dtype=float)
    return np.asarray(shares / shares.sum())
