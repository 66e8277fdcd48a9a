"""What the healthy machine should read, as 90 % bands, from the plate and from what was read otherwise.

A reading that is on the sheet is judged from the *other* readings: its own information is taken out
of the fit again (a rank-m downdate of the Gaussian posterior). Where the machine is plainly not
healthy, only what the supply says is used: a faulty machine's readings say nothing of a healthy one.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from calc.observe import InstrumentError
from calc.quantities import MEASURES
from calc.sheet import CaseSheet
from calc.twin import Ask, Floats, Twin
from rules.answer import Band
from rules.knowledge import Knowledge
from rules.weigh.fitting import QUICK, fit_modes
from rules.weigh.frame import Frame, frame
from rules.weigh.instruments import instrument_errors
from rules.weigh.laplace import Fit, fit_of, without
from rules.weigh.posterior import Posterior
from rules.weigh.predict import Outlook, in_usual_unit, outlooks, untransform
from rules.weigh.soft import shape, spread_of

COVERAGE = 0.9
_SIGMAS = 1.645  # of a normal, for 90 %
_TRUST_BELOW = 0.08  # odds of a sound circuit under which the machine's own readings are not used
_SUPPLY = ("supply_voltage", "supply_frequency", "ambient_temperature", "armature_voltage", "field_voltage")

# What these read depends on the plant, not on the machine: a band would say nothing.
_NO_BAND = frozenset({"control_voltage", "brake_voltage", "dc_bus_voltage"})

# Conditions for which an unread reading is expected.
_REFERENCE_C = 20.0
STATES_SHOWN = ("isolated", "starting", "no_load", "loaded", "spun")


def asks_of(sheet: CaseSheet, twin: Twin, rated_speed_rpm: float | None) -> list[Ask]:
    """Every reading that the twin can say something about, with the sheet's own context where it was read."""
    found: dict[str, Ask] = {}
    for reading in sheet.readings:
        ask = Ask(
            measure=reading.measure,
            state=reading.state,
            temperature_c=reading.temperature.number if reading.temperature else None,
            speed_rpm=reading.speed.number if reading.speed else None,
            at=reading.at,
            links=reading.links,
            method=reading.method,
        )
        if twin.covers(ask):
            found[ask.key] = ask
    for measure in MEASURES.values():
        for state in STATES_SHOWN:
            ask = _condition(Ask(measure.id, state), rated_speed_rpm)
            if measure.suits(twin.kind) and ask.key not in found and twin.covers(ask):
                found[ask.key] = ask
    return [a for a in found.values() if a.measure != "ambient_temperature"]


def _condition(ask: Ask, rated_speed_rpm: float | None) -> Ask:
    """Put the reference condition to a reading that was not taken yet."""
    if ask.state == "isolated" and ask.measure.endswith("resistance"):
        return replace(ask, temperature_c=_REFERENCE_C)
    if ask.state == "spun":
        return replace(ask, speed_rpm=rated_speed_rpm)
    return ask


def bands(
    sheet: CaseSheet, twin: Twin, knowledge: Knowledge, posterior: Posterior | None = None
) -> tuple[Band, ...]:
    """Return the bands of the healthy machine for every reading the twin or the knowledge covers."""
    data, fit = _basis(twin, posterior)
    meters = instrument_errors(knowledge) if posterior is None else dict(posterior.meters)
    speed = sheet.machine.nameplate.number("speed")
    asks = asks_of(sheet, twin, speed)
    looks = outlooks(twin, twin.modes("none")[:1], fit.z[:1], asks, meters)
    from_model = [_band(look, data, fit) for look in looks]
    covered = {ask.key for ask in asks}
    return (*from_model, *_spread_bands(twin.kind, knowledge, covered, meters))


def _basis(twin: Twin, posterior: Posterior | None) -> tuple[Frame, Fit]:
    """The healthy fit that bands rest on, and its readings."""
    healthy = twin.modes("none")[:1]
    if posterior is None:
        empty = frame([])
        return empty, fit_modes(twin, healthy, empty, heat=QUICK)
    place = next(h.place for h in posterior.hypotheses if h.fault == "healthy")
    sound = sum(p for h, p in zip(posterior.hypotheses, posterior.share(), strict=True) if h.place == place)
    if sound >= _TRUST_BELOW:
        return posterior.data, fit_of(posterior.fit, place)
    supply = frame([s for s in posterior.data.seen if s.ask.measure in _SUPPLY])
    return supply, fit_modes(twin, healthy, supply, heat=QUICK)


def _without(key: str, data: Frame, fit: Fit) -> tuple[Floats, Floats]:
    """Latents and covariance with one reading's own information taken out, where it is on the sheet."""
    for one, group in zip(data.seen, data.groups, strict=True):
        if one.ask.key == key:
            return without(fit, data, 0, group)
    return fit.z[0], fit.covariance[0]


def _band(look: Outlook, data: Frame, fit: Fit) -> Band:
    z, covariance = _without(look.ask.key, data, fit)
    slope = look.slope[0]
    mean = look.mean[0, 0] + float(slope[0] @ (z - fit.z[0]))
    variance = float(slope[0] @ covariance @ slope[0]) + look.error[0] ** 2
    half = _SIGMAS * np.sqrt(variance)
    edges = untransform(np.array([mean - half, mean, mean + half]), look.transform)
    low, mid, high = (in_usual_unit(look.ask.measure, float(x)) for x in edges)
    return Band(
        measure=look.ask.measure,
        state=look.ask.state,
        low=low,
        mid=mid,
        high=high,
        unit=MEASURES[look.ask.measure].usual_unit,
        coverage=COVERAGE,
        temperature_c=look.ask.temperature_c,
        speed_rpm=look.ask.speed_rpm if look.ask.state == "spun" else None,
    )


def _spread_bands(
    kind: str, knowledge: Knowledge, covered: set[str], meters: Mapping[str, InstrumentError]
) -> list[Band]:
    """Bands of readings that no circuit predicts: the healthy machine's spread."""
    healthy = knowledge.faults.get("healthy")
    if healthy is None:
        return []
    found = []
    for rule in knowledge.readings.values():
        measure = MEASURES.get(rule.id)
        if (
            rule.id in _NO_BAND
            or measure is None
            or not measure.suits(kind)
            or not ("any" in rule.kinds or kind in rule.kinds)
        ):
            continue
        for state in rule.states:
            spread = spread_of(healthy, None, rule.id, state)
            if spread is None or f"{rule.id}@{state}" in covered:
                continue
            logarithmic, centre, sigma = shape(spread)
            edges = [centre - _SIGMAS * sigma, centre, centre + _SIGMAS * sigma]
            numbers = [float(np.exp(x)) if logarithmic else x for x in edges]
            low, mid, high = (in_usual_unit(measure.id, x) for x in numbers)
            found.append(
                Band(measure=rule.id, state=state, low=low, mid=mid, high=high, unit=measure.usual_unit)
            )
    return found
