"""screener operation: its options, its json against the schema, its csv, and its width."""

from __future__ import annotations

import csv
import io
import json
import re
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from screener.changes.combination import BREACHES
from screener.files import shipped

Screener = Callable[..., Any]
SCHEMA = json.loads(shipped.path("catalog_schema", "operation.schema.json").read_text(encoding="utf-8"))


@pytest.fixture(scope="module")
def shown() -> dict[tuple[str, str], str]:
    return {}


@pytest.fixture
def show(screener: Screener, plant: Path, shown: dict[tuple[str, str], str]) -> Callable[..., str]:
    """What the command says about the plant, of a pump and in a format; each is run once."""

    def say(pump: str, format: str) -> str:
        if (pump, format) not in shown:
            result = screener("operation", plant / "case.toml", *pump.split(), "--format", format)
            assert (result.code, result.err) == (0, "")
            shown[pump, format] = result.out
        return shown[pump, format]

    return say


@pytest.mark.parametrize("pump", ["", "A"])
def test_json_conforms(pump: str, show: Callable[..., str]) -> None:
    data = json.loads(show(pump, "json"), parse_constant=lambda word: pytest.fail(f"{word} in the json"))
    assert [error.message for error in Draft202012Validator(SCHEMA).iter_errors(data)] == []
    assert [item["file"] for item in data["inputs"]] == ["case.toml", "pumps.json"]
    assert data["pump"] == (pump or None)
    data["duties"][0]["surprise"] = 1
    assert len(list(Draft202012Validator(SCHEMA).iter_errors(data))) == 1


def _tables(node: object) -> Iterator[dict[str, Any]]:
    if isinstance(node, dict):
        if "properties" in node:
            yield node
        for value in node.values():
            yield from _tables(value)
    elif isinstance(node, list):
        for value in node:
            yield from _tables(value)


def test_the_schema_describes_every_property_and_allows_no_other() -> None:
    Draft202012Validator.check_schema(SCHEMA)
    for table in _tables(SCHEMA):
        assert table["additionalProperties"] is False
        assert set(table["required"]) == set(table["properties"])
        for key, rule in table["properties"].items():
            told = rule if "description" in rule else SCHEMA["$defs"][rule["$ref"].split("/")[-1]]
            assert told["description"].endswith("."), key
            if "number" in rule.get("type", ()):
                assert re.search(r"in the unit named |\[[^\]]+\]", told["description"]), key
    assert {b.word for b in BREACHES} == set(SCHEMA["$defs"]["outside"]["properties"]["word"]["enum"])


def test_what_it_shares_with_the_header_is_the_same_there() -> None:
    other = json.loads(shipped.path("catalog_schema", "header.schema.json").read_text(encoding="utf-8"))
    for key in ("tool", "input", "units", "limit"):
        assert SCHEMA["$defs"][key] == other["$defs"][key]


def test_csv_is_the_table_of_duties(show: Callable[..., str]) -> None:
    rows = list(csv.DictReader(io.StringIO(show("A", "csv"))))
    duties = json.loads(show("A", "json"))["duties"]
    assert [row["duty"] for row in rows] == ["day", "night"]
    for row, duty in zip(rows, duties, strict=True):
        best = duty["cheapest"] or duty["least_outside"]
        assert (row["asked"], row["cheapest"]) == (duty["asked"]["running"], best["running"])
        assert float(row["cheapest_power [kW]"]) == best["power"]
        assert float(row["hours [h/y]"]) == duty["hours"]


def test_without_a_pump_nothing_new_runs(show: Callable[..., str]) -> None:
    data = json.loads(show("", "json"))
    assert [row["running"] for row in data["map"]["combinations"]] == ["P-1"]
    assert (data["diameter"], data["motor"]) == (None, None)
    assert [duty["asked"]["running"] for duty in data["duties"]] == ["P-1", "P-1"]
    assert "new" not in show("", "csv").partition("\n")[2]


@pytest.mark.parametrize("pump", ["", "A"])
def test_it_fits_80_columns(
    pump: str, screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    lines = screener("operation", plant / "case.toml", *pump.split()).out.splitlines()
    assert max(map(len, lines)) <= 80
    assert not any("did not fit" in line for line in lines)
    assert ("THE SAME WITHOUT THE NEW PUMP" in lines) == bool(pump)
    assert any(line.startswith("OPERATING MAP") for line in lines)


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("AB",), 'there is no pump "AB" in the catalog'),
        (("--diameter", "200"), "--diameter is of a new pump"),
        (("A", "--diameter", "500"), "180 to 210 mm"),
        (("A", "--diameter", "wide"), "--diameter"),
        (("--format", "yaml"), 'unknown format "yaml"'),
    ],
)
def test_a_wrong_command_line_is_2(
    arguments: tuple[str, ...], said: str, screener: Screener, plant: Path
) -> None:
    result = screener("operation", plant / "case.toml", *arguments)
    assert (result.code, result.out) == (2, "")
    assert said in result.err


def test_a_diameter_is_taken(screener: Screener, plant: Path) -> None:
    result = screener("operation", plant / "case.toml", "A", "--diameter", "200 mm", "--format", "json")
    assert json.loads(result.out)["diameter"] == 200.0
