"""The printed sheet: what was read, what it means, who decides; as text and as one HTML page."""

from html.parser import HTMLParser

import pytest

from tui.curve_pictures import Picture
from tui.page_history import Chart
from tui.page_parts import Scale
from tui.pictures import chart_svg, curve_svg, scale_svg
from tui.plot import Band, Curve

VOID = {"meta", "rect", "path", "br", "circle"}


class Tags(HTMLParser):
    """Notes every tag and attribute, and whether they close in order."""

    def __init__(self):
        super().__init__()
        self.open, self.seen, self.attributes, self.words = [], set(), [], []

    def handle_starttag(self, tag, attrs):
        self.seen.add(tag)
        self.attributes += attrs
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag, attrs):
        self.seen.add(tag)
        self.attributes += attrs

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        self.words.append(data)


@pytest.fixture
def number(run, sheet):
    return run("log", sheet("pump_overload"), "--person", "Ines").out.split()[0]


def test_what_forbids_reads_as_what_is_not_met(run, tmp_path):
    """A need behind the word forbids alone reads as its contrary; what always forbids needs no more."""
    sheet = tmp_path / "hoist.yaml"
    sheet.write_text(
        "format: 1\nmachine: {tag: H-1, kind: dc_series}\ncomplaint: brushes_spark\nreadings:\n"
        "  - {measure: insulation_resistance, state: isolated, value: 0.4 Mohm}\n"
    )
    number = run("log", str(sheet), "--person", "Ines").out.split()[0]
    text = " ".join(run("report", number).out.split())
    assert "forbids: not met: insulation to frame read, and not below its limit" in text
    assert text.count("a series motor is never run without its load") == 1
    assert "not met: a series motor" not in text


def test_the_text_names_what_was_read_with_bands_and_sources(run, number):
    done = run("report", number)
    assert done.status == 0
    for words in (
        "WP-104 wash water",
        "18.9 / 19.3 / 19.0 A",
        "expected",
        "source",
        "licensed practice",
        "Ines",
    ):
        assert words in done.out.lower() or words in done.out
    assert max(len(line) for line in done.out.splitlines()) <= 80


def test_the_page_is_whole_and_links_to_nothing(run, number):
    done = run("report", number, "--html")
    tags = Tags()
    tags.feed(done.out)
    assert tags.open == []
    assert "svg" in tags.seen
    assert not tags.seen & {"script", "link", "img", "iframe", "object", "embed"}
    assert not [value for name, value in tags.attributes if name in {"src", "href"} or name.startswith("on")]
    assert "@import" not in done.out
    assert "url(" not in done.out


def test_what_somebody_typed_never_becomes_markup(run, tmp_path):
    path = tmp_path / "odd.yaml"
    path.write_text(
        "format: 1\nmachine: {kind: induction_3ph, tag: '<script>alert(1)</script> & [red]x[/red]'}\n"
        "complaint: runs_hot\n"
    )
    number = run("log", str(path)).out.split()[0]
    page = run("report", number, "--html").out
    assert "<script" not in page
    assert "&lt;script&gt;" in page
    assert "<script>alert(1)</script> & [red]x[/red]" in run("report", number).out


def test_the_tag_for_the_repair_shop_has_plate_fault_and_readings(run, number):
    done = run("report", number, "--tag")
    assert "REPAIR TAG" in done.out
    assert "7.5 kW" in done.out
    assert "suspected" in done.out
    assert "1.91 / 1.92 / 1.90 ohm" in done.out


def test_a_stop_complaint_stands_at_the_head(run, sheet):
    number = run("log", sheet("shock_from_frame")).out.split()[0]
    assert "! STOP" in "\n".join(run("report", number).out.splitlines()[:5])
    assert 'class="stop"' in run("report", number, "--html").out


def test_a_case_that_is_not_there_is_told(run, number):
    done = run("report", "C-ZZZZZZ")
    assert (done.status, done.out) == (1, "")
    assert "C-ZZZZZZ" in done.err


def test_a_reading_outside_its_band_is_drawn_outside_the_box():
    picture = scale_svg(Scale(low=10.0, high=12.0, read=(15.0,)), width=120)
    box_x, box_width = (
        float(picture.split(f' {name}="')[n].split('"')[0]) for name, n in (("x", 1), ("width", 2))
    )
    stroke = float(picture.rsplit('d="M', 1)[1].split()[0])
    assert stroke > box_x + box_width


def test_an_open_circuit_does_not_break_the_picture():
    assert "inf" not in scale_svg(Scale(low=1.0, high=2.0, read=(float("inf"), 1.5)))


def test_a_falling_insulation_is_drawn_falling():
    points = ((0.0, 70.0), (1e7, 24.0), (2e7, 8.0), (3e7, 1.8))
    picture = chart_svg(Chart(title="insulation", unit="Mohm", points=points, first="a", last="b"))
    heights = [float(part.split('"')[0]) for part in picture.split('cy="')[1:]]
    assert heights == sorted(heights)  # downwards on a page


@pytest.mark.parametrize(
    ("name", "titles"),
    [
        ("pump_overload", ("torque over speed", "line current over speed")),
        ("single_phase_switch_stuck", ("S start switch opens", "line current over speed")),
        ("shunt_winder_weak_field", ("back-EMF over speed",)),
    ],
)
def test_the_page_draws_the_curves_of_its_machine_and_the_text_leaves_them_out(run, sheet, name, titles):
    number = run("log", sheet(name)).out.split()[0]
    page = run("report", number, "--html").out
    assert page.count('aria-label="curve"') == len(titles)
    assert all(title in page for title in titles)
    tags = Tags()
    tags.feed(page)
    assert tags.open == []
    assert "Curves" not in run("report", number).out


def test_a_curve_is_drawn_through_its_points_inside_its_band():
    line = Curve(x=[0.0, 100.0], y=[0.0, 10.0], name="middle")
    point = Curve(x=[50.0, float("nan")], y=[5.0, 1.0], mark="R", joined=False, name="rated")
    band = Band(x=[0.0, 100.0], low=[0.0, 8.0], high=[1.0, 12.0])
    picture = curve_svg(Picture("t", (line, point), (band,)), width=475, height=145)
    x, y = (float(picture.split(f'{name}="')[1].split('"')[0]) for name in ("cx", "cy"))
    ends = [
        tuple(map(float, part.split())) for part in picture.split('fill="none" stroke="#111"')[0]
        .rsplit('d="M', 1)[1].split('"')[0].split("L")
    ]  # fmt: skip
    assert x == pytest.approx((ends[0][0] + ends[1][0]) / 2, abs=0.1)
    assert y == pytest.approx((ends[0][1] + ends[1][1]) / 2, abs=0.1)
    assert "nan" not in picture


def test_nothing_finite_is_no_picture():
    assert curve_svg(Picture("t", (Curve(x=[float("nan")], y=[1.0]),))) == ""


def test_the_history_of_a_machine_stands_on_its_sheet(run, tmp_path):
    plant = str(tmp_path / "plant.db")
    run("demo", "--build", plant)
    listed = run("cases", "earth", "fire", "--casebook", plant).out
    case = listed.splitlines()[2].split()[0]
    sheet = " ".join(run("report", case, "--casebook", plant).out.split())
    assert "History" in sheet
    assert "insulation halves every" in sheet
    assert "has reached the limit of 5 Mohm" in sheet
    page = run("report", case, "--html", "--casebook", plant).out
    assert 'aria-label="history"' in page
