"""Trip arithmetic against the points that IEC 60947-4-1 fixes."""

import pytest

from rules.findings import findings
from rules.trips import trip_findings, trip_table
from rules.wording import unwanted

from .makers import PLATE, case, reading


def tripped(current, *, time=None, trip_class=None, complaint="trips_under_load", setting="10 A", **more):
    readings = [reading("overload_setting", "isolated", setting), reading("trip_current", "loaded", current)]
    readings += [reading("time_to_trip", "loaded", time)] if time else []
    readings += [reading("overload_class", "isolated", trip_class)] if trip_class else []
    return case(complaint, *readings, **more)


def verdict(*args, **more) -> str:
    found = trip_findings(tripped(*args, **more))
    return found[0].id if found else ""


# IEC 60947-4-1: holds 1.05 times the setting, trips within 2 h at 1.2 times (from memory)
@pytest.mark.parametrize(
    ("current", "said"),
    [
        ("7.0 A", "current_cannot_have_tripped"), ("10.5 A", "current_cannot_have_tripped"),
        ("10.6 A", "relay_may_trip"), ("11.9 A", "relay_may_trip"),
        ("12.0 A", "relay_did_its_job"), ("72 A", "relay_did_its_job"),
    ],
)  # fmt: skip
def test_without_a_time_the_multiple_alone_decides(current, said):
    assert verdict(current) == said


# trip classes at 7.2 times the setting from cold: 10A 2-10 s, 10 4-10 s, 20 6-20 s, 30 9-30 s
@pytest.mark.parametrize(("trip_class", "from_s", "to_s"), [("10", 4, 10), ("20", 6, 20), ("30", 9, 30)])
def test_a_class_gives_its_window_at_the_start(trip_class, from_s, to_s):
    def at(seconds):
        return verdict("72 A", time=f"{seconds:g} s", trip_class=trip_class, complaint="trips_at_start")

    assert at(from_s * 0.97) == "relay_tripped_early"
    assert at(from_s * 1.03) == "relay_did_its_job"
    assert at(to_s * 0.97) == "relay_did_its_job"
    assert at(to_s * 1.03) == "relay_tripped_late"


def test_without_a_class_the_window_spans_all_of_them():
    assert verdict("72 A", time="2.1 s", complaint="trips_at_start") == "relay_did_its_job"
    assert verdict("72 A", time="29 s", complaint="trips_at_start") == "relay_did_its_job"
    assert verdict("72 A", time="1.9 s", complaint="trips_at_start") == "relay_tripped_early"
    assert verdict("72 A", time="31 s", complaint="trips_at_start") == "relay_tripped_late"


# 1.5 times the setting from warm: class 10 within 4 min, class 20 within 8 min (from memory)
@pytest.mark.parametrize(("trip_class", "minutes"), [("10", 4), ("20", 8), ("30", 12)])
def test_a_warm_relay_trips_at_one_and_a_half_times_in_the_time_of_its_class(trip_class, minutes):
    assert verdict("15 A", time=f"{60 * minutes - 1} s", trip_class=trip_class) == "relay_did_its_job"
    assert verdict("15 A", time=f"{60 * minutes + 1} s", trip_class=trip_class) == "relay_tripped_late"


def test_between_1_2_and_1_5_it_has_two_hours():
    assert verdict("13 A", time="7100 s", trip_class="10") == "relay_did_its_job"
    assert verdict("13 A", time="7300 s", trip_class="10") == "relay_tripped_late"


def test_the_line_current_under_load_serves_where_the_trip_current_is_not_on_record():
    load = reading("line_current", "loaded", "9.0 A", "9.4 A", "9.1 A")
    sheet = case("trips_under_load", reading("overload_setting", "isolated", "10 A"), load)
    (found,) = trip_findings(sheet)
    assert found.id == "current_cannot_have_tripped"
    assert "9.4 A is 0.94 times the setting of 10 A" in found.says
    assert found.about == "line_current@loaded"


def test_a_star_delta_leg_carries_0_58_of_the_line_current():
    # 15 A in the line is 8.7 A in the leg, 1.01 times a setting of 8.6 A
    assert verdict("15 A", setting="8.6 A", starter="star_delta") == "current_cannot_have_tripped"
    assert verdict("15 A", setting="8.6 A", starter="direct") == "relay_did_its_job"


@pytest.mark.parametrize(
    "sheet",
    [
        tripped("12 A", complaint="runs_hot"),
        tripped("12 A", complaint="trips_instantly"),
        tripped("12 A", seen={"breaker_tripped": True}),
        tripped("12 A", setting="0 A"),
        case("trips_under_load", reading("trip_current", "loaded", "12 A")),
        case("trips_under_load", reading("overload_setting", "isolated", "12 A")),
    ],
)
def test_it_is_silent_without_an_overload_trip_or_its_inputs(sheet):
    assert trip_findings(sheet) == ()


def test_nothing_speaks_for_a_higher_setting():
    currents = ["7 A", "10.6 A", "11 A", "13 A", "20 A", "72 A"]
    times = [None, "1 s", "20 s", "300 s", "9000 s"]
    texts = {f.says for c in currents for t in times for f in trip_findings(tripped(c, time=t))}
    assert len(texts) > 10
    for text in texts:
        assert unwanted(text) == ()
        assert "set it" not in text
        assert "higher" not in text


def test_it_is_among_the_findings(knowledge):
    found = {finding.id for finding in findings(tripped("7 A", nameplate=PLATE), knowledge)}
    assert "current_cannot_have_tripped" in found


def test_the_table_names_its_source():
    assert "IEC 60947-4-1" in trip_table().source
