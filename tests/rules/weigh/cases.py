"""Case sheets for the tests of the weighing: simulated motors, and sheets of any nonsense."""

import random
from functools import cache

import msgspec
import numpy as np

from calc.induction_3ph import fit
from calc.kinds import MODELS
from calc.quantities import KINDS, MEASURES, STATES, arity
from calc.sheet import CaseSheet, Reading
from calc.twin import Ask, attribute_rows
from rules.answer import Diagnosis
from rules.diagnosing import diagnose
from rules.weigh.predict import in_usual_unit
from tests.calc.induction_3ph.plates import FAN, LIFT, MILL, PUMP, machine
from tests.rules.makers import shipped, value

PLATES = (PUMP, FAN, MILL, LIFT)
USUAL = (
    ("supply_voltage", "loaded"), ("line_current", "loaded"), ("speed", "loaded"), ("input_power", "loaded"),
    ("line_current", "no_load"), ("winding_resistance", "isolated"), ("frame_temperature", "loaded"),
    ("supply_frequency", "loaded"),
)  # fmt: skip


def figures(number: float, digits: int = 4) -> str:
    return f"{number:.{digits}g}" if abs(number) < 1e6 else f"{number:.0f}"


def typed(measure: str, state: str, numbers, **context: str) -> Reading:
    """A reading in the usual unit, as somebody would type it."""
    entry = MEASURES[measure]
    texts = [f"{figures(n)} {entry.usual_unit}".strip() for n in numbers]
    values = tuple(value(text, entry.dimension) for text in texts)
    return Reading(measure=measure, state=state, values=values, **context)


def simulated(
    seed: int,
    effect: str = "none",
    *,
    place: int = 0,
    keys=USUAL,
    complaint: str = "routine_check",
    plate=None,
) -> CaseSheet:
    """A sheet of readings that the model gives for one machine drawn at random, with a meter's noise."""
    chance = np.random.default_rng(seed)
    motor = machine(**(PLATES[seed % len(PLATES)] if plate is None else plate))
    twin = fit(motor)
    modes = twin.modes(effect)
    z = 0.8 * chance.standard_normal((1, twin.dim))
    rows = attribute_rows([modes[place % len(modes)]], z[None], twin.defaults)
    asks = [Ask(m, s, temperature_c=20.0 if s == "isolated" else None) for m, s in keys]
    readings = []
    for ask, found in zip(asks, twin.predict(z, rows, asks), strict=True):
        noise = 0.001 if ask.measure in {"speed", "supply_frequency"} else 0.004
        numbers = [in_usual_unit(ask.measure, float(x)) for x in found[0]]
        numbers = [n * (1.0 + noise * chance.standard_normal()) for n in numbers]
        readings.append(typed(ask.measure, ask.state, numbers))
    return CaseSheet(machine=motor, complaint=complaint, readings=tuple(readings))


def answer(sheet: CaseSheet, **more) -> Diagnosis:
    return diagnose(sheet, knowledge=shipped(), **more)


def odds(sheet: CaseSheet) -> dict[str, float]:
    return {fault.id: fault.probability for fault in answer(sheet).faults}


# Sheets of any nonsense, as plain data.

TYPICAL = {
    "power": 5.0, "voltage": 400.0, "current": 15.0, "frequency": 50.0, "speed": 1450.0, "resistance": 2.0,
    "temperature": 60.0, "velocity": 2.0, "acceleration": 3.0, "capacitance": 40.0, "time": 5.0,
    "level": -45.0,
    "percent": 10.0, "ratio": 0.8, "length": 20.0, "force": 10.0, "rate": 4.0, "count": 10.0, "cable": 30.0,
    "apparent_power": 5.0,
}  # fmt: skip
ODD = (
    "open", ">5 Gohm", "<0.1 Mohm", None, "0", "0 A", "-5 V", "1e30 ohm", "nan", "inf", "abc", "12 V", "",
    "3..2 A",
    "161-193 uF", "9" * 400, True, [], {"a": 1}, "\x1b[31m", "1e-300 ohm", "4,5 A", "½ hp", 7, 7.5,
)  # fmt: skip
PLATE_DIMENSION = {
    "power": "power", "voltage": "voltage", "current": "current", "frequency": "frequency", "speed": "speed",
    "power_factor": "ratio", "efficiency": "percent", "service_factor": "ratio", "poles": "count",
    "locked_rotor_current_ratio": "count", "field_voltage": "voltage", "field_current": "current",
    "run_capacitor": "capacitance", "start_capacitor": "capacitance", "ambient": "temperature",
    "max_speed": "speed",
}  # fmt: skip
UNITS = {"power": "kW", "percent": "%", "capacitance": "uF", "temperature": "degC", "count": "", "ratio": ""}


@cache
def unit_of(dimension: str) -> str:
    usual = next((m.usual_unit for m in MEASURES.values() if m.dimension == dimension), "")
    return UNITS.get(dimension, usual)


def some_text(chance: random.Random, dimension: str, unit: str, wild: float) -> object:
    """One value as typed: mostly a number of the right unit, of any size, now and then something else."""
    if chance.random() < wild:
        return chance.choice(ODD)
    spread = 4.0 if chance.random() < 3 * wild else 0.25
    number = TYPICAL.get(dimension, 1.0) * chance.lognormvariate(0.0, spread)
    if dimension == "count":
        return f"{2 * max(round(number / 2.0), 1)}"
    return f"{number:.{chance.choice((2, 3, 4))}g} {unit}".strip()


def nonsense(seed: int, *, wild: float = 0.02, kinds=(*KINDS,)) -> dict:
    """A sheet that may be anything, the same for the same seed."""
    chance = random.Random(seed)
    kind = chance.choice((*kinds, *MODELS) if kinds == tuple(KINDS) else kinds)
    plate: dict[str, object] = {}
    for name, dimension in PLATE_DIMENSION.items():
        if chance.random() < 0.55:
            plate[name] = some_text(chance, dimension, unit_of(dimension), wild / 4)
    if chance.random() < 0.9:
        plate |= rated(chance, kind, plate)
    if chance.random() < 0.5:
        plate["connection"] = chance.choice(("star", "delta"))
    if chance.random() < 0.2:
        plate["code_letter"] = chance.choice("ABGHKVQ")
    sheet: dict[str, object] = {
        "format": 1,
        "machine": {
            "kind": kind,
            "nameplate": plate,
            "starter": chance.choice((None, "direct", "star_delta")),
            "supply": {"source": chance.choice((None, "mains", "inverter", "rectifier_3ph"))},
        },
        "complaint": chance.choice(sorted(shipped().complaints)),
        "observations": {
            name: chance.random() < 0.5
            for name in chance.sample(sorted(shipped().observations), chance.randrange(6))
        },
        "readings": some_readings(chance, kind, wild),
    }
    if chance.random() < 0.5:
        sheet["kit"] = chance.sample(sorted(kits()), chance.randrange(1, 6))
    sheet["machine"] = {k: v for k, v in sheet["machine"].items() if v is not None}
    return sheet


@cache
def kits() -> frozenset[str]:
    return frozenset(tool for rule in shipped().readings.values() for tool in rule.instruments)


def rated(chance: random.Random, kind: str, plate: dict) -> dict:
    """Fields that could stand together on one plate, for those that are there."""
    volts = chance.choice((24.0, 230.0, 400.0, 690.0))
    amps = 10 ** chance.uniform(0.0, 2.5)
    phases = 3.0**0.5 if kind in {"induction_3ph", "induction_wound_rotor"} else 1.0
    frequency = chance.choice((50.0, 60.0))
    poles = chance.choice((2, 4, 6, 8))
    told = {
        "voltage": f"{volts:g} V", "current": f"{amps:.3g} A", "frequency": f"{frequency:g} Hz",
        "power": f"{volts * amps * phases * chance.uniform(0.5, 0.85) / 1000.0:.3g} kW",
        "speed": f"{120.0 * frequency / poles * chance.uniform(0.93, 0.995):.0f} rpm", "poles": f"{poles}",
        "efficiency": f"{chance.uniform(65.0, 96.0):.1f} %",
        "power_factor": f"{chance.uniform(0.6, 0.93):.2f}",
        "service_factor": chance.choice(("1.0", "1.15")), "max_speed": "3600 rpm",
        "locked_rotor_current_ratio": f"{chance.uniform(4.0, 8.0):.1f}",
        "field_voltage": f"{volts:g} V", "field_current": f"{amps * 0.03:.2g} A",
    }  # fmt: skip
    return {name: text for name, text in told.items() if name in plate}


def some_readings(chance: random.Random, kind: str, wild: float) -> list[dict]:
    rules = [r for r in shipped().readings.values() if r.id in MEASURES and MEASURES[r.id].suits(kind)]
    found = []
    for _ in range(chance.randrange(9)):
        rule = chance.choice(rules)
        entry, count = MEASURES[rule.id], arity(rule.id, kind)
        state = chance.choice(sorted(rule.states) if chance.random() < 0.95 else sorted(STATES))
        first = some_text(chance, entry.dimension, entry.usual_unit, wild)
        others = [some_text(chance, entry.dimension, entry.usual_unit, wild) for _ in range(count)]
        values = [first if chance.random() < 0.4 else other for other in others]
        one: dict[str, object] = {
            "measure": rule.id,
            "state": state,
            "value": values if count > 1 else values[0],
        }
        if chance.random() < 0.2:
            one["temperature"] = some_text(chance, "temperature", "degC", wild)
        if state == "spun":
            one["speed"] = "1450 rpm"
        if chance.random() < 0.5:
            one["note"] = "checked"  # then an implausible value is taken as it is
        found.append(one)
    return found


def numbers_of(thing: object) -> list[float]:
    """Every number anywhere in an answer."""
    if isinstance(thing, bool) or thing is None or isinstance(thing, str):
        return []
    if isinstance(thing, int | float):
        return [float(thing)]
    if isinstance(thing, dict):
        return [n for part in thing.values() for n in numbers_of(part)]
    if isinstance(thing, list | tuple):
        return [n for part in thing for n in numbers_of(part)]
    return [n for name in thing.__struct_fields__ for n in numbers_of(getattr(thing, name))]


def apart(one, other):
    """The largest difference between two tables of odds."""
    return max(abs(one.get(k, 0.0) - other.get(k, 0.0)) for k in one.keys() | other.keys())


def with_readings(sheet, readings):
    """A sheet with other readings."""
    return msgspec.structs.replace(sheet, readings=tuple(readings))
