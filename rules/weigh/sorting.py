"""Which readings the model predicts, which have a spread per fault, and which of several counts."""

from __future__ import annotations

from collections.abc import Mapping

from calc.observe import InstrumentError, Seen, context, make_seen
from calc.sheet import CaseSheet, Reading
from calc.twin import Twin
from rules.knowledge import Knowledge
from rules.weigh import soft


def split_readings(
    sheet: CaseSheet, twin: Twin, knowledge: Knowledge, meters: Mapping[str, InstrumentError]
) -> tuple[list[Seen], list[Reading], list[Reading]]:
    """Sort readings into those the model predicts, those with a spread per fault, and the rest.

    Of several readings of one key the last counts.
    """
    healthy = knowledge.faults.get("healthy")
    seen: list[Seen] = []
    direct: list[Reading] = []
    rest: list[Reading] = []
    for reading in newest(sheet):
        made = None
        if twin.covers(context(reading)):
            made = make_seen(reading, twin, _error(meters, reading))
        if made is not None:
            seen.append(made)
        elif healthy is not None and soft.spread_of(healthy, None, reading.measure, reading.state):
            direct.append(reading)
        else:
            rest.append(reading)
    return seen, direct, rest


def newest(sheet: CaseSheet) -> list[Reading]:
    """The last reading of each key and place; of the two ends of a machine the one that tells more."""
    last = {(r.key, r.at, r.position, r.links): r for r in sheet.readings}
    ends: dict[tuple[str, str | None, str | None], Reading] = {}
    for reading in last.values():
        place = (reading.key, reading.at, reading.links)
        if place not in ends or soft.worst(reading) > soft.worst(ends[place]):
            ends[place] = reading
    return list(ends.values())


def _error(errors: Mapping[str, InstrumentError], reading: Reading) -> InstrumentError:
    return errors.get(reading.measure, InstrumentError(share=0.03))
