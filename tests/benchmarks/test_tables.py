"""The table of measurements: what is held against a target, what the README quotes, small casebooks."""

import re
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from benchmarks import __main__ as table
from benchmarks import casebook, readme
from benchmarks.rows import MISSED, Row, at_most, percentile, told

README = Path(__file__).resolve().parent.parent.parent / "README.md"


def test_a_figure_at_its_target_reaches_it_and_one_above_is_called_missed(capsys):
    assert told([at_most("key", 25.0, "ms", 25), Row("plain", "7")]) == 0
    assert told([at_most("key", 25.1, "ms", 25, decimals=1), at_most("key", 1.0, "ms", 25)]) == MISSED
    lines = capsys.readouterr().out.splitlines()
    assert [line.endswith("MISSED") for line in lines] == [False, False, True, False]
    assert "25.1 ms" in lines[2]


@given(st.lists(st.floats(-1e6, 1e6), min_size=1), st.floats(0.01, 1.0))
def test_a_percentile_is_the_smallest_value_that_enough_values_do_not_exceed(values, share):
    found = percentile(values, share)
    at_or_below = sum(value <= found for value in values) / len(values)
    below = sum(value < found for value in values) / len(values)
    assert found in values
    assert at_or_below >= share - 1e-9
    assert below < share


def test_a_part_is_written_between_its_own_marks_and_nowhere_else(tmp_path):
    file = tmp_path / "README.md"
    block = "<!-- measured: {} -->\n```text\nold\n```\n"
    file.write_text("a\n" + block.format("speed") + "b\n" + block.format("terminal"), encoding="utf-8")
    assert readme.put("speed", "new \\1 figures\n", "today", file)
    assert not readme.put("casebook", "x", "today", file)
    text = file.read_text(encoding="utf-8")
    assert "<!-- measured: speed -->\n```text\ntoday\nnew \\1 figures\n```\nb\n" in text
    assert text.endswith(block.format("terminal"))


@pytest.mark.parametrize("part", [part for part in table.PARTS if part != "robustness"])
def test_the_readme_quotes_each_part_with_its_day_and_machine(part):
    text = README.read_text(encoding="utf-8")
    (quoted,) = re.findall(rf"<!-- measured: {part} -->\n```text\n(.*?)```\n", text, re.DOTALL)
    head, *lines = quoted.splitlines()
    assert re.match(r"20\d\d-\d\d-\d\d, \d+ cores \(\S+\), \w+, Python 3\.\d+\.\d+, load \d", head)
    assert len(lines) > 5


def test_every_part_names_a_module_that_is_there(tmp_path):
    (tmp_path / "0001.truth.json").touch()
    chosen = table.arguments(["--quick", str(tmp_path)])
    for part in table.PARTS:
        for _, (module, *_) in table.commands(part, chosen, "made"):
            assert (README.parent / f"{module.replace('.', '/')}.py").exists()


def test_a_folder_without_graded_cases_is_refused_before_anything_is_measured(tmp_path, capsys):
    with pytest.raises(SystemExit, match="2"):
        table.main([str(tmp_path)])
    assert f"{tmp_path}: no graded cases" in capsys.readouterr().err


def test_a_small_casebook_can_be_measured_too(tmp_path, capsys):
    assert casebook.main(["--entries", "400", "--folder", str(tmp_path)]) in {0, MISSED}
    out = capsys.readouterr().out
    assert "400 entries made" in out
    assert "most memory used" in out
    assert not list(tmp_path.iterdir())
