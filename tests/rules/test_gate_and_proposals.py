"""No energised reading or observation is proposed through a shut gate."""

from pathlib import Path

import msgspec
import pytest

from calc.quantities import ENERGISED_STATES
from calc.sheet_io import read_sheet
from rules.diagnosing import diagnose
from rules.gate import gate

from .makers import insulation, shipped

SHEETS = sorted((Path(__file__).parent.parent / "sheets").glob("*.yaml"))


def variants(sheet):
    """The sheet as it is, after a trip, standing still, with low insulation, and with nothing read."""
    yield sheet
    for complaint in ("trips_instantly", "will_not_start"):
        yield msgspec.structs.replace(sheet, complaint=complaint)
    yield msgspec.structs.replace(sheet, readings=(*sheet.readings, insulation("0.4 Mohm")))
    yield msgspec.structs.replace(sheet, readings=(), observations={})


@pytest.mark.parametrize("path", SHEETS, ids=lambda path: path.stem)
def test_nothing_is_proposed_through_a_shut_gate(path):
    for sheet in variants(read_sheet(path)):
        answer = diagnose(sheet, knowledge=shipped())
        odds = {fault.id: fault.probability for fault in answer.faults}
        state = gate(sheet, shipped(), suspects=odds)
        assert answer.energise.gate == state.energise.gate
        for item in answer.next:
            if item.state is not None:
                assert not state.forbids(item.state), item.key
            elif state.energise.gate == "shut":
                seen_in = shipped().observations[item.observation].states
                assert "any" in seen_in or not all(map(state.forbids, seen_in)), item.key


@pytest.mark.parametrize("path", SHEETS, ids=lambda path: path.stem)
def test_after_a_stop_only_the_isolated_machine_is_read(path):
    sheet = msgspec.structs.replace(read_sheet(path), complaint="shock_from_frame")
    answer = diagnose(sheet, knowledge=shipped())
    assert answer.energise.gate == "shut"
    assert not any(item.state in ENERGISED_STATES for item in answer.next)
