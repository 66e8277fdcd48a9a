"""The nameplate as it is typed: the plate's own words, the usual units, and the machine that comes out.

No terminal here: the nameplate page and the plain dialogue can both stand on it.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import TYPE_CHECKING, Any, Final, NamedTuple

from calc import vocabulary as words
from calc.quantities import DC_KINDS
from calc.values import ValueTextError, parse_value

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calc.sheet import Machine

Raw = dict[str, Any]
YES_NO: Final = {"yes": "yes", "no": "no"}
_SIGNS: Final = {
    "y": "star", "d": "delta", "yy": "double_star", "dd": "double_delta", "wye": "star", "δ": "delta",
}  # fmt: skip
"""How plates write a connection."""
_USUAL: Final = {"pump": "pump_centrifugal"}
"""What is meant by a load that is named in part only."""


class PlateLine(NamedTuple):
    """One line: the field of the sheet, the plate's word, its dimension and usual unit, or its choices."""

    field: str
    word: str
    hint: str
    dimension: str = ""
    unit: str = ""
    choices: Mapping[str, str] = MappingProxyType({})
    place: str = "nameplate"
    """Where it goes: ``nameplate``, ``supply``, ``load`` or ``machine``."""


def _p(field: str, word: str, hint: str, dimension: str = "", unit: str = "") -> PlateLine:
    return PlateLine(field, word, hint, dimension, unit)


_POWER: Final = _p("power", "HP, kW", "rated output, with its unit: 7.5 kW or 10 hp", "power")
_VOLTS: Final = _p("voltage", "VOLTS", "rated volts; two as 230/460", "voltage", "V")
_AMPS: Final = _p("current", "AMPS", "rated amps, FLA; two as 28/14", "current", "A")
_HZ: Final = _p("frequency", "HZ", "rated frequency", "frequency", "Hz")
_RPM: Final = _p("speed", "RPM", "rated speed at full load", "speed", "rpm")
_PF: Final = _p("power_factor", "PF", "power factor, cos phi", "ratio")
_EFF: Final = _p("efficiency", "EFF", "efficiency at full load, %", "ratio", "%")
_SF: Final = _p("service_factor", "SF", "service factor", "ratio")
_CODE: Final = _p("code_letter", "CODE", "code letter: locked-rotor kVA per hp")
_CLASS: Final = _p("insulation_class", "INS CL", "insulation class: A, E, B, F, H")
_AMBIENT: Final = _p("ambient", "AMB", "rated ambient temperature", "temperature", "degC")
_DUTY: Final = _p("duty", "DUTY", "S1, S3 ...")
_CONNECTION: Final = PlateLine(
    "connection", "CONN", "star or delta; two as delta/star", choices=words.CONNECTIONS
)
_IN_USE: Final = _p("in_use", "IN USE", "rating in use, where the plate has two: 400 V", "voltage", "V")

_THREE: Final = (
    _POWER, _VOLTS, _AMPS, _HZ, _RPM, _PF, _EFF, _CONNECTION, _IN_USE, _SF, _CODE,
    _p("locked_rotor_current_ratio", "IA/IN", "locked-rotor current over rated current", "ratio"),
    _p("design_letter", "DESIGN", "design letter: N, H, A, B, C, D"),
    _CLASS, _AMBIENT, _DUTY,
    _p("poles", "POLES", "number of poles", "count"),
)  # fmt: skip
_ONE: Final = (
    _POWER, _VOLTS, _AMPS, _HZ, _RPM, _PF, _EFF, _IN_USE, _SF, _CODE,
    _p("run_capacitor", "CAP RUN", "run capacitor", "capacitance", "uF"),
    _p("start_capacitor", "CAP ST", "start capacitor; a range as 161-193 uF", "capacitance", "uF"),
    _CLASS, _AMBIENT, _DUTY,
    _p("poles", "POLES", "number of poles", "count"),
)  # fmt: skip
_DC: Final = (
    _POWER, _p("voltage", "ARM V", "rated armature volts", "voltage", "V"),
    _p("current", "AMPS", "rated amps", "current", "A"),
    PlateLine("current_is", "AMPS IS", "armature or line, where the plate says", choices=words.CURRENT_IS),
    _RPM,
    _p("field_voltage", "FIELD V", "rated field volts", "voltage", "V"),
    _p("field_current", "FIELD A", "rated field amps", "current", "A"),
    _EFF, _p("max_speed", "MAX RPM", "highest speed", "speed", "rpm"),
    _p("power_supply_code", "PS CODE", "power supply code: A, C, D, E, K"),
    _CLASS, _AMBIENT, _DUTY,
)  # fmt: skip
_STANDS: Final = (
    PlateLine("nominal_voltage", "SITE V", "nominal volts here", "voltage", "V", place="supply"),
    PlateLine("nominal_frequency", "SITE HZ", "nominal frequency here", "frequency", "Hz", place="supply"),
    PlateLine("source", "FED BY", "mains, inverter, generator ...", choices=words.SOURCES, place="supply"),
    PlateLine("cable_length", "CABLE", "length of the motor cable, m or ft", "cable", "m", place="supply"),
    PlateLine("starter", "STARTER", "direct, star delta ...", choices=words.STARTERS, place="machine"),
    PlateLine("type", "LOAD", "pump, fan, conveyor, hoist ...", choices=words.LOADS, place="load"),
    PlateLine("mount", "MOUNT", "rigid or flexible", choices=words.MOUNTS, place="machine"),
    PlateLine("hazardous_area", "EX AREA", "explosive air: yes or no", choices=YES_NO, place="machine"),
    PlateLine("brake", "BRAKE", "yes or no", choices=YES_NO, place="machine"),
    PlateLine(
        "thermal_protector", "TH PROT", "none, manual or automatic reset", choices=words.PROTECTORS,
        place="machine",
    ),
)  # fmt: skip


_DC_HINTS: Final = {
    "source": "three-phase rectifier, DC bus, battery, mains ...",
    "starter": "armature resistance, direct ...",
}


def plate_lines(kind: str) -> tuple[PlateLine, ...]:
    """Return the lines for a kind of machine: the plate, then how it stands."""
    if kind in DC_KINDS or kind == "dc_generator":
        plate: tuple[PlateLine, ...] = _DC
        if kind in {"dc_series", "dc_permanent_magnet"}:
            plate = tuple(line for line in plate if line.field not in {"field_voltage", "field_current"})
        stands = (line for line in _STANDS if line.field != "nominal_frequency")
        return (*plate, *(line._replace(hint=_DC_HINTS.get(line.field, line.hint)) for line in stands))
    return (*(_ONE if kind == "induction_1ph" else _THREE), *_STANDS)


def hear(line: PlateLine, text: str) -> tuple[str, bool]:
    """Return what is understood of a line, in words, and whether it can be kept."""
    try:
        kept = keep(line, text)
    except ValueTextError as error:
        return error.allowed, False
    if usual := usual_choice(line, text):
        others = [name for name in line.choices if name.startswith(_id(text)) and name != usual]
        said = f"{line.choices[usual]}; else write {' or '.join(others)}"
        return said.replace("_", " "), True
    return (" / ".join(kept) if isinstance(kept, list) else kept).replace("_", " "), True


def keep(line: PlateLine, text: str) -> str | list[str]:
    """Return what the sheet holds for a line: text with its unit, a choice, or a list for two ratings.

    Raises ValueTextError where the text is nothing of the kind.
    """
    text = text.strip()
    parts = [part.strip() for part in text.split("/")]
    if len(parts) > 1 and line.field in {"voltage", "current", "connection"}:
        unit = parts[-1].lstrip("0123456789., ") if line.dimension else ""
        return [_one(line, part if not unit or unit in part else f"{part} {unit}") for part in parts]
    return _one(line, text)


def _one(line: PlateLine, text: str) -> str:
    """Return one value or choice as the sheet holds it."""
    if line.choices:
        return _choice(line, text)
    if not line.dimension:
        return text.upper()
    shown = f"{text} {line.unit}" if line.unit and text[-1:].isdigit() else text
    if line.field == "efficiency" and shown.endswith("%") and _share(text):
        shown = text  # 0.887 is a share, not a percentage
    value = parse_value(shown, dimension=line.dimension)
    return value.text


def _share(text: str) -> bool:
    """Whether a bare number is a share of one."""
    try:
        return float(text.replace(",", ".")) <= 1.0
    except ValueError:
        return False


def _choice(line: PlateLine, text: str) -> str:
    """Return the choice that a text means: its sign, or its beginning."""
    typed = _id(text)
    if line.choices is words.CONNECTIONS and typed in _SIGNS:
        return _SIGNS[typed]
    if typed in line.choices:
        return typed
    if usual := usual_choice(line, text):
        return usual
    named = [choice for choice, name in line.choices.items() if _id(name).startswith(typed)]
    found = [choice for choice in line.choices if choice.startswith(typed)] or named
    if len(found) != 1:
        raise ValueTextError(
            text, "one of: " + ", ".join(choice.replace("_", " ") for choice in line.choices)
        )
    return found[0]


def usual_choice(line: PlateLine, text: str) -> str:
    """Return the choice that is meant as a rule by a load named in part only, or nothing."""
    return _USUAL.get(_id(text), "") if line.choices is words.LOADS else ""


def _id(text: str) -> str:
    """Return words as a choice spells them."""
    return text.strip().lower().replace("-", "_").replace(" ", "_")


def machine_of(kind: str, tag: str, typed: dict[str, str]) -> Raw:
    """Return the machine as a case sheet holds it, from the lines as typed; blank ones are left out."""
    machine: Raw = {"kind": kind}
    if tag:
        machine["tag"] = tag
    for line in plate_lines(kind):
        text = typed.get(line.field, "").strip()
        if text:
            _put(machine, line, keep(line, text))
    _split_ratings(machine)
    return machine


def _put(machine: Raw, line: PlateLine, kept: str | list[str]) -> None:
    """Put one line where the sheet has it."""
    value: Any = kept
    if line.choices is YES_NO:
        value = kept == "yes"
    elif line.dimension in {"ratio", "count"} and isinstance(kept, str) and "%" not in kept:
        value = float(kept.replace(",", ".")) if line.dimension == "ratio" else int(kept)
    home = machine if line.place == "machine" else machine.setdefault(line.place, {})
    home[line.field] = value


def _split_ratings(machine: Raw) -> None:
    """Turn "230/400 V, 28/16 A, delta/star" into two ratings and the one in use."""
    plate = machine.get("nameplate", {})
    pairs = {
        name: plate[name]
        for name in ("voltage", "current", "connection")
        if isinstance(plate.get(name), list)
    }
    if not pairs:
        plate.pop("in_use", None)
        return
    many = max(len(values) for values in pairs.values())
    ratings = [{name: values[i] for name, values in pairs.items() if i < len(values)} for i in range(many)]
    for name in pairs:
        del plate[name]
    plate["ratings"] = ratings


def raw_of(machine: Machine) -> Raw:
    """Return a machine that is known already as a case sheet holds it."""
    from calc.sheet import CaseSheet
    from calc.sheet_io import sheet_to_plain

    return dict(sheet_to_plain(CaseSheet(machine=machine, complaint="routine_check"))["machine"])


def typed_of(machine: Raw) -> dict[str, str]:
    """Return the lines as they would be typed for a machine that is known already."""
    out: dict[str, str] = {}
    ratings = machine.get("nameplate", {}).get("ratings", ())
    rated = {name for rating in ratings for name in rating}
    for line in plate_lines(str(machine.get("kind", "induction_3ph"))):
        if line.field in rated:  # what stands beside the ratings is the one in use, once more
            continue
        home = machine if line.place == "machine" else machine.get(line.place, {})
        value = home.get(line.field)
        if isinstance(value, bool):
            out[line.field] = "yes" if value else "no"
        elif value is not None:
            out[line.field] = str(value)
    for rating in ratings:
        for name, text in rating.items():
            out[name] = f"{out[name]}/{text}" if out.get(name) else str(text)
    return out
