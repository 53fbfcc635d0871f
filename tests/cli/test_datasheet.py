"""screener datasheet: its fields, its schema, its width, names that act on nothing, its exit codes."""

from __future__ import annotations

import csv
import io
import json
import re
import subprocess
import sys
import tomllib
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from screener.case.load import load
from screener.changes.datasheet import datasheet
from screener.cli import common
from screener.export.terminal import _length
from screener.files import shipped
from screener.view import datasheet as view
from screener.view.blocks import Screen
from screener.view.data import Origin

Screener = Callable[..., Any]
SCHEMA = json.loads(shipped.path("catalog_schema", "datasheet.schema.json").read_text(encoding="utf-8"))
TRADE = {
    "capacity normal, rated, peak, minimum": "capacity_normal capacity_rated capacity_peak capacity_minimum",
    "differential head": "head_rated",
    "shutoff head, rise to shutoff": "shutoff_head rise_to_shutoff",
    "suction and discharge pressure": "suction_pressure_rated discharge_pressure_rated",
    "their highest": "suction_pressure_highest discharge_pressure_highest",
    "NPSH": "npsh_available_rated npsh_required_rated npsh_margin_rated npsh_datum",
    "speed, stages, eyes": "speed stages eyes",
    "diameters": "diameter diameter_maximum diameter_minimum",
    "efficiency and power": "efficiency_rated power_rated power_largest",
    "motor": "motor",
    "best efficiency": "bep_flow share_of_bep",
    "regions": "preferred_low preferred_high allowable_low allowable_high",
    "minimum flow": "minimum_flow_stable minimum_flow_thermal bypass_needed bypass_flow",
    "specific speeds": "specific_speed suction_specific_speed",
    "speed range": "speed_lowest speed_highest",
    "liquid": "temperature density viscosity vapour_pressure heat_capacity",
    "tolerance": "head_tolerance",
    "curve and trim": "curve_source tested_diameter from_test trim_law",
    "revision": "revision revision_date revision_by revision_checked revision_description",
}
"""What data sheets of the trade carry, in our keys: common practice, no source."""

HOSTILE = ("=1+1", "[/red]\x1b[2J", "two\nlines", "long" * 75, "a|b `c` <d>", "揚水ポンプ" * 20)


@pytest.fixture(scope="module")
def shown() -> dict[str, str]:
    return {}


@pytest.fixture
def show(screener: Screener, plant: Path, shown: dict[str, str]) -> Callable[[str], str]:
    """The data sheet of pump A in a format; each is made once."""

    def say(format: str) -> str:
        if format not in shown:
            result = screener("datasheet", plant / "case.toml", "A", "--format", format)
            assert (result.code, result.err) == (0, "")
            shown[format] = result.out
        return shown[format]

    return say


def test_every_field_of_the_trade_is_there(show: Callable[[str], str]) -> None:
    keys = [field["key"] for field in json.loads(show("json"))["fields"]]
    for what, wanted in TRADE.items():
        for key in wanted.split():
            assert keys.count(key) == 1, what


def test_json_conforms(show: Callable[[str], str]) -> None:
    data = json.loads(show("json"), parse_constant=lambda word: pytest.fail(f"{word} in the json"))
    assert [error.message for error in Draft202012Validator(SCHEMA).iter_errors(data)] == []
    assert [item["file"] for item in data["inputs"]] == ["case.toml", "pumps.json"]
    assert (data["pump"], data["diameter"], data["verdict"]) == ("A", 196.0, "accepted")
    data["fields"][0]["surprise"] = 1
    assert len(list(Draft202012Validator(SCHEMA).iter_errors(data))) == 1


def _tables(node: object) -> Iterator[dict[str, Any]]:
    if isinstance(node, dict):
        if "properties" in node:
            yield node
        for value in node.values():
            yield from _tables(value)


def test_the_schema_describes_every_property_and_allows_no_other() -> None:
    Draft202012Validator.check_schema(SCHEMA)
    assert SCHEMA["properties"]["format"]["const"] == "pump-datasheet/1"
    for table in _tables(SCHEMA):
        assert table["additionalProperties"] is False
        assert set(table["required"]) == set(table["properties"])
        for key, rule in table["properties"].items():
            told = rule if "description" in rule else SCHEMA["$defs"][rule["$ref"].split("/")[-1]]
            assert told["description"].endswith("."), key
            if "number" in rule.get("type", ()):
                assert re.search(r"in the unit named |\[[^\]]+\]", told["description"]), key


def test_what_it_shares_with_the_header_is_the_same_there() -> None:
    other = json.loads(shipped.path("catalog_schema", "header.schema.json").read_text(encoding="utf-8"))
    for key in ("tool", "input", "units", "limit"):
        assert SCHEMA["$defs"][key] == other["$defs"][key]


def test_csv_has_one_row_a_field_with_the_figures_of_the_json(show: Callable[[str], str]) -> None:
    rows = list(csv.DictReader(io.StringIO(show("csv"))))
    fields = json.loads(show("json"))["fields"]
    for row, field in zip(rows, fields, strict=True):
        for key in ("group", "key", "field", "unit", "source"):
            assert row[key] == field[key]
        value = field["value"]
        assert row["value"] == ("" if value is None else str(value))


def test_markdown_has_every_field(show: Callable[[str], str]) -> None:
    text = show("markdown").replace("\\", "")
    for field in json.loads(show("json"))["fields"]:
        assert field["field"] in text
    assert "| motor nameplate | 18.5 kW | ISO 13709 bands, IEC series |" in text


@pytest.mark.parametrize("width", [80, 100, 160])
def test_it_fits(width: int, screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", str(width))
    lines = screener("datasheet", plant / "case.toml", "A").out.splitlines()
    assert max(map(len, lines)) <= width
    assert [line for line in lines if line.endswith("…") or line != line.rstrip()] == []
    assert not any("did not fit" in line for line in lines)
    assert [line for line in lines if line.isupper() and " " not in line.strip()] == [
        *("ACCEPTED", "DUTY", "HEADER", "SUCTION", "MACHINE", "DRIVER", "LIQUID", "FINDINGS", "REVISION")
    ]


def test_the_demo_is_whole_at_80_columns(screener: Screener, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    case = shipped.demo("osier-bank", "case.toml")
    lines = screener("datasheet", case, "250-500-6 M").out.splitlines()
    assert max(map(len, lines)) <= 80
    assert [line for line in lines if line.endswith("…")] == []
    assert " ".join(lines[0].split()) == "Third pump for the Osier Bank lift station data sheet"


@pytest.fixture(scope="module")
def hostile(tmp_path_factory: pytest.TempPathFactory) -> dict[str, Screen]:
    """Data sheets of a plant in which everything that has a name is called one of those, by the pump's."""
    folder = tmp_path_factory.mktemp("hostile")
    plant = Path(__file__).parent / "plant"
    catalog = json.loads((plant / "pumps" / "pumps.json").read_text())
    catalog["pumps"] = [
        {
            **catalog["pumps"][0],
            "id": name,
            "construction": name,
            "source": {"kind": "assumed", "document": name},
        }
        for name in HOSTILE
    ]
    (folder / "pumps.json").write_text(json.dumps(catalog))
    case = tomllib.loads((plant / "case.toml").read_text())
    case |= {"catalog": ["pumps.json"], "title": HOSTILE[1]}
    case["liquid"][0]["name"], case["level"][0]["name"] = HOSTILE[3], HOSTILE[1]
    case["installed"][0] |= {"tag": HOSTILE[4], "curve": {"pump": HOSTILE[0], "diameter": 210}}
    case["duty"][0] |= {"name": HOSTILE[5], "running": [HOSTILE[4], "new"]}
    case["duty"][1] |= {"name": HOSTILE[2], "running": [HOSTILE[4], "new"]}
    (folder / "case.json").write_text(json.dumps(case))
    loaded = load(folder / "case.json")
    return {
        name: view.screen(datasheet(loaded.case, loaded.catalog, row), Origin(loaded.files))
        for row, name in enumerate(HOSTILE)
    }


@pytest.mark.parametrize("format", ["table", "json", "csv", "markdown"])
def test_names_act_on_nothing(
    format: str,
    hostile: dict[str, Screen],
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    for name, screen in hostile.items():
        common.emit(screen, format, None, False)
        text = capsys.readouterr().out
        assert {c for c in text if not c.isprintable()} <= {"\n"}
        if format == "table":
            assert max(map(_length, text.splitlines())) <= 80
        elif format == "csv":
            rows = list(csv.reader(io.StringIO(text)))
            assert {len(row) for row in rows} == {7}
            assert not [cell for row in rows for cell in row if re.match(r"\s*[=@]", cell)]
        elif format == "json":
            assert json.loads(text)["pump"] == name
            assert HOSTILE[5] in {field["source"] for field in json.loads(text)["fields"]}
        else:
            assert not re.search(r"[<>`\[\]]", re.sub(r"\\[^\w\s]", "", text))


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("AB",), 'there is no pump "AB" in the catalog'),
        (("A", "--diameter", "500"), "180 to 210 mm"),
        (("A", "--diameter", "wide"), "--diameter"),
        (("E", "--diameter", "200"), "E states no diameter"),
        (("A", "--format", "yaml"), 'unknown format "yaml"'),
        ((), "PUMP"),
    ],
)
def test_a_wrong_command_line_is_2(
    arguments: tuple[str, ...], said: str, screener: Screener, plant: Path
) -> None:
    result = screener("datasheet", plant / "case.toml", *arguments)
    assert (result.code, result.out) == (2, "")
    assert said in result.err


def test_a_rejected_pump_gets_a_sheet_too(screener: Screener, plant: Path) -> None:
    result = screener("datasheet", plant / "case.toml", "C", "--diameter", "200 mm", "--format", "json")
    data = json.loads(result.out)
    assert (result.code, data["verdict"], data["diameter"]) == (0, "rejected", 200.0)


def test_a_fault_of_ours_is_not_put_down_to_the_diameter(
    screener: Screener, plant: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*arguments: object) -> None:
        raise ValueError("shapes do not match")

    monkeypatch.setattr("screener.changes.datasheet.explain", broken)
    assert screener("datasheet", plant / "case.toml", "A").code == 70


def test_a_file_is_written(
    screener: Screener, plant: Path, tmp_path: Path, show: Callable[[str], str]
) -> None:
    result = screener("datasheet", plant / "case.toml", "A", "--output", tmp_path / "sheet.json")
    assert (result.code, result.err) == (0, f"wrote {tmp_path / 'sheet.json'}\n")
    assert (tmp_path / "sheet.json").read_text(encoding="utf-8") == show("json")


def test_help_loads_nothing_heavy_and_keeps_to_80_columns(screener: Screener) -> None:
    for command in ("datasheet", "compare"):
        code = (
            "import sys; from screener.cli import run; run(sys.argv[1:]);"
            "print([name for name in ('numpy', 'rich') if name in sys.modules], file=sys.stderr)"
        )
        done = subprocess.run([sys.executable, "-c", code, command, "--help"], capture_output=True, text=True)
        assert done.stderr == "[]\n"
        assert max(map(len, screener(command, "--help").out.splitlines())) <= 80
