"""YAML that nobody has to trust: what is read, and each way in which it is refused."""

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from calc.errors import InputError
from calc.safe_yaml import Limits, load_document, read_document, where


def refusal(text, **limits):
    with pytest.raises(InputError) as refused:
        load_document(text, file="p.yaml", limits=Limits(**limits))
    (problem,) = refused.value.problems
    return problem


def test_every_scalar_stays_the_text_that_was_typed():
    text = "a: 12:30\nb: 010\nc: 1e3\nd: yes\ne: 2026-12-01\nf: 0x1F\ng: 1_000\nh: .5\ni: 'null'\nj: \"\"\n"
    data = load_document(text, file="p.yaml").data
    assert data == {
        "a": "12:30",
        "b": "010",
        "c": "1e3",
        "d": "yes",
        "e": "2026-12-01",
        "f": "0x1F",
        "g": "1_000",
        "h": ".5",
        "i": "null",
        "j": "",
    }


@pytest.mark.parametrize("nothing", ["null", "~", "Null", "NULL", ""])
def test_only_a_plain_null_is_nothing(nothing):
    assert load_document(f"a: {nothing}\nb: 1\n", file="p.yaml").data == {"a": None, "b": "1"}


def test_every_part_knows_its_line():
    text = "a: 1\nb:\n  - x\n  - {c: 2,\n     d: 3}\n"
    document = load_document(text, file="p.yaml")
    assert [document.line(path) for path in (("a",), ("b", 0), ("b", 1, "d"), ("b", 7), ("z",))] == [
        1,
        3,
        5,
        2,
        1,
    ]
    assert document.line(("b", 1, "c")) == 4


def test_a_path_is_written_as_people_read_it():
    assert where(("readings", 2, "value", 0)) == "readings[2].value[0]"


@pytest.mark.parametrize(
    ("text", "line", "given"),
    [
        ("a: 1\nb: 2\na: 3\n", 3, "a twice"),
        ("a: {b: 1, b: 2}\n", 1, "b twice"),
        ("a: &x [1]\nb: *x\n", 1, "anchor &x"),
        ("a: 1\nb: *x\n", 2, "alias *x"),
        ("a: !!python/object/apply:os.system [ls]\n", 1, "tag tag:yaml.org,2002:python/object/apply:o"),
        ("a: !!str 1\n", 1, "tag tag:yaml.org,2002:str"),
        ("a: !own 1\n", 1, "tag !own"),
        ("? [a, b]\n: 1\n", 1, "a list or mapping as a field name"),
        ("? {a: b}\n: 1\n", 1, "a list or mapping as a field name"),
        ("a: 1\n---\nb: 2\n", 2, "a second document"),
        ("a: 1\nb: \x00\n", 2, "control character U+0000"),
        ("a: \x1b[31m\n", 1, "control character U+001B"),
        ('a: 1\nb: "\\e[31m"\n', 2, "control character U+001B"),
        ('a: "\\u202e"\n', 1, "control character U+202E"),
        ("a: {b\n", 2, "did not find expected ',' or '}'"),
        ("a: b: c\n", 1, "mapping values are not allowed in this context"),
        ("a:\n\t- b\n", 2, "found character that cannot start any token"),
        ("a: 'b\n", 2, "found unexpected end of stream"),
        ("[" * 30 + "]" * 30, 1, "nested deeper than 20"),
    ],
)
def test_what_is_not_allowed_is_one_problem_with_its_line(text, line, given):
    problem = refusal(text)
    assert (problem.file, problem.line) == ("p.yaml", line)
    assert problem.given.startswith(given)
    assert problem.allowed


def test_a_deep_bomb_is_refused_without_recursion():
    assert refusal("[" * 500_000).given
    assert refusal("{a: " * 200_000).given
    assert refusal("- " * 400_000).given


def test_a_wide_bomb_is_refused_at_the_limit():
    assert refusal("[" + "a," * 30_000 + "]").given == "more than 20000 entries"
    assert refusal("[a, a, a]", nodes=3).given == "more than 3 entries"


def test_a_long_document_is_refused():
    assert refusal("a" * 2000, bytes=1000).given == "longer than 1000 characters"


def test_without_the_compiled_parser_the_same_things_are_refused(monkeypatch):
    monkeypatch.setattr("calc.safe_yaml._LOADER", yaml.SafeLoader)
    assert load_document("a: 12:30\nb: [1, null]\n", file="p.yaml").data == {"a": "12:30", "b": ["1", None]}
    assert refusal("[" * 50_000).given == "nested deeper than 20"
    assert refusal("a: &x 1\n").given == "anchor &x"
    assert refusal("a: {b\n").line is not None


def test_the_limits_can_be_set():
    assert load_document("[[[1]]]", file="p", limits=Limits(depth=3)).data == [[["1"]]]
    assert refusal("[[[1]]]", depth=2).given == "nested deeper than 2"


def test_a_byte_order_mark_is_no_text(tmp_path):
    path = tmp_path / "s.yaml"
    path.write_bytes(b"\xef\xbb\xbfa: 1\n")
    assert read_document(path).data == {"a": "1"}


@pytest.mark.parametrize(
    ("content", "line", "given", "allowed"),
    [
        ("a: 1\n".encode("utf-16"), None, "UTF-16 text", "text saved as UTF-8"),
        (b"a: 1\nb: \xff\n", 2, "byte 0xff", "text saved as UTF-8"),
        (b"a" * 1_000_001, None, "longer than 1000000 bytes", "at most 1000000 bytes"),
    ],
)
def test_bytes_that_are_no_text_are_refused(tmp_path, content, line, given, allowed):
    path = tmp_path / "s.yaml"
    path.write_bytes(content)
    with pytest.raises(InputError) as refused:
        read_document(path)
    (problem,) = refused.value.problems
    assert (problem.line, problem.given, problem.allowed) == (line, given, allowed)


def test_a_missing_file_and_a_folder_are_told_apart(tmp_path):
    for path, says in (
        (tmp_path / "no.yaml", "no such file"),
        (tmp_path, "this is a folder"),
        ("a\0b", "no path of a file"),
    ):
        with pytest.raises(InputError) as refused:
            read_document(path)
        assert refused.value.problems[0].given == says


@given(st.text(max_size=300))
def test_any_text_is_plain_data_or_one_problem(text):
    try:
        load_document(text, file="p.yaml")
    except InputError as refused:
        assert len(refused.problems) == 1


PLAIN = st.recursive(
    st.none() | st.text(alphabet=st.characters(codec="utf-8", exclude_categories=["C", "Z"]), max_size=12),
    lambda inner: (
        st.lists(inner, max_size=4)
        | st.dictionaries(st.text("abcdef", min_size=1, max_size=5), inner, max_size=4)
    ),
    max_leaves=20,
)


@given(PLAIN)
def test_what_another_program_writes_is_read_as_it_was(data):
    text = yaml.safe_dump(data, allow_unicode=True)
    assert load_document(text, file="p.yaml").data == data


YAML_LIKE = st.text(alphabet="ab:-{}[],&*!|>'\"#%@ \n\t?~<", max_size=60)


@given(YAML_LIKE)
def test_any_heap_of_yaml_signs_is_plain_data_or_one_problem(text):
    try:
        load_document(text, file="p.yaml")
    except InputError as refused:
        assert len(refused.problems) == 1
