"""Places of key paths: worked out by hand for TOML, by generated trees for JSON."""

from __future__ import annotations

import json
import re
import tomllib
from itertools import count

import pytest
from hypothesis import given
from hypothesis import strategies as st

from screener.files.locate import position, repeated_keys

TOML = '''\
title = "é" # a comment
"q.r" = {x = 1, y.z = [1, 2, {k = 3}]}
site . 'the altitude' = 5
long = """
two
lines"""
[units]
flow = "m³/h"

[system.table]
flow = [ # é = [9]
  0, # first
  100,
]
[[level]]
name = "low"
[level.loss]
head = 1
[[level]]
name = "high"
[[level.probe]]
n = 1
[[level.probe]]
n = 2
[ system ]
  friction = [ { head = 22 }, { head = -1, at_flow = 3e3 } ]
[last]'''


@pytest.mark.parametrize(
    ("path", "place"),
    [
        ((), (1, 1)),
        (("title",), (1, 9)),
        (("q.r",), (2, 9)),
        (("q.r", "x"), (2, 14)),
        (("q.r", "y"), (2, 23)),
        (("q.r", "y", "z", 1), (2, 27)),
        (("q.r", "y", "z", 2, "k"), (2, 35)),
        (("site",), (3, 25)),
        (("site", "the altitude"), (3, 25)),
        (("long",), (4, 8)),
        (("units",), (7, 1)),
        (("units", "flow"), (8, 8)),
        (("system",), (25, 1)),
        (("system", "table"), (10, 1)),
        (("system", "table", "flow"), (11, 8)),
        (("system", "table", "flow", 0), (12, 3)),
        (("system", "table", "flow", 1), (13, 3)),
        (("level",), (15, 1)),
        (("level", 0), (15, 1)),
        (("level", 0, "name"), (16, 8)),
        (("level", 0, "loss"), (17, 1)),
        (("level", 0, "loss", "head"), (18, 8)),
        (("level", 1), (19, 1)),
        (("level", 1, "name"), (20, 8)),
        (("level", 1, "probe"), (21, 1)),
        (("level", 1, "probe", 0, "n"), (22, 5)),
        (("level", 1, "probe", 1), (23, 1)),
        (("level", 1, "probe", 1, "n"), (24, 5)),
        (("system", "friction"), (26, 14)),
        (("system", "friction", 1), (26, 31)),
        (("system", "friction", 1, "head"), (26, 40)),
        (("last",), (27, 1)),
    ],
)
def test_toml(path, place):
    tomllib.loads(TOML)
    assert position(TOML, ".toml", path) == place
    windows = TOML.replace("\n", "\r\n")
    assert position(windows, ".toml", path) == place


@pytest.mark.parametrize(
    ("path", "place"),
    [
        (("nothing", "here"), (1, 1)),
        (("units", "hed"), (7, 1)),
        (("title", "deeper", 3), (1, 9)),
        (("level", 7, "name"), (15, 1)),
        (("level", 1, "static_head"), (19, 1)),
        (("system", "friction", 0, "at_flow"), (26, 16)),
    ],
)
def test_what_is_missing_in_toml_is_at_its_nearest_parent(path, place):
    assert position(TOML, ".toml", path) == place


JSON = '{"é": [1, {"a b": "x"}],\n\t"\\u00e9b": {"c": [[], [null, 2.5]]}, "": {}}\n'


@pytest.mark.parametrize(
    ("path", "place"),
    [
        ((), (1, 1)),
        (("é",), (1, 7)),
        (("é", 1, "a b"), (1, 19)),
        (("éb",), (2, 13)),
        (("éb", "c", 1, 1), (2, 31)),
        (("",), (2, 43)),
        (("nothing",), (1, 1)),
        (("éb", "x", "y"), (2, 13)),
        (("éb", "c", 2), (2, 19)),
        (("éb", "c", "c"), (2, 19)),
        (("é", 0, 0), (1, 8)),
    ],
)
def test_json(path, place):
    json.loads(JSON)
    assert position(JSON, ".json", path) == place


def leaves(tree, path=()):
    if isinstance(tree, int):
        yield path, tree
    else:
        for key, inner in tree.items() if isinstance(tree, dict) else enumerate(tree):
            yield from leaves(inner, (*path, key))


def numbered(tree, numbers):
    """The same tree with another number at each leaf, so that a place tells which leaf it is."""
    if isinstance(tree, dict):
        return {key: numbered(inner, numbers) for key, inner in tree.items()}
    return [numbered(inner, numbers) for inner in tree] if isinstance(tree, list) else next(numbers)


TREES = st.recursive(
    st.just(0),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=4), inner, max_size=4),
    max_leaves=20,
)


@given(
    tree=st.dictionaries(st.text(max_size=4), TREES),
    indent=st.sampled_from([None, 1, "\t"]),
    ascii=st.booleans(),
)
def test_json_of_any_shape(tree, indent, ascii):
    tree = numbered(tree, count(10_000))
    text = json.dumps(tree, indent=indent, ensure_ascii=ascii)
    lines = text.split("\n")
    for path, number in leaves(tree):
        line, column = position(text, ".json", path)
        assert re.match(r"\d+", lines[line - 1][column - 1 :])[0] == str(number)


@given(tree=st.dictionaries(st.text(alphabet="ab.é \"'\\", max_size=3), TREES))
def test_toml_of_any_inline_shape(tree):
    def inline(tree):
        if isinstance(tree, dict):
            return "{" + ", ".join(f"{json.dumps(k)} = {inline(v)}" for k, v in tree.items()) + "}"
        return "[" + ", ".join(map(inline, tree)) + "]" if isinstance(tree, list) else str(tree)

    tree = numbered(tree, count(10_000))
    text = "".join(f"{json.dumps(key)} = {inline(inner)}\n" for key, inner in tree.items())
    try:
        same = tomllib.loads(text) == tree
    except tomllib.TOMLDecodeError:  # a control character or half a pair, which JSON escapes in its own way
        return
    assert same
    for path, number in leaves(tree):
        line, column = position(text, ".toml", path)
        assert text.split("\n")[line - 1][column - 1 :].startswith(str(number))


def test_keys_given_again_are_found_in_the_order_of_the_text():
    text = '{"a": {"b": 1,\n"b": 2}, "c": [{"d": 1}, {"d": 1,\n "d": 2}], "a": 0}'
    assert repeated_keys(text) == [("b", (2, 1)), ("d", (3, 2)), ("a", (3, 12))]
    assert repeated_keys('{"a": {"a": 1}, "b": [{"a": 1}, {"a": 2}]}') == []
