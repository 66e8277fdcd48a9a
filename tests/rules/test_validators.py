"""Every check on the rules: once firing, once silent."""

import msgspec
import pytest

from rules.knowledge import (
    Complaint,
    EffectUse,
    Example,
    Fault,
    GateRule,
    Hazard,
    Knowledge,
    Limit,
    LimitBand,
    LimitExample,
    Observation,
    ReadingRule,
    ReadingState,
    Refinement,
    Spread,
)
from rules.validators import KEEP_FROM_LOADING, LEFT_TO_DO, all_mistakes, examples, ids, numbers

HEAD = {"name": "a name", "source": "from memory"}
FAULT = Fault(
    id="f", part="winding", odds={"induction_3ph": 1.0}, complaints={"c": 0.5}, observations={"o": 0.2},
    effects={"induction_3ph": (EffectUse(name="turn_short", severity=(0.01, 0.1)),)},
    readings={"speed@loaded": Spread(median="1450 rpm", factor=1.1)}, retest=("speed@loaded",),
    within=(Refinement(id="r", name="r", share=0.4, observations={"o": 0.1}, complaints={"c": 0.1},
                       readings={"speed": Spread(median="1 rpm", sigma="1 rpm")}),),
    before_energising=("g",), cautions=("h",),
    examples=(Example(leads=True, says="it does", sheet={}), Example(leads=False, says="not", sheet={})),
    **HEAD,
)  # fmt: skip
LIMIT = Limit(
    id="l", quantity="bearing_temperature", states=("loaded",), where={"power": "1..2 kW"}, shuts=("loaded",),
    bands=(LimitBand(above="90 degC", verdict="watch"), LimitBand(below="0 degC", verdict="remark"),
           LimitBand(verdict="normal")),
    examples=tuple(LimitExample(value=v, verdict=w) for v, w in (
        ("91 degC", "watch"), ("90 degC", "normal"), ("0 degC", "normal"), ("-1 degC", "remark"))),
    **HEAD,
)  # fmt: skip
READING = ReadingRule(
    id="speed", instruments=("tachometer",), accuracy_percent=1.0, plausible=("1 rpm", "9000 rpm"),
    needs=("g",), states={"loaded": ReadingState(leads="at the shaft", minutes=2.0, hazards=("h",))}, **HEAD,
)  # fmt: skip
GATE = GateRule(
    id="g", guards=("loaded",), asks=("speed@loaded", "o"), clears=("answered_yes",), suspects={"f": 0.3},
    where={"load": "hoist"}, **HEAD,
)  # fmt: skip
SOUND = Knowledge(
    faults={"f": FAULT},
    observations={"o": Observation(id="o", base_rate=0.1, minutes=1.0, hazards=("h",), **HEAD)},
    complaints={"c": Complaint(id="c", runs="yes", **HEAD)},
    readings={"speed": READING},
    limits={"l": LIMIT},
    hazards={"h": Hazard(id="h", precaution="Look first.", states=("loaded",), measures=("speed",),
                         faults=("f",), when={"brake": "yes"}, **HEAD)},
    gates={"g": GATE},
)  # fmt: skip


def with_(section: str, **fields) -> Knowledge:
    """The sound rules with some fields of the only entry of a section changed."""
    ((name, entry),) = getattr(SOUND, section).items()
    return msgspec.structs.replace(SOUND, **{section: {name: msgspec.structs.replace(entry, **fields)}})


def within(**fields) -> Knowledge:
    """The sound rules with some fields of the only refinement changed."""
    return with_("faults", within=(msgspec.structs.replace(FAULT.within[0], **fields),))


BAND = LimitBand(verdict="normal")
WRONG = [
    (numbers.SourceCheck, numbers.MissingSource, with_("limits", source=" "), "blank"),
    (ids.KindCheck, ids.UnknownKind, with_("limits", kinds=("induction_4ph",)), "induction_4ph"),
    (ids.KindCheck, ids.UnknownKind, with_("faults", odds={"any": 1.0}), "any"),
    (ids.KindCheck, ids.UnknownKind, within(shares={"any": 0.1}), "any"),
    (ids.StateCheck, ids.UnknownState, with_("limits", shuts=("asleep",)), "asleep"),
    (ids.StateCheck, ids.UnknownState, with_("gates", guards=("any",)), "any"),
    (ids.MeasureCheck, ids.UnknownMeasure, with_("limits", quantity="mood"), "mood"),
    (ids.MeasureCheck, ids.UnknownMeasure, with_("readings", id="sped"), "sped"),
    (ids.MeasureCheck, ids.UnknownMeasure, with_("gates", asks=("sped@loaded",)), "sped"),
    (ids.MeasureCheck, ids.UnknownState, with_("faults", retest=("speed@load",)), "load"),
    (ids.MeasureCheck, ids.UnknownMeasure,
     within(readings={"sped": Spread(median="1 rpm", factor=2.0)}), "sped"),
    (ids.ObservationCheck, ids.UnknownObservation, with_("faults", observations={"oo": 0.1}), "oo"),
    (ids.ObservationCheck, ids.UnknownObservation, within(observations={"oo": 0.1}), "oo"),
    (ids.ObservationCheck, ids.UnknownObservation,
     with_("faults", observations_by_kind={"induction_3ph": {"oo": 0.1}}), "oo"),
    (ids.ObservationCheck, ids.UnknownObservation, with_("gates", asks=("oo",)), "oo"),
    (ids.ComplaintCheck, ids.UnknownComplaint, with_("faults", complaints={"cc": 0.1}), "cc"),
    (ids.ComplaintCheck, ids.UnknownComplaint, within(complaints={"cc": 0.1}), "cc"),
    (ids.FaultCheck, ids.UnknownFault, with_("hazards", faults=("ff",)), "ff"),
    (ids.FaultCheck, ids.UnknownFault, with_("gates", suspects={"ff": 0.3}), "ff"),
    (ids.HazardCheck, ids.UnknownHazard, with_("faults", cautions=("hh",)), "hh"),
    (ids.HazardCheck, ids.UnknownHazard, with_("observations", hazards=("hh",)), "hh"),
    (ids.HazardCheck, ids.UnknownHazard,
     with_("readings", states={"loaded": ReadingState(leads="x", minutes=1.0, hazards=("hh",))}), "hh"),
    (ids.GateLineCheck, ids.UnknownGateLine, with_("faults", before_energising=("gg",)), "gg"),
    (ids.GateLineCheck, ids.UnknownGateLine, with_("readings", needs=("gg",)), "gg"),
    (ids.GateCheckCheck, ids.UnknownGateCheck, with_("gates", clears=("looks_nice",)), "looks_nice"),
    (ids.FactCheck, ids.UnknownFact, with_("hazards", when={"colour": "red"}), "colour"),
    (ids.EffectCheck, ids.UnknownEffect,
     with_("faults", effects={"induction_3ph": (EffectUse(name="gremlins"),)}), "gremlins"),
    (numbers.OddsCheck, numbers.BadOdds, with_("faults", odds={"induction_3ph": 0.0}), "0"),
    (numbers.OddsCheck, numbers.BadOdds, with_("faults", odds={"induction_3ph": float("inf")}), "inf"),
    (numbers.OddsCheck, numbers.BadOdds, with_("faults", odds={}), "none"),
    (numbers.ChanceCheck, numbers.BadChance, with_("faults", observations={"o": 1.01}), "1.01"),
    (numbers.ChanceCheck, numbers.BadChance, with_("faults", observations={"o": float("nan")}), "nan"),
    (numbers.ChanceCheck, numbers.BadChance, with_("observations", base_rate=-0.1), "-0.1"),
    (numbers.ChanceCheck, numbers.BadChance,
     with_("faults", complaints={"c": 0.6, "d": 0.5}), "together 1.1"),
    (numbers.ChanceCheck, numbers.BadChance, within(observations={"o": 2.0}), "2"),
    (numbers.SharesCheck, numbers.BadChance, within(share=1.5), "1.5"),
    (numbers.SharesCheck, numbers.BadShares, with_("faults", within=FAULT.within * 3), "together 1.2"),
    (numbers.SeverityCheck, numbers.BadSeverity,
     with_("faults", effects={"any": (EffectUse(name="x", severity=(0.2, 0.1)),)}), "0.2 to 0.1"),
    (numbers.SeverityCheck, numbers.BadSeverity,
     with_("faults", effects={"any": (EffectUse(name="x", weight=0.0),)}), "0"),
    (numbers.AmountCheck, numbers.BadAmount,
     with_("limits", bands=(LimitBand(above="90 degX", verdict="watch"), BAND)), "90 degX"),
    (numbers.AmountCheck, numbers.BadAmount, with_("limits", where={"power": "big"}), "big"),
    (numbers.AmountCheck, numbers.BadAmount, with_("readings", floor="a little"), "a little"),
    (numbers.AmountCheck, numbers.BadAmount,
     with_("faults", readings={"speed": Spread(median="fast", factor=2.0)}), "fast"),
    (numbers.SpreadCheck, numbers.BadSpread,
     with_("faults", readings={"speed": Spread(median="1 rpm")}), "neither"),
    (numbers.SpreadCheck, numbers.BadSpread,
     with_("faults", readings={"speed": Spread(median="1 rpm", factor=1.0)}), "factor 1"),
    (examples.FaultExamplesCheck, examples.FewExamples,
     with_("faults", examples=FAULT.examples[:1]), "too few"),
    (examples.LimitExamplesCheck, examples.WrongVerdict,
     with_("limits", examples=(LimitExample(value="91 degC", verdict="stop"),)), "stop"),
    (examples.BoundaryCheck, examples.BareBoundary, with_("limits", examples=LIMIT.examples[1:]), "90 degC"),
    (examples.BoundaryCheck, examples.BareBoundary, with_("limits", examples=LIMIT.examples[:3]), "0 degC"),
    (examples.WordingCheck, examples.UnwantedWords, with_("hazards", precaution="Then it is safe."), "safe"),
]  # fmt: skip


def mistakes(check, knowledge):
    return list(check().look(knowledge))


@pytest.mark.parametrize(("check", "issue", "knowledge", "given"), WRONG)
def test_a_check_fires_with_its_own_issue_and_what_was_given(check, issue, knowledge, given):
    (mistaken, *_) = mistakes(check, knowledge)
    assert mistaken.issue is issue
    assert given in mistaken.given
    assert mistaken.allowed


@pytest.mark.parametrize("check", [type(check) for check in (*KEEP_FROM_LOADING, *LEFT_TO_DO)])
def test_a_check_is_silent_on_sound_rules(check):
    assert mistakes(check, SOUND) == []


def test_every_check_is_shown_firing():
    fired = {check for check, *_ in WRONG}
    assert fired == {type(check) for check in (*KEEP_FROM_LOADING, *LEFT_TO_DO)}


def test_what_is_left_to_do_does_not_keep_from_loading():
    unfinished = with_("faults", examples=())
    assert list(all_mistakes(unfinished, thorough=False)) == []
    assert [m.issue for m in all_mistakes(unfinished)] == [examples.FewExamples, examples.FewExamples]


def test_a_wrong_word_comes_with_the_nearest_right_one():
    (mistaken,) = mistakes(ids.KindCheck, with_("limits", kinds=("induction_3phase",)))
    assert mistaken.allowed == "did you mean induction_3ph?"
