"""What stdout holds with --format: the schemas of the json, and the same figures in csv and markdown."""

from __future__ import annotations

import csv
import io
import json
import os
import re
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from screener.export import formats
from screener.files import shipped
from screener.view.blocks import Screen

COMMANDS = ("shortlist", "header", "explain A", "explain E", "trims A")
SCHEMA = {"shortlist": "shortlist", "header": "header", "explain": "explanation", "trims": "trims"}
SCHEMAS = sorted(SCHEMA.values())
Shown = Callable[[str, str], str]


def _schema(name: str) -> dict[str, Any]:
    loaded: dict[str, Any] = json.loads(
        shipped.path("catalog_schema", f"{name}.schema.json").read_text(encoding="utf-8")
    )
    return loaded


def _differences(name: str, data: object) -> list[str]:
    errors = Draft202012Validator(_schema(name)).iter_errors(data)
    return [f"{error.json_path}: {error.message}" for error in errors]


def _tables(node: object) -> Iterator[dict[str, Any]]:
    """Every schema in a schema that describes an object."""
    if isinstance(node, dict):
        if "properties" in node:
            yield node
        for value in node.values():
            yield from _tables(value)


@pytest.mark.parametrize("name", SCHEMAS)
def test_a_schema_describes_every_property_and_allows_no_other(name: str) -> None:
    schema = _schema(name)
    Draft202012Validator.check_schema(schema)
    assert schema["properties"]["format"]["const"] == f"pump-{name}/1"
    for table in _tables(schema):
        assert table["additionalProperties"] is False
        for key, rule in {**table["properties"], **table.get("patternProperties", {})}.items():
            said = rule if "description" in rule else schema["$defs"][rule["$ref"].split("/")[-1]]
            assert said["description"].endswith("."), key
            if "number" in rule.get("type", ()):
                unit = re.search(r"in the unit named |\[[^\]]+\]|in the same unit", said["description"])
                assert unit, f"{key} says no unit"


def test_what_schemas_share_is_the_same_in_each() -> None:
    shared: dict[str, Any] = {}
    for name in SCHEMAS:
        for key, rule in _schema(name)["$defs"].items():
            assert shared.setdefault(key, rule) == rule, f"{key} in {name}"


def test_schemas_refer_to_nothing_outside() -> None:
    for name in SCHEMAS:
        text = json.dumps(_schema(name))
        assert set(re.findall(r'"\$ref": "([^"]+?)/[^"/]+"', text)) == {"#/$defs"}


@pytest.mark.parametrize("command", COMMANDS)
def test_json_conforms(command: str, shown: Shown) -> None:
    schema = SCHEMA[command.split()[0]]
    data = json.loads(shown(command, "json"), parse_constant=lambda word: pytest.fail(f"{word} in the json"))
    assert _differences(schema, data) == []
    assert [item["file"] for item in data["inputs"]] == ["case.toml", "pumps.json"]
    data["surprise"] = 1
    assert len(_differences(schema, data)) == 1


def test_json_of_the_demo_conforms(demo_screens: dict[str, Screen]) -> None:
    render = next(module.render for module in formats() if module.NAME == "json")
    for name, screen in demo_screens.items():
        assert _differences(SCHEMA[name.split()[0]], json.loads(render(screen))) == [], name


@pytest.mark.parametrize("command", ["shortlist", "trims A"])
def test_the_same_input_gives_the_same_bytes(command: str, shown: Shown, plant: Path) -> None:
    name, *pump = command.split()
    again = subprocess.run(
        [sys.executable, "-m", "screener", name, plant / "case.toml", *pump, "--format", "json"],
        capture_output=True,
        env=os.environ | {"PYTHONHASHSEED": "7", "TZ": "Pacific/Chatham"},
        check=True,
    )
    assert again.stdout == shown(command, "json").encode()


def _rows(text: str) -> list[dict[str, str]]:
    """Rows of a csv, by the key of each column without its unit."""
    header, *rows = csv.reader(io.StringIO(text))
    keys = [re.sub(r" \[[^\]]+\]$", "", key) for key in header]
    return [dict(zip(keys, row, strict=True)) for row in rows]


def _figure(text: str) -> float | None:
    return float(text) if text else None


def _both(shown: Shown, command: str) -> tuple[list[dict[str, str]], Any]:
    return _rows(shown(command, "csv")), json.loads(shown(command, "json"))


def test_csv_of_the_shortlist_holds_the_figures_of_the_json(shown: Shown) -> None:
    rows, data = _both(shown, "shortlist")
    items = [*data["accepted"], *data["conditional"], *data["rejected"]]
    assert [row["pump"] for row in rows] == [item["pump"] for item in items] == ["A", "D", "E", "C"]
    for row, item in zip(rows, items, strict=True):
        for key, value in item.items():
            if isinstance(value, float) or value is None:
                assert _figure(row[key]) == value, key
            elif isinstance(value, str):
                assert row[key] == value
        failed = [found["criterion"] for found in item["findings"] if found["outcome"] == "fail"]
        assert row["reasons"].split() == failed


def test_csv_of_the_header_holds_the_figures_of_the_json(shown: Shown) -> None:
    rows, data = _both(shown, "header")
    assert [row["duty"] for row in rows] == ["day", "wide open", "night"]
    states = {state["state"]: state for state in data["today"]}
    for row, state in zip(rows, [states[key] for key in ("day", "day, wide open", "night")], strict=True):
        pump = next(pump for pump in state["pumps"] if pump["pump"] == "P-1")
        assert _figure(row["total_flow"]) == state["total_flow"]
        assert _figure(row["header_head"]) == state["header_head"]
        assert _figure(row["flow P-1"]) == pump["flow"]
        assert _figure(row["flow_of_best"]) == pump["flow_of_best"]
        assert _figure(row["npsh_ratio"]) == pytest.approx(
            pump["npsh_available"] / pump["npsh_required"], rel=1e-6
        )


def test_csv_of_an_explanation_holds_the_figures_of_the_json(shown: Shown) -> None:
    rows, data = _both(shown, "explain A")
    for row, state in zip(rows, data["states"], strict=True):
        new, installed = state["pumps"]
        assert _figure(row["total_flow"]) == state["total_flow"]
        assert _figure(row["header_head"]) == state["header_head"]
        assert _figure(row["flow new"]) == new["flow"]
        assert _figure(row["flow P-1"]) == installed["flow"]
        assert _figure(row["power"]) == new["power"]
        assert _figure(row["efficiency"]) == new["efficiency"]


def test_csv_of_the_trims_holds_the_figures_of_the_json(shown: Shown) -> None:
    rows, data = _both(shown, "trims A")
    assert len(rows) == 31  # 180 to 210 mm by 1 mm
    for row, item in zip(rows, data["trims"], strict=True):
        assert row.keys() == item.keys()
        assert all(
            row[key] == (value or "") if isinstance(value, str) else _figure(row[key]) == value
            for key, value in item.items()
            if key != "worst"
        )


def cells(line: str) -> list[str]:
    """Cells of a line of a Markdown table, without their escapes."""
    return [re.sub(r"\\(.)", r"\1", cell.strip()) for cell in re.split(r"(?<!\\)\|", line)[1:-1]]


@pytest.mark.parametrize("name", ["shortlist", "header", "explain 200-400-4 K", "trims 200-400-4 K"])
def test_markdown_is_made_of_well_formed_tables(name: str, demo_screens: dict[str, Screen]) -> None:
    render = next(module.render for module in formats() if module.NAME == "markdown")
    blocks = render(demo_screens[name]).removesuffix("\n").split("\n\n")
    assert blocks[0].startswith("# ")
    tables = [block.splitlines() for block in blocks if block.startswith("|")]
    assert tables
    for title, rule, *rows in tables:
        wide = len(cells(title))
        assert re.fullmatch(r"\|(---\||--:\|)+", rule)
        assert {len(cells(line)) for line in (rule, *rows)} == {wide}
    assert all("|" not in block.replace("\\|", "") for block in blocks if not block.startswith("|"))


def test_markdown_says_what_the_terminal_says(shown: Shown) -> None:
    text = shown("shortlist", "markdown")
    row = next(cells(line) for line in text.splitlines() if line.startswith("| 1 | A |"))
    data = json.loads(shown("shortlist", "json"))["accepted"][0]
    assert row[2:5] == [f"{data['diameter']:.0f}", f"{data['score']:.1f}", f"{data['efficiency']:.1f}"]
