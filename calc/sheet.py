"""The case sheet as types: one machine, what is wrong with it, and what was read.

A sheet holds what was typed (text, digits, unit) beside the number in the one
unit that Plateside uses inside for that dimension (``calc.quantities``). Ids of
complaints, observations and faults are opaque words here.
"""

from __future__ import annotations

from typing import Literal

import msgspec

ValueKind = Literal["exact", "open", "above", "below", "range", "missing"]


class Value(msgspec.Struct, frozen=True, kw_only=True):
    """A number as it was read: the typed text, and what it means.

    ``number`` is in the inner unit of its dimension (W, V, A, Hz, rpm, ohm, degC,
    mm/s, F, s, ...; ``inf`` for an open circuit, ``nan`` for a value that was not
    read). ``resolution`` is the worth of one step of the last digit typed, in
    the same unit. ``high`` is the upper end of a range such as "161-193 uF".
    """

    text: str
    number: float
    unit: str = ""
    resolution: float = 0.0
    kind: ValueKind = "exact"
    high: float | None = None

    @property
    def is_read(self) -> bool:
        """Whether there is a value at all."""
        return self.kind != "missing"


class Reading(msgspec.Struct, frozen=True, kw_only=True):
    """One measure in one state of the machine: one value, or three."""

    measure: str
    state: str
    values: tuple[Value, ...]
    temperature: Value | None = None
    test_voltage: Value | None = None
    speed: Value | None = None
    at: str | None = None
    links: str | None = None
    method: str | None = None
    after_stop: Value | None = None
    position: str | None = None
    direction: str | None = None
    instrument: str | None = None
    taken_at: str | None = None
    note: str | None = None

    @property
    def key(self) -> str:
        """The id of measure and state together, such as ``line_current@loaded``."""
        return f"{self.measure}@{self.state}"

    @property
    def numbers(self) -> tuple[float, ...]:
        """The values in the inner unit; ``inf`` is open, ``nan`` was not read."""
        return tuple(value.number for value in self.values)


class Rating(msgspec.Struct, frozen=True, kw_only=True):
    """One of several ratings on a plate: "230/400 V 28/16 A D/Y"."""

    voltage: Value | None = None
    current: Value | None = None
    frequency: Value | None = None
    power: Value | None = None
    speed: Value | None = None
    power_factor: Value | None = None
    efficiency: Value | None = None
    connection: str | None = None


class Nameplate(msgspec.Struct, frozen=True, kw_only=True):
    """What the plate says, in the plate's own words and units. Every field may be blank.

    With several ratings the fields hold those of the rating in use.
    """

    power: Value | None = None
    voltage: Value | None = None
    current: Value | None = None
    frequency: Value | None = None
    speed: Value | None = None
    power_factor: Value | None = None
    efficiency: Value | None = None
    connection: str | None = None
    service_factor: Value | None = None
    code_letter: str | None = None
    locked_rotor_current_ratio: Value | None = None
    design_letter: str | None = None
    insulation_class: str | None = None
    ambient: Value | None = None
    poles: Value | None = None
    duty: str | None = None
    duty_factor: Value | None = None
    enclosure: str | None = None
    shaft_height: Value | None = None
    rotor_bars: Value | None = None
    max_speed: Value | None = None
    power_supply_code: str | None = None
    field_voltage: Value | None = None
    field_current: Value | None = None
    current_is: str | None = None
    rotor_voltage: Value | None = None
    rotor_current: Value | None = None
    run_capacitor: Value | None = None
    start_capacitor: Value | None = None
    ratings: tuple[Rating, ...] = ()
    in_use: Value | None = None

    def number(self, field: str) -> float | None:
        """Return a field's number in the inner unit, or None where the plate is silent."""
        value = getattr(self, field)
        return value.number if isinstance(value, Value) and value.is_read else None


class Supply(msgspec.Struct, frozen=True, kw_only=True):
    """What feeds the machine."""

    source: str | None = None
    nominal_voltage: Value | None = None
    nominal_frequency: Value | None = None
    cable_length: Value | None = None


class Machine(msgspec.Struct, frozen=True, kw_only=True):
    """One machine as it stands in the plant."""

    kind: str
    tag: str | None = None
    nameplate: Nameplate = Nameplate()
    supply: Supply = Supply()
    starter: str | None = None
    load_type: str | None = None
    mount: str | None = None
    hazardous_area: bool | None = None
    brake: bool | None = None
    thermal_protector: str | None = None


class CaseSheet(msgspec.Struct, frozen=True, kw_only=True):
    """One case: the machine, the complaint, the readings and what was seen."""

    machine: Machine
    complaint: str
    readings: tuple[Reading, ...] = ()
    observations: dict[str, bool] = {}
    kit: tuple[str, ...] | None = None
    format: int = 1

    def last_reading(self, measure: str, state: str) -> Reading | None:
        """Return the newest reading of a measure in a state, or None."""
        for reading in reversed(self.readings):
            if reading.measure == measure and reading.state == state:
                return reading
        return None
