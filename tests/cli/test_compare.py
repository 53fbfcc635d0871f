"""screener compare: which pumps it takes, its schema, its width, names that act on nothing, exit codes."""

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

from screener.files import shipped

Screener = Callable[..., Any]
SCHEMA = json.loads(shipped.path("catalog_schema", "comparison.schema.json").read_text(encoding="utf-8"))
HOSTILE = ("=1+1", "[/red]\x1b[2J", "two\nlines", "long" * 75, "a|b@210mm", "揚水ポンプ" * 20)
THREE = ("250-500-6 M", "200-400-4 D", "200-400-4 K")
"""Pumps of the demo plant: two that pass, and one that its check valve holds shut."""


@pytest.fixture(scope="module")
def shown() -> dict[str, str]:
    return {}


@pytest.fixture
def show(screener: Screener, plant: Path, shown: dict[str, str]) -> Callable[[str], str]:
    """Five pumps in a format; each is made once."""

    def say(format: str) -> str:
        if format not in shown:
            result = screener("compare", plant / "case.toml", "A", "A@210", "C", "D", "E", "--format", format)
            assert (result.code, result.err) == (0, "")
            shown[format] = result.out
        return shown[format]

    return say


def test_json_conforms(show: Callable[[str], str]) -> None:
    data = json.loads(show("json"), parse_constant=lambda word: pytest.fail(f"{word} in the json"))
    assert [error.message for error in Draft202012Validator(SCHEMA).iter_errors(data)] == []
    assert [item["pump"] for item in data["candidates"]] == ["A", "A", "C", "D", "E"]
    assert [item["diameter"] for item in data["candidates"]] == [196.0, 210.0, 196.0, 196.0, None]
    data["rows"][0]["surprise"] = 1
    assert len(list(Draft202012Validator(SCHEMA).iter_errors(data))) == 1


def _tables(node: object) -> Iterator[dict[str, Any]]:
    if isinstance(node, dict):
        if "properties" in node:
            yield node
        for value in node.values():
            yield from _tables(value)


def test_the_schema_describes_every_property_and_allows_no_other() -> None:
    Draft202012Validator.check_schema(SCHEMA)
    assert SCHEMA["properties"]["format"]["const"] == "pump-comparison/1"
    for table in _tables(SCHEMA):
        assert table["additionalProperties"] is False
        assert set(table["required"]) == set(table["properties"])
        for key, rule in table["properties"].items():
            told = rule if "description" in rule else SCHEMA["$defs"][rule["$ref"].split("/")[-1]]
            assert told["description"].endswith("."), key
            if "number" in rule.get("type", ()):
                assert re.search(r"in the unit named |\[[^\]]+\]", told["description"]), key


def test_what_it_shares_with_others_is_the_same_there() -> None:
    for name in ("explanation", "datasheet"):
        text = shipped.path("catalog_schema", f"{name}.schema.json").read_text(encoding="utf-8")
        for key, rule in json.loads(text)["$defs"].items():
            assert SCHEMA["$defs"].get(key, rule) == rule, key


def test_csv_is_the_rows_of_the_json(show: Callable[[str], str]) -> None:
    rows = list(csv.DictReader(io.StringIO(show("csv"))))
    for row, item in zip(rows, json.loads(show("json"))["rows"], strict=True):
        plain = {re.sub(r" \[[^\]]+\]$", "", key): value for key, value in row.items()}
        assert plain == {key: "" if value is None else str(value) for key, value in item.items()}


@pytest.mark.parametrize("width", [80, 100, 160])
def test_three_pumps_of_the_demo_are_readable(
    width: int, screener: Screener, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", str(width))
    result = screener("compare", shipped.demo("osier-bank", "case.toml"), *THREE)
    lines = result.out.splitlines()
    assert result.code == 0
    assert max(map(len, lines)) <= width
    assert [line for line in lines if "…" in line or line != line.rstrip()] == []
    titles = [line for line in lines if "250-500-6 M" in line]
    assert len(titles) == 4  # who, requirements, figures, firm flow
    assert all(all(pump in line for pump in THREE) for line in titles)
    assert titles[1].count("off by") == {80: 0, 100: 2, 160: 3}[width]
    (shut,) = (line for line in lines if line.startswith("flow, % of minimum"))
    assert shut.split()[-1 - (width == 160)] == "0.0"


def test_eight_pumps_lose_columns_not_their_order(
    screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    pumps = [f"A@{size}mm" for size in range(203, 211)]
    case = plant / "case.toml"
    result = screener("compare", case, *pumps)
    lines = result.out.splitlines()
    assert max(map(len, lines)) <= 80
    (sizes,) = (line for line in lines if line.startswith("impeller, mm"))
    assert sizes.split()[2:5] == ["203", "204", "205"]


def test_an_at_sign_may_belong_to_the_id(screener: Screener, plant: Path) -> None:
    pumps = plant / "pumps" / "pumps.json"
    pumps.write_text(pumps.read_text().replace('"id": "C"', '"id": "C@200mm"'))
    case = plant / "case.toml"
    data = json.loads(screener("compare", case, "C@200mm", "C@200mm@20 cm", "A", "--format", "json").out)
    assert [item["pump"] for item in data["candidates"]] == ["C@200mm", "C@200mm", "A"]
    assert [item["diameter"] for item in data["candidates"]] == [196.0, 200.0, 196.0]


@pytest.mark.parametrize("format", ["table", "json", "csv", "markdown"])
def test_names_act_on_nothing(
    format: str, screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from screener.export.terminal import _length

    pumps = plant / "pumps" / "pumps.json"
    catalog = json.loads(pumps.read_text())
    catalog["pumps"] += [{**catalog["pumps"][0], "id": name} for name in HOSTILE]
    pumps.write_text(json.dumps(catalog))
    case = plant / "case.toml"
    case.write_text(case.read_text().replace('"night"', json.dumps(HOSTILE[3])))
    monkeypatch.setenv("COLUMNS", "80")
    result = screener("compare", case, *HOSTILE, "--format", format)
    assert (result.code, result.err) == (0, "")
    assert {c for c in result.out if not c.isprintable()} <= {"\n"}
    if format == "table":
        assert max(map(_length, result.out.splitlines())) <= 80
    elif format == "csv":
        rows = list(csv.reader(io.StringIO(result.out)))
        assert {len(row) for row in rows} == {14}
        assert not [cell for row in rows for cell in row if re.match(r"\s*[=@]", cell)]
    elif format == "json":
        assert [item["pump"] for item in json.loads(result.out)["candidates"]] == list(HOSTILE)
    else:
        assert not re.search(r"[<>`\[\]]", re.sub(r"\\[^\w\s]", "", result.out))


@pytest.mark.parametrize(
    ("pumps", "said"),
    [
        (("A",), "1 pump to compare (2 to 8)"),
        (("A",) * 9, "9 pumps to compare (2 to 8)"),
        (("A", "AB"), 'there is no pump "AB" in the catalog'),
        (("A", "a"), "did you mean A?"),
        (("A", "A@300mm"), "A is offered from 180 to 210 mm"),
        (("A", "A@wide"), "A@wide: "),
        (("A", "A@"), "A@: "),
        (("A", "F@200mm"), 'there is no pump "F" in the catalog'),
        (("A", "E@200mm"), "E states no diameter"),
        (("A", "C", "--format", "yaml"), 'unknown format "yaml"'),
        ((), "PUMP"),
    ],
)
def test_a_wrong_command_line_is_2(
    pumps: tuple[str, ...], said: str, screener: Screener, plant: Path
) -> None:
    result = screener("compare", plant / "case.toml", *pumps)
    assert (result.code, result.out) == (2, "")
    assert said in result.err


def test_nothing_accepted_is_1(screener: Screener, plant: Path) -> None:
    result = screener("compare", plant / "case.toml", "C", "E", "--format", "json")
    assert (result.code, result.err) == (1, "")
    assert [item["verdict"] for item in json.loads(result.out)["candidates"]] == ["rejected", "conditional"]


def test_a_fault_of_ours_is_70(screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*arguments: object) -> None:
        raise ValueError("shapes do not match")

    monkeypatch.setattr("screener.changes.datasheet.explain", broken)
    assert screener("compare", plant / "case.toml", "A", "C").code == 70
