"""Schema differences in plain words, on a small schema of these tests' own."""

from __future__ import annotations

import json

import jsonschema_rs
import pytest

from screener.files import document, schema, shipped

LOSS = {
    "type": "object",
    "additionalProperties": False,
    "required": ["head", "at_flow"],
    "properties": {"head": {"type": "number"}, "at_flow": {"type": "number"}},
}
SMALL = {
    "$schema": "https://json-schema.org/draft/2020-12/schema",
    "type": "object",
    "additionalProperties": False,
    "required": ["format"],
    "properties": {
        "format": {"const": "small/1"},
        "date": {"type": "string", "pattern": "^[0-9]{4}$", "description": "year, as in 2024"},
        "title": {"type": "string", "minLength": 3},
        "count": {"type": "integer", "minimum": 1, "maximum": 4},
        "speed": {"type": ["number", "string"], "exclusiveMinimum": 0, "exclusiveMaximum": 9000},
        "kind": {"enum": ["throttled", "open"]},
        "flow": {"type": "array", "minItems": 2, "maxItems": 3, "items": {"type": ["number", "null"]}},
        "loss": {"anyOf": [{"$ref": "#/$defs/loss"}, {"type": "array", "items": {"$ref": "#/$defs/loss"}}]},
        "curve": {
            "oneOf": [
                {"type": "object", "required": ["pump"], "properties": {"pump": {"type": "string"}}},
                {"type": "object", "required": ["flow", "head"], "properties": {"flow": {"type": "array"}}},
            ]
        },
        "running": {"oneOf": [{"type": "string"}, {"type": "array"}, {"type": ["integer", "null"]}]},
        "even": {"multipleOf": 2},
        "none": {"type": "object", "additionalProperties": False},
        "notes": {},
    },
    "if": {"required": ["speed"]},
    "then": {"required": ["count"]},
    "$defs": {"loss": LOSS},
}


@pytest.fixture
def said(tmp_path, monkeypatch):
    """Check a text against the small schema; what is said of it."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "small.schema.json").write_text(json.dumps(SMALL))
    monkeypatch.setattr(shipped, "path", lambda *parts: tmp_path / parts[-1])

    def said(text, name="a.toml"):
        (tmp_path / name).write_text(text)
        return [str(problem) for problem in schema.check(document.load(name), "small")]

    return said


@pytest.mark.parametrize(
    "text",
    [
        "",
        'title = "abc"\ncount = 4\nspeed = "1480 rpm"',
        "flow = [1, 2.5]",
        "loss = {head = 1, at_flow = 2}",
        "loss = [{head = 1, at_flow = 2}]",
        'curve = {pump = "x"}',
        "[notes]\nany.thing = [{}, 2024-05-01]",
    ],
)
def test_what_conforms_gives_no_problem(said, text):
    assert said('format = "small/1"\n' + text) == []


@pytest.mark.parametrize(
    ("text", "problem"),
    [
        (
            'titel = "abc"',
            "9  unknown key 'titel'  (did you mean 'title'? one of format, date, title, count, ",
        ),
        ("zzzz = 1", "8  unknown key 'zzzz'  (one of format, date, title, count, "),
        ("none.x = 1", "10  unknown key 'x'  (nothing is allowed here)"),
        ("title = 5", "9  must be text, not 5"),
        ("title = true", "9  must be text, not true"),
        ("title = [1]", "9  must be text, not a list"),
        ("title = {}", "9  must be text, not a table"),
        ("title = 2024-05-01", "9  must be text, not the date or time 2024-05-01  (put it in quotes)"),
        ('title = "é"', "9  needs text of at least 3 characters, has 1"),
        ("date = 2024", "8  must be text, not 2024"),
        ('date = "24"', '8  "24" is not written as it should be  (year, as in 2024)'),
        (f'date = "{"9" * 99}"', f'8  "{"9" * 56}... is not written as it should be  (year, as in 2024)'),
        ("count = 0", "9  must be at least 1, not 0"),
        ("count = 5", "9  must be at most 4, not 5"),
        ("count = 1.5", "9  must be a whole number, not 1.5"),
        ("count = 1\nspeed = []", "9  must be a number or text, not a list"),
        ("count = 1\nspeed = 0", "9  must be above 0, not 0"),
        ("count = 1\nspeed = 9000", "9  must be below 9000, not 9000"),
        ('kind = "opn"', "8  unknown value \"opn\"  (did you mean 'open'? one of throttled, open)"),
        ("kind = 7", "8  unknown value 7  (one of throttled, open)"),
        ("flow = [1]", "8  needs a list of at least 2, has 1"),
        ("flow = [1, 2, 3, 4]", "8  needs a list of at most 3, has 4"),
        ('flow = [1, "x"]', '12  must be a number or null, not "x"'),
        ("loss = 5", "8  must be a table or a list, not 5"),
        ("loss = {head = 1}", "8  'at_flow' is missing"),
        ("loss = {head = 1, at_flow = 2, exponnt = 2}", "42  unknown key 'exponnt'  (one of head, at_flow)"),
        ('loss = [{head = 1, at_flow = 2}, {head = "1", at_flow = 2}]', '42  must be a number, not "1"'),
        (
            'curve = {pump = "x", flow = [], head = []}',
            "9  fits more than one of the allowed forms  (give one)",
        ),
        ("curve = {pomp = 1}", "9  'pump' is missing"),
        ("curve = {flow = 1, head = []}", None),
        ("running = true", "11  must be text or a list or a whole number or null, not true"),
        ("even = 3", "8  3 is not a multiple of 2"),
    ],
)
def test_each_difference_in_plain_words(said, text, problem):
    found = said('format = "small/1"\n' + text)
    assert len(found) == 1
    if problem:
        line = 3 if "\n" in text else 2
        assert found[0].startswith(f"a.toml:{line}:{problem}")


def test_every_difference_is_said_once_in_the_order_of_the_file(said):
    assert said(
        '{"title": 1,\n "loss": [{}, {"head": 2, "at_flow": null}],\n "speed": 5, "kin": 0}', "a.json"
    ) == [
        "a.json:1:1  'count' is missing",
        "a.json:1:1  'format' is missing",
        "a.json:1:11  must be text, not 1",
        "a.json:2:11  'at_flow' is missing",
        "a.json:2:11  'head' is missing",
        "a.json:2:38  must be a number, not null",
        "a.json:3:21  unknown key 'kin'  (did you mean 'kind'? one of "
        + ", ".join(SMALL["properties"])
        + ")",
    ]


def test_the_wrong_format_is_named(said):
    assert said('format = "small/2"') == ['a.toml:1:10  must be "small/1", not "small/2"']


def test_the_quick_validator_may_only_accept(said, monkeypatch):
    class Refuses:
        def __init__(self, rules):
            assert rules == SMALL

        def is_valid(self, data):
            return False

    class Breaks(Refuses):
        def is_valid(self, data):
            raise ValueError("beyond me")

    for validator in (Refuses, Breaks):
        monkeypatch.setattr(jsonschema_rs, "Draft202012Validator", validator)
        schema._quick.cache_clear()
        assert said('format = "small/1"') == []
        assert said("format = 1") == ['a.toml:1:10  must be "small/1", not 1']
    schema._quick.cache_clear()


def test_a_good_file_never_reaches_the_slow_validator(said, monkeypatch):
    monkeypatch.setattr(schema, "_thorough", None)
    assert said('format = "small/1"') == []
