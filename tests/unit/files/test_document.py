"""Reading files: what is read, and every way in which a file is refused, with its place."""

from __future__ import annotations

import gc

import pytest

from screener.errors import InputError
from screener.files import document


@pytest.fixture
def load(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)

    def load(name, content):
        (tmp_path / name).write_bytes(content if isinstance(content, bytes) else content.encode())
        return document.load(name)

    return load


def problems(load, name, content):
    with pytest.raises(InputError) as caught:
        load(name, content)
    return [str(problem) for problem in caught.value.problems]


def test_toml_and_json_give_the_same_tree(load):
    tree = {"title": "é", "pump": [{"flow": [0, 1.5]}, {"flow": []}]}
    toml = load("case.toml", 'title = "é"\n[[pump]]\nflow = [0, 1.5]\n[[pump]]\nflow = []\n')
    json = load("case.JSON", '{"title": "\\u00e9", "pump": [{"flow": [0, 1.5]}, {"flow": []}]}')
    assert toml.data == tree
    assert json.data == tree
    assert toml.path == "case.toml"
    assert toml.text.startswith("title")


@pytest.mark.parametrize("name", ["a.toml", "a.json"])
def test_a_byte_order_mark_and_windows_lines_are_read(load, name):
    text = "a = 1\r\nb = 2\r\n" if name.endswith("toml") else '{"a": 1,\r\n"b": 2}\r\n'
    found = load(name, "\ufeff".encode() + text.encode())
    assert found.data == {"a": 1, "b": 2}
    assert found.problem(("b",), "x").line == 2
    assert found.problem(("a",), "x").line == 1


def test_a_problem_stands_at_the_value(load):
    case = load("case.toml", 'title = "é"\nname = ["é", 7]\n')
    assert str(case.problem(("name", 1), "is odd", "say 8")) == "case.toml:2:14  is odd  (say 8)"


@pytest.mark.parametrize(
    ("name", "content", "said"),
    [
        (
            "a.txt",
            "a = 1",
            "a.txt  is neither TOML nor JSON by its name  (a file that ends in .toml or .json)",
        ),
        ("a.toml", "", "a.toml  is empty"),
        ("a.json", " \n\t\n", "a.json  is empty"),
        ("a.toml", b"a = 1\nb = 'caf\xe9'", "a.toml:2:9  is not UTF-8 text  (save it as UTF-8)"),
        ("a.json", b'\xef\xbb\xbf{"\xff": 1}', "a.json:1:3  is not UTF-8 text  (save it as UTF-8)"),
        ("a.json", '{"a": 1,\n "b" 2}', "a.json:2:6  not JSON: Expecting ':' delimiter"),
        ("a.json", '{"é": 1} 2', "a.json:1:10  not JSON: Extra data"),
        (
            "a.toml",
            'a = 1\nb = "é" x',
            "a.toml:2:9  not TOML: Expected newline or end of document after a statement",
        ),
        ("a.toml", "a = 1\nb =", "a.toml:2:4  not TOML: Invalid value"),
        ("a.toml", 'a = 1\nb = "x', "a.toml:2:7  not TOML: Unterminated string"),
        ("a.toml", "a = 2024-02-31", "a.toml:1:5  not TOML: Invalid date or datetime"),
        ("a.toml", "a = 1\na = 2", "a.toml:2:6  not TOML: Cannot overwrite a value"),
        ("a.json", "[1, 2]", "a.json:1:1  the top level is not an object  ({ ... })"),
        ("a.json", "\n 1e999", "a.json:2:2  the top level is not an object  ({ ... })"),
        ("a.json", "[" * 100_000, "a.json  is nested too deeply"),
        ("a.json", '{"a":' * 100_000, "a.json  is nested too deeply"),
        ("a.toml", "a = " + "[" * 100_000, "a.toml  is nested too deeply"),
        ("a.json", '{"a": 1,\n"b": ' + "9" * 5000 + "}", "a.json:2:6  a number has too many digits"),
        ("a.toml", "a = 1\nb = " + "9" * 5000, "a.toml:2:5  a number has too many digits"),
    ],
    ids=range(19),
)
def test_what_cannot_be_read_at_all_is_one_problem(load, name, content, said):
    assert problems(load, name, content) == [said]


def test_a_missing_file_and_a_folder_are_named(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "folder.json").mkdir()
    with pytest.raises(InputError, match=r"^none\.toml  cannot be read: No such file or directory$"):
        document.load("none.toml")
    with pytest.raises(InputError, match=r"^folder\.json  cannot be read: Is a directory$"):
        document.load(tmp_path.joinpath("folder.json").relative_to(tmp_path))


def test_every_number_that_float64_cannot_hold_is_a_problem_at_its_place_in_json(load):
    content = '{"NaN é": "Infinity", "a": NaN,\n "b": [-Infinity, 1, {"c": 1e999}],\n "d": '
    content += "9" * 400 + ', "e": 1.7e308, "f": [-' + "1" * 310 + "]}"
    large = "the number is too large  (at most 1.8e308)"
    assert problems(load, "a.json", content) == [
        "a.json:1:28  NaN is not a value  (at most 1.8e308)",
        f"a.json:2:8  {large}",
        f"a.json:2:28  {large}",
        f"a.json:3:7  {large}",
        f"a.json:3:429  {large}",
    ]


def test_every_number_that_float64_cannot_hold_is_a_problem_at_its_place_in_toml(load):
    content = "a = nan\nb = [1, -inf]\n[[c]]\n[[c]]\nd = {e = 1e999, f = 1_" + "0" * 320 + "}\n"
    large = "the number is too large  (at most 1.8e308)"
    assert problems(load, "a.toml", content) == [
        "a.toml:1:5  NaN is not a value  (at most 1.8e308)",
        f"a.toml:2:9  {large}",
        f"a.toml:5:10  {large}",
        f"a.toml:5:21  {large}",
    ]


def test_every_key_given_twice_in_json_is_a_problem_at_its_second_place(load):
    content = '{"a": 1, "b": {"c": 1,\n "\\u0063": 2, "d": 3},\n "é": [{"x": 1, "x": 1, "x": 2}], "a": 4}'
    assert problems(load, "a.json", content) == [
        "a.json:2:2  'c' is given twice  (keep one)",
        "a.json:3:17  'x' is given twice  (keep one)",
        "a.json:3:25  'x' is given twice  (keep one)",
        "a.json:3:35  'a' is given twice  (keep one)",
    ]


def test_every_sort_of_problem_is_said_at_once(load):
    assert problems(load, "a.json", '{"a": 1e999,\n "b": ["\\ud83d", "\\ud83d\\ude00"],\n "a": NaN}') == [
        "a.json:2:8  the text has half a character  (write surrogates in pairs)",
        "a.json:3:2  'a' is given twice  (keep one)",
        "a.json:3:7  NaN is not a value  (at most 1.8e308)",
    ]


def test_nesting_has_a_limit_that_leaves_room_for_every_later_step(load):
    assert load("a.json", '{"a":' + "[" * 100 + "]" * 100 + "}").data
    deep = '{"a":\n' + "[" * 101 + "]" * 101 + "}"
    assert problems(load, "a.json", deep) == ["a.json:2:101  is nested too deeply  (at most 100 levels)"]
    deep = '{"a":' * 600 + "1" + "}" * 600
    assert problems(load, "a.json", deep) == ["a.json:1:506  is nested too deeply  (at most 100 levels)"]


def test_the_collector_is_on_again_after_good_and_bad_files(load):
    load("a.json", "{}")
    assert gc.isenabled()
    problems(load, "a.json", "{")
    assert gc.isenabled()
