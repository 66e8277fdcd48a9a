"""The invented plant: its sheets are sheets, its cases make sense, and nothing of it stays behind."""

import os
from pathlib import Path

from calc.sheet_io import read_sheet
from casebook.book import open_casebook
from tui.commands.demo import sweep
from tui.compose import weigh
from tui.demo.build import SHEETS, build, plan, sheet_of

PLAN = plan()
CLOSED = [one for one in PLAN if one.found]


def test_every_sheet_is_in_the_plan_once_and_every_plan_has_its_sheet():
    assert sorted(one.sheet for one in PLAN) == sorted(path.stem for path in SHEETS.glob("*.yaml"))


def test_the_plant_has_a_dozen_machines_of_several_kinds():
    machines = {read_sheet(path).machine.tag: read_sheet(path).machine.kind for path in SHEETS.glob("*.yaml")}
    assert len(machines) >= 12
    assert len(set(machines.values())) >= 5


def test_the_plan_runs_over_some_months_oldest_first():
    days = [one.days_ago for one in PLAN]
    assert days == sorted(days, reverse=True)
    assert days[0] > 180


def test_what_was_found_and_seen_are_words_of_the_rules(knowledge):
    for one in PLAN:
        sheet = sheet_of(one)
        assert sheet.complaint in knowledge.complaints
        assert set(sheet.observations) <= set(knowledge.observations)
        assert one.found is None or one.found in knowledge.faults or one.found == "healthy"


def test_most_of_what_was_found_was_among_the_first_two_suspects(knowledge):
    hits = [one.found in {fault.id for fault in weigh(sheet_of(one), knowledge).faults[:2]} for one in CLOSED]
    assert sum(hits) >= len(hits) - 2


def test_the_casebook_is_built_with_every_case_closed_as_planned(knowledge, tmp_path):
    path = tmp_path / "plant.db"
    assert build(path, knowledge) == len(PLAN)
    with open_casebook(path) as book:
        rows = book.cases()
        assert [row.tag for row in rows][:1] == [sheet_of(PLAN[-1]).machine.tag]
        assert sorted(row.found for row in rows if row.status == "closed") == sorted(
            str(one.found) for one in CLOSED
        )
        cases = [book.case(row.id) for row in rows]
    for case in cases:
        assert case.shown is not None
        read_isolated = [one for one in case.readings if one.what.reading.state == "isolated"]
        if read_isolated:
            assert case.isolation[0].what.proved_dead
            assert case.isolation[0].time_utc < read_isolated[0].time_utc


def test_build_writes_where_it_is_told_and_never_over_a_file(run, tmp_path):
    path = tmp_path / "plant.db"
    done = run("demo", "--build", str(path))
    assert done.status == 0
    assert "Tern Point cannery" in done.out
    assert run("demo", "--build", str(path)).status == 1


def test_the_demo_leaves_nothing_behind_and_never_touches_the_own_casebook(run, casebook, monkeypatch):
    seen = []

    def look(path, _arguments):
        seen.append(path)
        assert path.exists()
        return 0

    monkeypatch.setattr("tui.commands.visit.start", look)
    assert run("demo", "--plain").status == 0
    assert not Path(seen[0]).parent.exists()
    assert not casebook.exists()


def test_what_a_demo_left_behind_a_day_ago_is_removed_and_nothing_else(tmp_path):
    old, new, other = (tmp_path / name for name in ("plateside-demo-a", "plateside-demo-b", "elsewhere"))
    for folder in (old, new, other):
        folder.mkdir()
        (folder / "tern-point.db").touch()
    for folder in (old, other):
        os.utime(folder, (0, 0))
    sweep(tmp_path)
    assert not old.exists()
    assert new.exists()
    assert other.exists()
