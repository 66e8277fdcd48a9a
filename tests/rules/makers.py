"""Sheets and rule folders for the tests of rules."""

from pathlib import Path

from calc.quantities import MEASURES
from calc.sheet import CaseSheet, Machine, Nameplate, Reading, Value
from calc.sheet_io import sheet_from_text
from calc.values import parse_value
from rules.knowledge import Knowledge
from rules.loading import build, read_texts

PLATE = {
    "power": "7.5 kW", "voltage": "400 V", "current": "14.9 A", "frequency": "50 Hz", "speed": "1455 rpm",
}  # fmt: skip


def value(text: str, dimension: str) -> Value:
    """Read one value as a sheet would."""
    return parse_value(text, dimension=dimension)


def reading(measure: str, state: str, *texts: str, **context: str) -> Reading:
    """Make a reading from typed texts; ``temperature`` is the one context with a unit."""
    dimension = MEASURES[measure].dimension
    values = tuple(value(text, dimension) for text in texts)
    temperature = value(context.pop("temperature"), "temperature") if "temperature" in context else None
    return Reading(measure=measure, state=state, values=values, temperature=temperature, **context)


def case(
    complaint: str, *readings: Reading, kind: str = "induction_3ph", plate: bool = True, **more
) -> CaseSheet:
    """Make a sheet; ``seen`` maps observations to answers, the rest are fields of the machine."""
    seen = more.pop("seen", {})
    told = more.pop("nameplate", PLATE if plate else {})
    dimensions = {"max_speed": "speed", "run_capacitor": "capacitance", "start_capacitor": "capacitance",
                  "field_voltage": "voltage", "field_current": "current", "service_factor": "ratio",
                  "power_factor": "ratio"}  # fmt: skip
    fields = {
        name: text if name in {"insulation_class", "connection"} else value(text, dimensions.get(name, name))
        for name, text in told.items()
    }
    machine = Machine(kind=kind, nameplate=Nameplate(**fields), **more)
    return CaseSheet(machine=machine, complaint=complaint, readings=readings, observations=seen)


def sheet(text: str) -> CaseSheet:
    """Read a sheet from YAML."""
    return sheet_from_text(text, file="test.yaml")


def insulation(text: str = "350 Mohm", **context: str) -> Reading:
    """Insulation to frame, isolated."""
    return reading("insulation_resistance", "isolated", text, **context)


def windings(*texts: str) -> Reading:
    """Winding resistance between terminals, isolated; balanced unless told otherwise."""
    return reading("winding_resistance", "isolated", *(texts or ("1.91 ohm", "1.92 ohm", "1.90 ohm")))


def shop(folder: Path, text: str, name: str = "own.yaml") -> Path:
    """Write a shop's rule file and return its folder."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / name).write_text(text, encoding="utf-8")
    return folder


def built(*folders: Path, thorough: bool = False):
    """Decode and check the shipped rules and some folders, without any cache."""
    texts, problems = read_texts(folders)
    knowledge, found = build(texts, extra_folders=folders, thorough=thorough)
    return knowledge, [*problems, *found]


def shipped() -> Knowledge:
    """Return the shipped rules, decoded once."""
    global _SHIPPED  # noqa: PLW0603
    if _SHIPPED is None:
        _SHIPPED = built()[0]
    return _SHIPPED


_SHIPPED: Knowledge | None = None
