"""What is drawn of a machine: its own curves, and what was read over the days. No terminal here."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

from calc.quantities import MEASURES
from calc.units import find_unit
from tui.plot import Band, Curve
from tui.words import measure_name, plain

if TYPE_CHECKING:
    from collections.abc import Sequence

    from calc.curve_bands import SpeedCurves
    from calc.dc.model import DcTwin
    from calc.sheet import CaseSheet
    from casebook.fold import Case
    from casebook.history import Point, Series
    from tui.compose import Visit

DAY_S: Final = 86400.0
NINE_IN_TEN: Final = "nine in ten"


@dataclass(frozen=True)
class Picture:
    """One picture: its title, what is drawn, and the words of its axes."""

    title: str
    curves: tuple[Curve, ...]
    bands: tuple[Band, ...] = ()
    x_label: str = ""
    y_label: str = ""


def history_pictures(visit: Visit, cases: Sequence[Case]) -> list[Picture]:
    """Return one picture per measure that was read at least twice, with its limit where there is one."""
    from casebook.history import machine_history

    found = machine_history(visit.sheet.machine.tag or "", cases).series
    return [
        _over_time(series, visit) for series in found if len(series.points) > 1 and series.measure in MEASURES
    ]


def _over_time(series: Series, visit: Visit) -> Picture:
    """Return a series over the days before its last reading, at one temperature where that can be."""
    measure = MEASURES[series.measure]
    unit = find_unit(measure.usual_unit, dimension=measure.dimension) if measure.usual_unit else None
    factor = float(unit.factor) if unit is not None else 1.0
    at_anchor = series.anchor_c is not None and all(point.corrected for point in series.points)
    last = series.points[-1].time_utc.timestamp()
    days = [(point.time_utc.timestamp() - last) / DAY_S for point in series.points]
    rows = [_numbers(point, at_anchor=at_anchor) for point in series.points]
    many = max(map(len, rows))
    curves = [
        Curve(
            x=days,
            y=[row[place] / factor if place < len(row) else math.nan for row in rows],
            mark=str(place + 1) if many > 1 else "o",
            joined=False,
            name="" if many > 1 else "read",
        )
        for place in range(many)
    ]
    limit = limit_line(series.measure, visit, days, factor)
    warm = f" at {series.anchor_c:g} degC" if at_anchor else ""
    return Picture(
        title=f"{measure_name(series.measure)}{warm}, {plain(series.state)}, over time",
        curves=(*([limit] if limit else []), *curves),
        x_label="days before the last reading",
        y_label=measure.usual_unit,
    )


def _numbers(point: Point, *, at_anchor: bool) -> tuple[float, ...]:
    """Return what a point shows: as read, or brought to one temperature."""
    return tuple(point.corrected or ()) if at_anchor else tuple(point.numbers)


def limit_line(measure: str, visit: Visit, days: Sequence[float], factor: float) -> Curve | None:
    """Return the line below which a measure must not fall on this machine; None where there is none."""
    from rules.limit_bands import floor_of

    floor = floor_of(visit.sheet, visit.knowledge, measure)
    if floor is None:
        return None
    value = floor[0] / factor
    return Curve(x=[min(days), max(days)], y=[value, value], mark="=", name=f"limit {floor[1]}")


def machine_pictures(sheet: CaseSheet) -> list[Picture]:
    """Return the curves that the machine's model offers, each with its band; none where it offers none."""
    from calc.dc.model import DcTwin
    from calc.induction_1ph.model import SinglePhaseTwin
    from calc.induction_3ph.model import InductionTwin
    from calc.kinds import twin_of

    twin = twin_of(sheet.machine, sheet.readings)
    if isinstance(twin, InductionTwin):
        from calc.induction_3ph.curves import speed_curves

        return speed_pictures(speed_curves(twin), sheet)
    if isinstance(twin, SinglePhaseTwin):
        from calc.induction_1ph.curves import speed_curves as one_phase_curves

        drawn = one_phase_curves(twin)
        return speed_pictures(drawn, sheet)
    return emf_pictures(twin, sheet) if isinstance(twin, DcTwin) else []


def emf_pictures(twin: DcTwin, sheet: CaseSheet) -> list[Picture]:
    """Return back-EMF over speed at the flux of full load, with what was read on the spun machine."""
    from calc.dc.curves import emf_curve

    drawn = emf_curve(twin)
    if drawn is None:
        return []
    speed = drawn.speed_rpm.tolist()
    low, middle, high = (values.tolist() for values in drawn.emf_v)
    loaded = Curve(x=[drawn.at_speed_rpm], y=[drawn.at_emf_v], mark="L", joined=False, name="loaded")
    return [
        Picture(
            title="back-EMF over speed at the flux of full load",
            curves=(Curve(x=speed, y=middle, name="middle"), loaded, spun_readings(sheet)),
            bands=(Band(x=speed, low=low, high=high, name=NINE_IN_TEN),),
            x_label="rpm",
            y_label="V",
        )
    ]


def spun_readings(sheet: CaseSheet) -> Curve:
    """Return the volts that were read on the spun machine, at the speed that was noted with them."""
    spun = [
        reading for reading in sheet.readings if reading.measure == "open_circuit_voltage" and reading.speed
    ]
    return Curve(
        x=[reading.speed.number for reading in spun if reading.speed],
        y=[reading.numbers[0] for reading in spun],
        mark="o",
        joined=False,
        name="read when spun" if spun else "",
    )


def speed_pictures(drawn: SpeedCurves, sheet: CaseSheet) -> list[Picture]:
    """Return torque and current over speed, with the rated point and the currents that were read."""
    speed = drawn.speed_rpm.tolist()
    low, middle, high = ([max(value, 0.0) for value in values] for values in drawn.torque_nm)
    rated = Curve(x=[drawn.rated_speed_rpm], y=[drawn.rated_torque_nm], mark="R", joined=False, name="rated")
    torque = Picture(
        title="torque over speed at rated volts",
        curves=(Curve(x=speed, y=middle, name="middle"), rated, *_switch(drawn.switch_rpm)),
        bands=(Band(x=speed, low=low, high=high, name=NINE_IN_TEN),),
        x_label="rpm",
        y_label="N m",
    )
    low, middle, high = (values.tolist() for values in drawn.current_a)
    current = Picture(
        title="line current over speed at rated volts",
        curves=(Curve(x=speed, y=middle, name="middle"), currents_read(sheet)),
        bands=(Band(x=speed, low=low, high=high, name=NINE_IN_TEN),),
        x_label="rpm",
        y_label="A",
    )
    return [torque, current]


def _switch(switch_rpm: float | None) -> list[Curve]:
    """Return where the start switch opens, as a mark on the axis."""
    if switch_rpm is None:
        return []
    return [Curve(x=[switch_rpm], y=[0.0], mark="S", joined=False, name="start switch opens")]


def currents_read(sheet: CaseSheet) -> Curve:
    """Return the currents that were read where the speed is known: standing, or read in that state."""
    points = []
    for reading in sheet.readings:
        if reading.measure == "line_current":
            speed = sheet.last_reading("speed", reading.state)
            standing = reading.state in {"stalled", "starting"}
            rpm = 0.0 if standing else speed.numbers[0] if speed else math.nan
            points += [(rpm, number) for number in reading.numbers]
    return Curve(x=[x for x, _ in points], y=[y for _, y in points], mark="o", joined=False, name="read")
