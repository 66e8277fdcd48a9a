"""What is stamped on a plate, and still legible."""

from __future__ import annotations

from typing import Any

import numpy as np

from benchmarks.generator.rating import HP_W, Random, Rated, table


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
