"""A machine's readings over time: one temperature, a trend with its doubt, a reference for the engine."""

import math
from datetime import UTC, datetime, timedelta

import pytest

from calc.sheet import Nameplate, Reading
from casebook import bodies as b
from casebook.book import Casebook
from casebook.history import own_references
from casebook.trend import trend_of

from .conftest import a_sheet, value

NOW = datetime(2026, 6, 1, 8, 0, tzinfo=UTC)
MONTH = timedelta(days=30.44)


def insulation(ohm: float, temperature_c: float | None = 40.0, **more: object) -> Reading:
    warm = None if temperature_c is None else value(f"{temperature_c} degC", temperature_c, "degC")
    return Reading(
        measure="insulation_resistance",
        state="isolated",
        values=(value(f"{ohm / 1e6:.4g} Mohm", ohm, "ohm", **more),),
        temperature=warm,
    )


def winding(ohm: float, temperature_c: float) -> Reading:
    return Reading(
        measure="winding_resistance",
        state="isolated",
        values=tuple(value(f"{ohm} ohm", ohm, "ohm") for _ in range(3)),
        temperature=value(f"{temperature_c} degC", temperature_c, "degC"),
    )


def log(book: Casebook, months_ago: float, *readings: Reading, insulation_class: str = "F") -> str:
    sheet = a_sheet(readings=readings)
    plate = Nameplate(insulation_class=insulation_class or None)
    machine = type(sheet.machine)(kind="induction_3ph", tag="P-104", nameplate=plate)
    changed = type(sheet)(machine=machine, complaint="routine_check", readings=readings)
    return book.log_sheet(changed, "Ada", at=NOW - months_ago * MONTH)


def test_insulation_is_compared_at_40_degrees(book: Casebook):
    """200 Mohm at 20 degC is 50 Mohm at 40 degC by halving per 10 K (IEEE 43, older insulation)."""
    log(book, 1, insulation(200e6, 20.0), insulation_class="A")
    (series,) = book.history("P-104").of("insulation_resistance")
    assert series.points[0].corrected == pytest.approx((50e6,))
    assert series.anchor_c == 40.0


def test_where_the_insulation_system_is_unknown_the_lower_law_holds(book: Casebook):
    log(book, 1, insulation(200e6, 20.0), insulation_class="")
    (series,) = book.history("P-104").of("insulation_resistance")
    assert series.points[0].corrected == pytest.approx((50e6,))


def test_winding_resistance_is_compared_at_25_degrees(book: Casebook):
    """Copper: R25 = R (235 + 25) / (235 + t), IEC 60034-2-1."""
    log(book, 1, winding(1.9, 65.0))
    (series,) = book.history("P-104").of("winding_resistance")
    assert series.points[0].corrected == pytest.approx((1.9 * 260 / 300,) * 3)


def test_insulation_that_halves_every_nine_months_is_said_so_with_its_limit(book: Casebook):
    """From 16 Mohm, halving every 9 months, the limit of 5 Mohm is 9 * log2(16/5) = 15 months away."""
    for months in range(0, 37, 6):
        log(book, months, insulation(16e6 * 2 ** (months / 9)))
    (series,) = book.history("P-104").of("insulation_resistance")
    trend = trend_of(series, now=NOW, limit=5e6, limit_text="5 Mohm")
    assert trend.is_clear
    assert trend.words.startswith("insulation halves every 9 months (")
    assert "; reaches 5 Mohm in about 15 months (" in trend.words
    assert trend.months_to_limit is not None
    low, mid, high = trend.months_to_limit
    assert low < mid < high and mid == pytest.approx(9 * math.log2(16 / 5), abs=0.7)
    assert trend.per_year_low < 12 / 9 * math.log(0.5) < trend.per_year_high


def test_few_or_scattered_readings_make_no_trend(book: Casebook):
    log(book, 6, insulation(100e6))
    log(book, 0, insulation(90e6))
    (series,) = book.history("P-104").of("insulation_resistance")
    assert trend_of(series, now=NOW).words == "too few for a trend: 2 readings in 6 months"
    log(book, 3, insulation(140e6))
    (series,) = book.history("P-104").of("insulation_resistance")
    trend = trend_of(series, now=NOW, limit=5e6)
    assert not trend.is_clear
    assert "no clear trend in 3 readings over 6 months" in trend.words


def test_a_reading_beyond_the_meter_is_no_point_of_a_trend(book: Casebook):
    for months in (0, 6, 12):
        log(book, months, insulation(5e9, kind="above"))
    (series,) = book.history("P-104").of("insulation_resistance")
    assert len(series.points) == 3
    assert trend_of(series, now=NOW).readings == 0


def test_a_slow_rise_of_resistance_is_said_in_per_cent(book: Casebook):
    for months in range(0, 49, 8):
        log(book, months, winding(2.0 * 1.04 ** (-months / 12), 25.0))
    (series,) = book.history("P-104").of("winding_resistance")
    words = trend_of(series, now=NOW).words
    assert words.startswith("winding resistance rises by 4.0 % a year (")


def test_a_limit_that_is_passed_is_said(book: Casebook):
    for months in range(0, 37, 6):
        log(book, months, insulation(1e6 * 2 ** (months / 9)))
    (series,) = book.history("P-104").of("insulation_resistance")
    assert trend_of(series, now=NOW, limit=5e6, limit_text="5 Mohm").words.endswith("has reached 5 Mohm")


def test_a_new_winding_begins_a_new_history(book: Casebook):
    case = log(book, 12, insulation(1e6), winding(1.9, 25.0))
    book.record(case, b.Repaired(done="rewound", winding_is_new=True), person="Ada", at=NOW - 11 * MONTH)
    log(book, 1, insulation(900e6))
    history = book.history("P-104")
    assert [len(series.points) for series in history.of("insulation_resistance")] == [1]
    assert history.of("winding_resistance") == ()
    assert history.winding_new_utc == NOW - 11 * MONTH


def test_the_windings_own_last_sound_reading_is_the_reference(book: Casebook):
    log(book, 24, winding(1.90, 25.0))
    log(book, 12, winding(1.95, 35.0))
    burnt = log(book, 6, winding(1.50, 25.0))
    book.record(burnt, b.Closed(found="turn_short", confirmed="teardown"), person="Ada", at=NOW - 5 * MONTH)
    now = log(book, 0, winding(1.40, 25.0))
    history = book.history("P-104")
    reference = own_references(history, leave_out=now, spoilt_by=("turn_short",))["winding_resistance"]
    assert reference.numbers_at_25_c == pytest.approx((1.95 * 260 / 270,) * 3)
    assert reference.person == "Ada"
    assert own_references(history)["winding_resistance"].numbers_at_25_c == pytest.approx((1.40,) * 3)


def test_a_reading_that_says_when_it_was_taken_is_believed(book: Casebook):
    reading = Reading(
        measure="speed",
        state="loaded",
        values=(value("1455 rpm", 1455.0, "rpm"),),
        taken_at="2025-01-02T03:04:05+01:00",
    )
    log(book, 0, reading)
    (series,) = book.history("P-104").of("speed")
    assert series.points[0].time_utc == datetime(2025, 1, 2, 2, 4, 5, tzinfo=UTC)
