"""``learned``, and --no-learned: what the shop's own confirmed cases do can be seen and left out."""

import io
import json

import pytest

from calc.sheet_io import read_sheet
from casebook import bodies
from casebook.book import open_casebook
from rules.loading import load_knowledge
from tui.compose import Visit


@pytest.fixture
def confirmed(casebook, sheet):
    """A casebook with two bearings confirmed, one only believed, and an open case of the same kind."""
    pump = read_sheet(sheet("pump_overload"))
    with open_casebook(casebook) as book:
        for how in ("teardown", "repair", "believed"):
            case = book.log_sheet(pump, "Ines")
            shown = bodies.Shown(faults=(bodies.ShownFault(id="bearing_defect", probability=0.6),))
            book.record(case, shown, bodies.Closed(found="bearing_defect", confirmed=how), person="Ines")
        return book.number(book.log_sheet(pump, "Ines"))


def test_a_casebook_without_confirmed_faults_says_that_the_odds_are_as_shipped(run, sheet):
    run("log", sheet("pump_overload"))
    done = run("learned")
    assert (done.status, done.err) == (0, "")
    assert "those that are shipped" in done.out


def test_the_shift_is_shown_from_what_is_shipped_to_what_holds_now_with_its_cases(run, confirmed):
    """Mean of a Dirichlet distribution: (5 * shipped + 2) / (5 + 2)."""
    done = run("learned", "induction_3ph", "--json")
    group = json.loads(done.out.splitlines()[-2])
    assert (group["kind"], group["size"], group["cases"]) == ("induction_3ph", "1 to 10 kW", 2)
    moved = next(one for one in group["shifts"] if one["fault"] == "bearing_defect" and not one["about"])
    assert moved["cases"] == 2
    assert moved["after"] == pytest.approx((5 * moved["before"] + 2) / 7)
    text = run("learned").out
    assert "confirmed by teardown or repair" in text
    line = next(line for line in text.splitlines() if line.startswith("worn or damaged bearing  "))
    assert line.split()[-2:] == ["%", "2"]
    assert f"{100 * moved['after']:.0f} %" in line
    assert max(map(len, text.splitlines())) <= 80


def test_the_scoreboard_counts_confirmed_cases_alone(run, confirmed):
    score = json.loads(run("learned", "induction_3ph", "--json").out.splitlines()[-1])
    assert (score["scoreboard"], score["cases"], score["first_right"]) == ("induction_3ph", 2, 2)
    assert "2 (100 %)" in run("learned").out


def test_a_kind_that_is_none_is_refused_with_the_kinds_there_are(run, confirmed):
    done = run("learned", "toaster")
    assert (done.status, done.out) == (2, "")
    assert "toaster" in done.err
    assert "dc_shunt" in done.err


def test_a_kind_without_confirmed_cases_says_so(run, confirmed):
    assert "those that are shipped" in run("learned", "dc_shunt").out


def test_looking_makes_no_casebook(run, casebook):
    assert run("learned").status == 1
    assert not casebook.exists()


def test_a_report_says_that_the_odds_were_shifted_and_leaves_the_shift_out_when_told(run, confirmed):
    with_shift, without = run("report", confirmed).out, run("report", confirmed, "--no-learned").out
    assert "shifted by 2 confirmed cases" in " ".join(with_shift.split())
    assert "shifted by" not in " ".join(without.split())
    assert with_shift != without
    energising = with_shift.split("Energising")[1].split("Limits crossed")[0]
    assert energising == without.split("Energising")[1].split("Limits crossed")[0]


def test_a_case_is_no_evidence_for_itself(run, casebook, sheet):
    with open_casebook(casebook) as book:
        case = book.log_sheet(read_sheet(sheet("pump_overload")), "Ines")
        book.record(case, bodies.Closed(found="bearing_defect", confirmed="teardown"), person="Ines")
        number = book.number(case)
    assert "shifted by" not in " ".join(run("report", number).out.split())


@pytest.mark.parametrize("option", [(), ("--no-learned",)])
def test_the_plain_visit_says_so_too(run, confirmed, option, monkeypatch):
    monkeypatch.setattr("sys.stdin", io.StringIO(f"Ines\n{confirmed}\nleave\n"))
    done = run("--plain", *option)
    assert done.status == 0
    assert ("shifted by 2 confirmed cases" in " ".join(done.out.split())) is not bool(option)


def test_a_visit_weighs_anew_when_the_shift_is_switched_off(casebook, confirmed):
    knowledge = load_knowledge()
    with open_casebook(casebook) as book:
        visit = Visit(book, confirmed, person="Ines", knowledge=knowledge)
        shifted = {fault.id: fault.probability for fault in visit.weigh().diagnosis.faults}
        visit.use_learned = False
        plain = {fault.id: fault.probability for fault in visit.weigh().diagnosis.faults}
    assert shifted["bearing_defect"] > plain["bearing_defect"]
