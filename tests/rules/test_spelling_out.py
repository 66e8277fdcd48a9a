"""A table in a rule file becomes one entry for every row, and what is wrong with it is named."""

import pytest

from rules import loading
from rules.spelling_out import LONGEST_CELL, MOST_ROWS, MOST_TEXT

from .makers import built, shop

TABLE = """limits:
- id: rest_{size}_kw
  name: rest, {size} kW
  source: common practice
  quantity: starts_per_hour
  where: {power: "..{size} kW"}
  bands:
  - {above: "{starts} 1/h", verdict: watch, says: "more than {starts} starts an hour"}
  - {verdict: normal}
  columns: [size, starts]
  rows:
  - [1, 15]
  - [20, 4.0]
"""


def told(tmp_path, text):
    return [str(problem) for problem in built(shop(tmp_path, text))[1]]


def test_every_row_of_a_table_becomes_an_entry_with_its_cells_as_they_were_typed(tmp_path):
    knowledge, problems = built(shop(tmp_path, TABLE))
    assert problems == []
    small, large = (knowledge.limits[f"rest_{size}_kw"] for size in ("1", "20"))
    assert (small.name, small.where, small.bands[0].above) == ("rest, 1 kW", {"power": "..1 kW"}, "15 1/h")
    assert large.bands[0].says == "more than 4.0 starts an hour"


def test_braces_in_an_entry_without_a_table_stay_as_they_are(tmp_path):
    text = "cautions:\n- {id: wet, name: wet, source: common practice, precaution: 'Mop {first}.'}\n"
    knowledge, problems = built(shop(tmp_path, text))
    assert problems == []
    assert knowledge.hazards["wet"].precaution == "Mop {first}."


@pytest.mark.parametrize(
    ("before", "after", "said"),
    [
        ("  - [20, 4.0]", "  - [20]", "line 13: rest_{size}_kw: rows[1]: another row; a list of 2 cells"),
        ("  - [20, 4.0]", "  - [20, [4.0]]", "line 13: rest_{size}_kw: rows[1]: another cell"),
        ("  - [20, 4.0]", f"  - [20, {'4' * (LONGEST_CELL + 1)}]", f"texts of at most {LONGEST_CELL}"),
        ("name: rest, {size}", "name: rest, {sise}", "line 3: rest_{size}_kw: name: {sise}; did you mean"),
        ("  columns: [size, starts]\n", "", "columns: no list; columns and rows go together"),
        ("  - [20, 4.0]", "  - [1, 4.0]", "id: given twice"),
        ("  - [20, 4.0]", "  - [twenty, 4.0]", "..twenty kW; an amount or a span"),
        ("  - [20, 4.0]", "  - [20, 4.0]\n" * MOST_ROWS, f"{MOST_ROWS + 1} rows; at most {MOST_ROWS}"),
        ("name: rest", f"name: {'rest' * (MOST_TEXT // 8)}", "too much text"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_a_table_is_named_with_its_line(tmp_path, before, after, said):
    assert before in TABLE
    assert said in "\n".join(told(tmp_path, TABLE.replace(before, after)))


def test_a_mistake_in_the_form_is_told_once_not_for_every_row(tmp_path):
    found = told(tmp_path, TABLE.replace("quantity:", "quantiti:"))
    assert sum("quantiti" in problem for problem in found) == 1


def test_tables_cannot_spell_out_more_entries_than_a_folder_may_hold(tmp_path, monkeypatch):
    monkeypatch.setattr(loading, "MOST_ENTRIES", 200)
    rows = "".join(f"  - [{n}, 4]\n" for n in range(1, 202))
    found = told(tmp_path, TABLE.partition("  - [1, 15]")[0] + rows)
    assert any("more than 200 entries in all; at most 200 in a folder" in problem for problem in found)
