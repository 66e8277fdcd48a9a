"""The page of all checks is current, and nothing that carries a published number goes unchecked."""

import ast
import re
import subprocess
import sys
from importlib import import_module
from pathlib import Path

import pytest

from rules.derived import QUANTITIES
from tests.published.sources import DATA, published
from tests.rules.makers import shipped

ROOT = Path(__file__).parents[2]
STANDARD = re.compile(
    r"\b(?:IEC|IEEE|NEMA|NEC|ISO|DIN|ANSI|CFR|Fitzgerald|Chapman|Hubert|Guru|Sen|Mohan|Slemon)\b"
)

pytestmark = published(
    "this folder", "its own marks", known="computed", checks=["calc", "rules"],
    says="the page is current; every formula and table that names a source has a check; every name exists",
)  # fmt: skip


@pytest.fixture(scope="module")
def names():
    """Names of all that is checked, gathered anew; the page must be the one that is written from the same."""
    command = [sys.executable, "tools/published", "--names", "--check"]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, (
        f"docs/published.md is not current: run tools/published. {done.stdout}{done.stderr}"
    )
    return set(done.stdout.split())


def exists(name):
    """Whether a name is an entry of the rules, a derived quantity, a file or folder, or a thing in Python."""
    section, _, key = name.partition("/")
    if section == "derived":
        return key in QUANTITIES
    if hasattr(shipped(), section):
        return key in getattr(shipped(), section)
    if "/" in name or "." not in name:
        return (ROOT / name).exists()
    module, _, attribute = name.rpartition(".")
    return hasattr(import_module(module), attribute)


def test_every_name_that_a_check_gives_is_the_name_of_something(names):
    assert [name for name in sorted(names) if not exists(name)] == []


def documented():
    """Public functions and classes of calc/ whose docstring names a source, as module and name."""
    for path in sorted((ROOT / "calc").rglob("*.py")):
        module = ".".join(path.relative_to(ROOT).with_suffix("").parts)
        for node in ast.parse(path.read_text(encoding="utf-8")).body:
            if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_"):
                said = ast.get_docstring(node) or ""
                if "References" in said or STANDARD.search(said):
                    yield f"{module}.{node.name}"


def test_every_formula_that_names_its_source_has_a_check(names):
    asked = set(documented())
    assert len(asked) > 10  # the search finds what it looks for
    assert sorted(asked - names) == []


def test_every_module_of_calc_that_names_a_standard_or_a_book_has_a_check(names):
    for path in sorted((ROOT / "calc").rglob("*.py")):
        module = ".".join(path.relative_to(ROOT).with_suffix("").parts)
        if STANDARD.search(path.read_text(encoding="utf-8")):
            assert any(name.startswith(f"{module}.") for name in names), module


def test_every_table_that_names_a_standard_has_a_check(names):
    tables = [*(ROOT / "calc" / "tables").iterdir(), *(ROOT / "rules" / "tables").iterdir()]
    for path in sorted(tables):
        head = "\n".join(
            x for x in path.read_text(encoding="utf-8").splitlines() if "#" in x or "source" in x
        )
        if STANDARD.search(head):
            assert str(path.relative_to(ROOT)) in names, path.name


def test_every_limit_and_every_derived_quantity_has_a_check(names):
    assert {f"limits/{key}" for key in shipped().limits} <= names
    assert {f"derived/{key}" for key in QUANTITIES} <= names


def test_every_data_file_says_where_it_is_from():
    for path in DATA.glob("*.csv"):
        head = path.read_text(encoding="utf-8").partition("\n")[0]
        assert STANDARD.search(head), path.name
        assert re.search(r"looked up|from memory", path.read_text(encoding="utf-8"), re.IGNORECASE), path.name
