"""Many sheets in one file: each is read as if it stood alone, with its lines as they are in the file."""

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from calc.safe_yaml import SHEET_LIMITS
from calc.sheet_io import read_sheet, sheet_to_yaml
from calc.sheet_stream import read_sheets

SHEETS = [read_sheet(path) for path in sorted((Path(__file__).parent.parent / "sheets").glob("*.yaml"))[:6]]
SMALL = "format: 1\nmachine: {kind: induction_3ph}\ncomplaint: runs_hot\n"


@pytest.fixture
def written(tmp_path):
    def write(data):
        path = tmp_path / "many.yaml"
        path.write_bytes(data if isinstance(data, bytes) else data.encode())
        return list(read_sheets(path, file="many.yaml"))

    return write


@given(st.lists(st.sampled_from(SHEETS), min_size=1, max_size=5), st.data())
def test_sheets_that_are_written_one_after_the_other_are_read_one_after_the_other(
    tmp_path_factory, sheets, data
):
    mark = data.draw(
        st.sampled_from(["---\n", "---\r\n", "--- # next\n", "...\n---\n", "---\n# C-7K3F9Q\n\n"])
    )
    head = data.draw(
        st.sampled_from(["", "---\n", "# exported\n\n---\n", "\ufeff# exported\n", "%YAML 1.2\n---\n"])
    )
    path = tmp_path_factory.mktemp("many") / "many.yaml"
    path.write_bytes((head + mark.join(map(sheet_to_yaml, sheets))).encode())
    assert [found.sheet for found in read_sheets(path)] == sheets


def test_a_file_without_a_sheet_yields_none(written):
    assert written("") == written("# only a remark\n---\n...\n---\n\n") == []


def test_a_bad_sheet_names_its_line_in_the_file_and_the_next_is_read(written):
    first, bad, last = written(SMALL + "---\n" + SMALL + "readings: [oops]\n---\n" + SMALL)
    assert first.sheet is not None
    assert first.sheet == last.sheet
    assert (first.line, bad.line, last.line) == (1, 4, 9)
    assert bad.error.problems[0].line == 8
    assert bad.error.problems[0].file == "many.yaml"


def test_a_mark_inside_a_line_or_a_word_ends_no_sheet(written):
    (one,) = written(SMALL + "# a --- b\n#---x\n  # ---\n")
    assert one.sheet is not None
    (bad,) = written(SMALL + "---x\n")
    assert bad.error is not None


def test_a_sheet_beyond_its_size_is_refused_and_the_next_is_read(written):
    long = SMALL + "# " + "x" * SHEET_LIMITS.bytes + "\n# more\n"
    bad, last = written(long + "---\n" + SMALL)
    assert "longer than" in str(bad.error)
    assert last.sheet is not None


def test_bytes_that_are_no_text_are_refused_with_their_line(written):
    first, bad = written((SMALL + "---\n" + SMALL).encode() + b"# \xff\n")
    assert first.sheet is not None
    assert bad.error.problems[0].line == 8
