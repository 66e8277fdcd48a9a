"""Every limit of rules/limits/ against the number that its standard, or practice, gives.

The numbers stand in ``data/limits.yaml`` and ``data/starts.csv``. A limit is asked just below, on and
just above each number, so that a number changed either way fails; and whether it speaks about the
machines that the standard means, and about no others.
"""

import pytest
from msgspec.structs import replace

from rules.amounts import amount
from rules.facts import facts_in
from rules.findings import findings
from rules.limit_bands import band_of, concerns
from tests.published.sources import column_table, entries, of_entry, published
from tests.rules.makers import case, reading, shipped

GRAVITY = ["normal", "remark", "watch", "stop"]
CHECKS = entries("limits")
COMMON = "common practice"
ADMITS = ("practice", "judgement", "multimeter", "the plate")
STARTS = [row for row in column_table("starts") if row["poles"]]


def steps_of(check):
    """Yield verdict below, number as text, verdict above, along the judged quantity."""
    for line in check.get("parts", [check["along"]] if "along" in check else []):
        yield from zip(line[:-2:2], line[1:-1:2], line[2::2], strict=True)


def name_of(check):
    return f"{check['limit']} by {check['standard']}"


def marked(checks, *, each=lambda check: [()]):
    return [
        pytest.param(
            check, *more, marks=of_entry(check, f"limits/{check['limit']}"), id=f"{name_of(check)} {more}"
        )
        for check in checks
        for more in each(check)
    ]


def verdict(limit, number):
    return band_of(limit, number).verdict


def around(limit, text):
    """Verdicts just below a number, on it and just above it."""
    number = amount(text)
    hair = max(abs(number) * 1e-3, 1e-6)
    return [verdict(limit, value) for value in (number - hair, number, number + hair)]


def wanted(below, above):
    return [below, min(below, above, key=GRAVITY.index), above]


@pytest.mark.parametrize(("check", "below", "text", "above"), marked(CHECKS, each=steps_of))
def test_a_limit_turns_at_the_number_of_its_source_and_nowhere_near_it(check, below, text, above):
    assert around(shipped().limits[check["limit"]], text) == wanted(below, above)


@pytest.mark.parametrize("check", marked([c for c in CHECKS if "also" in c]))
def test_a_limit_judges_the_ends_of_a_published_range_as_they_are_meant(check):
    limit = shipped().limits[check["limit"]]
    assert {text: verdict(limit, amount(text)) for text in check["also"]} == check["also"]


@pytest.mark.parametrize("check", marked(CHECKS))
def test_a_limit_speaks_about_the_machines_that_its_source_means(check):
    limit = shipped().limits[check["limit"]]
    assert concerns(limit, facts_in(check.get("for", {})))
    for other in check.get("silent", []):
        assert not concerns(limit, facts_in(other)), other


def start_check(row):
    mark = published(
        "NEMA MG 10",
        "Table 2-3, designs A and B, columns A and C",
        says="starts an hour at most and seconds of rest at least, 1 to 250 hp, 2, 4 and 6 poles",
        known="looked up",
        checks=f"limits/starts_{row['hp'].replace('.', '_')}_hp_{row['poles']}_pole",
    )
    return pytest.param(row, marks=mark, id=f"{row['hp']} hp, {row['poles']} poles")


def crossed(row, *, hp, starts):
    speed = round(7200.0 / int(row["poles"]) * 0.975)
    plate = {"power": f"{hp} hp", "frequency": "60 Hz", "speed": f"{speed} rpm"}
    sheet = case("runs_hot", reading("starts_per_hour", "loaded", f"{starts:.9g} 1/h"), nameplate=plate)
    return [found.says for found in findings(sheet, shipped()) if found.id == "starts_per_hour"]


@pytest.mark.parametrize("row", [start_check(row) for row in STARTS])
def test_starts_per_hour_are_those_of_the_table_for_this_size_and_number_of_poles(row):
    allowed = float(row["starts_per_hour"])
    assert crossed(row, hp=row["hp"], starts=allowed) == []
    assert crossed(row, hp=row["hp"], starts=allowed * 0.999) == []
    (said,) = crossed(row, hp=row["hp"], starts=allowed * 1.001)
    assert f"more than {row['starts_per_hour']} starts an hour" in said
    assert f"{row['rest_s']} s of rest" in said


@pytest.mark.parametrize("row", [start_check(row) for row in STARTS if row["hp"] != "1"])
def test_a_motor_between_two_sizes_of_the_table_takes_the_number_of_the_larger(row):
    larger = float(row["starts_per_hour"])
    hp = round(0.9 * float(row["hp"]) if float(row["hp"]) > 2 else float(row["hp"]) - 0.2, 2)
    assert crossed(row, hp=hp, starts=larger) == []
    assert crossed(row, hp=hp, starts=larger * 1.001)


RULES = published(
    "this folder", "the rules' own sources", known="computed", checks="rules/limits",
    says="every limit and each of its numbers has a check; its source says what is known",
)  # fmt: skip


def numbers_of(limit):
    return {amount(end) for band in limit.bands for end in (band.below, band.above) if end is not None}


def checks_of(limit):
    return [check for check in CHECKS if check["limit"] == limit.id]


def is_start(limit):
    return limit.quantity == "starts_per_hour"


@RULES
def test_every_limit_has_a_check_for_each_of_its_numbers_and_for_no_other():
    limits = shipped().limits
    assert {check["limit"] for check in CHECKS} == {one.id for one in limits.values() if not is_start(one)}
    for limit in limits.values():
        if not is_start(limit):
            listed = {amount(text) for check in checks_of(limit) for _, text, _ in steps_of(check)}
            assert listed == numbers_of(limit), limit.id


def moved(limit, index, end, factor):
    """Return a limit with one of its ends moved by a factor, as a slip of the pen would."""
    band = limit.bands[index]
    number, _, unit = getattr(band, end).partition(" ")
    other = replace(band, **{end: f"{float(number) * factor or 0.5:.9g} {unit}".strip()})
    return replace(limit, bands=(*limit.bands[:index], other, *limit.bands[index + 1 :]))


@RULES
@pytest.mark.parametrize("factor", [0.97, 1.03])
def test_a_number_of_a_limit_that_is_three_percent_off_would_be_caught(factor):
    for limit in shipped().limits.values():
        ends = [(i, end) for i, band in enumerate(limit.bands) for end in ("below", "above")]
        for index, end in ends if not is_start(limit) else ():
            if getattr(limit.bands[index], end) is not None:
                wrong = moved(limit, index, end, factor)
                steps = [step for check in checks_of(limit) for step in steps_of(check)]
                assert any(around(wrong, text) != wanted(b, a) for b, text, a in steps), limit.id


@RULES
def test_the_table_of_starts_has_sixty_cells_and_each_is_one_limit():
    held = {one.id for one in shipped().limits.values() if is_start(one)}
    assert held == {f"starts_{r['hp'].replace('.', '_')}_hp_{r['poles']}_pole" for r in STARTS}
    assert len(held) == 60


@RULES
def test_a_limit_names_the_standard_of_its_check_or_admits_that_none_gives_the_number():
    for check in CHECKS:
        limit = shipped().limits[check["limit"]]
        said = f"{limit.source} {limit.clause}"
        if check["known"] == COMMON:
            assert any(word in said for word in ADMITS), limit.id
        elif check["known"] != "computed":
            for standard in check["standard"].split(" and "):
                name = standard.replace("marking of ", "").partition(":")[0]
                assert name in said, (limit.id, name)


@RULES
def test_a_limit_says_from_memory_where_its_check_is_from_memory_and_only_there():
    for limit in shipped().limits.values():
        if is_start(limit):
            assert limit.looked_up
            continue
        known = {check["known"] for check in checks_of(limit)}
        if "from memory" in known:
            assert not limit.looked_up or "from memory" in limit.clause, limit.id
        elif known <= {"looked up", "computed"}:
            assert limit.looked_up, limit.id
        elif known == {COMMON}:
            assert not limit.looked_up, limit.id
