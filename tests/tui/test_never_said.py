"""Nothing that the program puts together at run time is a permission, an all-clear, or dangerous to do."""

import html
import itertools
import json
import re
from pathlib import Path

import pytest

from rules.wording import texts_in, unwanted

SHEETS = sorted((Path(__file__).resolve().parent.parent / "sheets").glob("*.yaml"))
PLATES = {
    "induction_3ph": "power: 7.5 kW, voltage: 400 V, current: 14.9 A, frequency: 50 Hz, speed: 1455 rpm",
    "induction_1ph": "power: 750 W, voltage: 230 V, current: 5.2 A, frequency: 50 Hz, speed: 1420 rpm, "
    "run_capacitor: 25 uF",
    "dc_shunt": "power: 7.5 kW, voltage: 240 V, current: 37 A, speed: 1150 rpm, field_voltage: 240 V, "
    "field_current: 1.2 A",
    "dc_series": "power: 7.5 kW, voltage: 240 V, current: 37 A, speed: 1150 rpm",
    "dc_permanent_magnet": "power: 1.1 kW, voltage: 180 V, current: 7.4 A, speed: 1750 rpm",
    "synchronous_wound": "power: 75 kW, voltage: 400 V, current: 130 A, frequency: 50 Hz, speed: 1500 rpm",
}
INSULATION = ("0.2 Mohm", "3 Mohm", "900 Mohm")
COMPLAINTS = (
    "will_not_start",
    "trips_instantly",
    "runs_hot",
    "routine_check",
    "after_repair",
    "shock_from_frame",
)
SHEET = """format: 1
machine:
  tag: GEN
  kind: {kind}
  nameplate: {{{plate}}}
  load: {{type: hoist}}
  hazardous_area: yes
  thermal_protector: automatic
complaint: {complaint}
readings:
  - {{measure: insulation_resistance, state: isolated, value: {insulation}, temperature: 22 degC}}
observations: {{shaft_turns_freely: {turns}, guards_fitted: yes, load_held: yes}}
"""


@pytest.fixture(scope="module")
def generated(tmp_path_factory):
    """Sheets of many kinds, complaints and findings; each file its own."""
    folder = tmp_path_factory.mktemp("generated")
    paths = []
    for at, (kind, complaint) in enumerate(itertools.product(PLATES, COMPLAINTS)):
        text = SHEET.format(
            kind=kind, plate=PLATES[kind], complaint=complaint, insulation=INSULATION[at % 3],
            turns="no" if at % 4 == 3 else "yes",
        )  # fmt: skip
        paths.append(folder / f"{kind}-{complaint}.yaml")
        paths[-1].write_text(text, encoding="utf-8")
    return paths


def said(text: str) -> list[str]:
    """What is never said, in a text whose lines were wrapped."""
    return list(unwanted(re.sub(r"\s+", " ", text)))


def visible(page: str) -> str:
    """The words of a page of HTML."""
    return html.unescape(re.sub(r"<[^>]*>", " ", re.sub(r"(?s)<style.*?</style>", "", page)))


def test_the_scan_finds_what_is_wrapped_over_two_lines_and_what_stands_in_html():
    assert said("it may be\n   energised") == ["may be energised"]
    assert said(visible("<p>all <b>clear</b></p>")) == ["all clear"]


def test_answers_as_text_and_as_json_never_say_it(run, generated):
    paths = [str(path) for path in (*SHEETS, *generated)]
    assert len(paths) > 50
    text = run("diagnose", *map(str, (*SHEETS, *generated[::3])))
    assert text.status == 0
    assert said(text.out) == []
    lines = [json.loads(line) for line in run("diagnose", "--json", *paths).out.splitlines()]
    assert len(lines) == len(paths)
    found = [
        (line["sheet"], at, unwanted(one)) for line in lines for at, one in texts_in(line) if at != ("sheet",)
    ]
    assert [one for one in found if one[2]] == []


@pytest.mark.parametrize("path", SHEETS, ids=lambda path: path.stem)
def test_what_is_expected_and_the_printed_sheet_never_say_it(run, path):
    assert said(run("expect", str(path)).out) == []
    number = run("log", str(path), "--person", "Ines").out.split()[0]
    text, page = run("report", number), run("report", number, "--html")
    assert (text.status, page.status) == (0, 0)
    assert said(text.out) == []
    assert said(visible(page.out)) == []
