"""What a designer promises: ratings drawn around typical tables."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import yaml

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
        return self.power_w / (math.sqrt(3) * self.volts * self.efficiency * self.power_factor)

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


@cache
def table() -> dict[str, Any]:
    """Return the design tables."""
    text = (Path(__file__).parent / "design.yaml").read_text(encoding="utf-8")
    return dict(yaml.safe_load(text))


@dataclass(frozen=True)
class Grid:
    """What a machine is bought for, and the site's name for its own voltage."""

    number: float
    in_hp: bool
    volts: float
    nominal_v: float
    hertz: float
    delta_from_kw: float

    @property
    def kw(self) -> float:
        """Rated output."""
        return self.number * HP_W / 1000 if self.in_hp else self.number


def draw_grid(random: Random) -> Grid:
    """Draw a grid, a size and a voltage."""
    t, high = table(), table()["high_voltage"]
    grid = t["grids"][random.choice(len(t["grids"]), p=_shares(t["grids"]))]
    hertz = float(grid["hertz"])
    if random.random() < high["share"]:
        number, volts = random.choice(high["ratings_kw"]), float(random.choice(high["plates"][int(hertz)]))
        return Grid(float(number), False, volts, volts, hertz, float("inf"))
    volts = float(random.choice(grid["plates"]))
    nominal = float(random.choice(grid["nominal"][volts]))
    number = random.choice(t["ratings_hp"] if grid["hp"] else t["ratings_kw"])
    return Grid(float(number), bool(grid["hp"]), volts, nominal, hertz, 1.01 * grid["delta_from_kw"])


def draw_rated(random: Random) -> Rated:
    """Draw what is promised, around the tables."""
    t, grid = table(), draw_grid(random)
    poles = int(random.choice(list(t["poles"]), p=_shares(list(t["poles"].values()))))
    by, kw, quality = t["poles"][poles], grid.kw, random.uniform(0, 1)
    efficiency = (1 - quality) * at_size("standard", kw) / 100 + quality * at_size("premium", kw) / 100
    losses = (1 / efficiency - 1) * by["losses"] * near(0.05, random)
    factor = at_size("power_factor", kw) + by["power_factor"] + random.normal(0, 0.02)
    ratio = (at_size("locked_ratio", kw) + by["locked_ratio"]) * near(0.10, random)
    insulation = str(random.choice(list(t["insulation_class"]), p=list(t["insulation_class"].values())))
    return Rated(
        power_w=kw * 1000,
        power_text=f"{grid.number:g} {'hp' if grid.in_hp else 'kW'}",
        volts=grid.volts,
        hertz=grid.hertz,
        poles=poles,
        efficiency=1 / (1 + losses),
        power_factor=min(max(factor, 0.45), 0.93),
        slip=at_size("slip", kw) * by["slip"] * (1.15 - 0.3 * quality) * near(0.15, random),
        locked_ratio=min(max(ratio, 2.8), 9.0),
        is_delta=(kw > grid.delta_from_kw) is not (random.random() < 0.08),
        insulation=insulation,
        rise_k=t["rise_k"][insulation] * near(0.12, random),
        nominal_v=grid.nominal_v,
        in_hp=grid.in_hp,
    )


def near(sd: float, random: Random) -> float:
    """Draw a factor near 1, within two and a half deviations."""
    return math.exp(min(max(random.normal(0, sd), -2.5 * sd), 2.5 * sd))


def at_size(column: str, kw: float) -> float:
    """Read a column of the table at a size, straight between points in the logarithm of size."""
    t = table()
    return float(np.interp(np.log(kw), np.log(t["size_kw"]), t[column]))


def _shares(entries: list[dict[str, Any]]) -> np.ndarray:
    shares = np.array([entry["share"] for entry in entries], dtype=float)
    return np.asarray(shares / shares.sum())
