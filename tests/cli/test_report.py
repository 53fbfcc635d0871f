"""screener report: one case in one file."""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator
from referencing import Registry, Resource

from screener.export import html, markdown
from screener.files import shipped
from screener.model.finding import Verdict
from screener.view.blocks import Heading, Screen

Screener = Callable[..., Any]
LARGEST = 1_000_000
"""Bytes of the demo's report at most."""


def _schemas() -> dict[str, Any]:
    folder = shipped.path("catalog_schema")
    return {path.name: json.loads(path.read_text(encoding="utf-8")) for path in folder.glob("*.schema.json")}


def _differences(data: object) -> list[str]:
    """What is wrong with a report, by its schema and those that it refers to."""
    schemas = _schemas()
    registry = Registry().with_resources(
        [(name, Resource.from_contents(schema)) for name, schema in schemas.items()]
    )
    errors = Draft202012Validator(schemas["report.schema.json"], registry=registry).iter_errors(data)
    return [f"{error.json_path}: {error.message}" for error in errors]


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> tuple[str, dict[str, Any]]:
    """The html and the json of the demo plant's report."""
    from screener.cli import run

    folder = tmp_path_factory.mktemp("report")
    files = [folder / "report.html", folder / "report.json"]
    options = [word for file in files for word in ("--output", str(file))]
    assert run(["report", str(shipped.demo("osier-bank", "case.toml")), *options]) == 0
    return files[0].read_text(encoding="utf-8"), json.loads(files[1].read_text(encoding="utf-8"))


def test_the_html_of_the_demo_is_one_small_file(demo: tuple[str, dict[str, Any]]) -> None:
    text, _ = demo
    assert len(text.encode()) < LARGEST
    assert not re.search(r"https?:", text)
    assert text.count("<h1") == 1


def test_the_json_of_the_demo_conforms(demo: tuple[str, dict[str, Any]]) -> None:
    _, data = demo
    assert _differences(data) == []
    data = data | {"surprise": 1, "basis": data["basis"] | {"duties": [{}]}}
    assert len(_differences(data)) > 1


def test_the_schema_describes_every_property() -> None:
    schema = _schemas()["report.schema.json"]
    Draft202012Validator.check_schema(schema)
    tables = [schema, *schema["$defs"].values()]
    for table in tables:
        assert table["additionalProperties"] is False
        assert set(table["required"]) == set(table["properties"])
        for key, rule in table["properties"].items():
            said = rule if "description" in rule else schema["$defs"][rule["$ref"].split("/")[-1]]
            assert said["description"].endswith("."), key
            if "number" in rule.get("type", ()):
                assert re.search(r"in the unit named |\[[^\]]+\]", said["description"]), f"{key} says no unit"


def test_it_explains_the_first_accepted_and_the_most_efficient_rejected(
    demo: tuple[str, dict[str, Any]],
) -> None:
    text, data = demo
    accepted = [item["pump"] for item in data["shortlist"]["accepted"]]
    efficiency = {item["pump"]: item["efficiency_at_duty"] or 0 for item in data["shortlist"]["rejected"]}
    wanted = [*accepted[:2], max(efficiency, key=lambda pump: efficiency[pump])]
    assert [item["pump"] for item in data["explanations"]] == wanted
    for item in data["explanations"]:
        same = next(one for one in data["shortlist"][item["verdict"]] if one["pump"] == item["pump"])
        assert item["diameter"] == same["diameter"]
        assert item["findings"] == same["findings"]
        assert f"{item['pump']}, {item['diameter']:g} mm: {item['verdict']}</h2>" in text
    first = data["shortlist"]["accepted"][0]
    ranked = f"{first['pump']}, {first['diameter']:g} mm, system efficiency {first['efficiency']:.1f} %"
    assert f"Ranked first: {ranked}, motor {first['motor']:g} kW." in text


def test_it_says_what_stands_behind_it(demo: tuple[str, dict[str, Any]]) -> None:
    text, data = demo
    for item in data["limits"]:
        assert f">{item['limit']}<" in text
        assert f">{html.clean(item['source'])}<".replace("'", "&#39;") in text
    for item in data["inputs"]:
        assert item["sha256"] in text
    for word in ("surge", "vibration", "relief", "electrical"):
        assert f"<dt>{word}</dt>" in text
    for caution in data["cautions"]:
        assert caution.replace("'", "&#39;") in text
    assert [duty["duty"] for duty in data["basis"]["duties"]] == ["peak", "normal", "night"]
    assert [duty["flow"] for duty in data["basis"]["duties"]] == [3000, 2300, 1700]  # as the case file says
    assert [duty["rated"] for duty in data["basis"]["duties"]] == [True, False, False]
    assert [pump["motor"] for pump in data["basis"]["installed"]] == [160, 160]


def test_what_is_not_assessed_is_told_pump_by_pump(demo: tuple[str, dict[str, Any]]) -> None:
    _, data = demo
    listed = {(item["pump"], item["criterion"]) for item in data["not_assessed"]["by_pump"]}
    found = {
        (item["pump"], finding["criterion"])
        for verdict in ("accepted", "conditional", "rejected")
        for item in data["shortlist"][verdict]
        for finding in item["findings"]
        if finding["outcome"] == "not assessed"
    }
    assert listed == found != set()


def test_every_chart_stands_in_the_part_that_it_belongs_to(demo: tuple[str, dict[str, Any]]) -> None:
    text, data = demo
    parts = re.split(r"<h2", text)[2:]  # after the contents
    with_charts = [part.partition(">")[2].partition("</h2>")[0] for part in parts if "<figure>" in part]
    assert len(with_charts) == 2 + len(data["explanations"])
    assert not any("CHARTS" in part[:100] for part in parts)


def test_other_suffixes_and_stdout(
    screener: Screener, plant: Path, shown: Callable[[str, str], str], tmp_path: Path
) -> None:
    case = plant / "case.toml"
    names = ("a.json", "a.md", "a.csv", "a.html")
    options = [word for name in names for word in ("--output", tmp_path / name)]
    result = screener("report", case, "--pumps", 0, *options)
    assert (result.code, len(result.err.splitlines())) == (0, len(names))
    assert _differences(json.loads((tmp_path / "a.json").read_text())) == []
    assert (tmp_path / "a.csv").read_text() == shown("shortlist", "csv")
    assert result.out == ""  # a whole report goes to the terminal only where no file is asked for
    told = screener("report", case, "--pumps", 0).out
    marked = (tmp_path / "a.md").read_text()
    assert marked.startswith("# ")
    for heading in ("The shortlist, and why the rest is not on it", "What was not assessed", "Files read"):
        assert f"\n## {heading}\n" in marked
        assert f"\n{heading}" in told
    again = screener("report", case, "--pumps", 0, "--format", "html")
    assert (again.code, again.out) == (0, (tmp_path / "a.html").read_text())


def test_fewer_pumps_when_asked(screener: Screener, plant: Path) -> None:
    result = screener("report", plant / "case.toml", "--pumps", 0, "--format", "json")
    data = json.loads(result.out)
    assert [item["pump"] for item in data["explanations"]] == ["C"]  # the only rejected one


def test_nothing_accepted_is_1_and_reported_all_the_same(screener: Screener, plant: Path) -> None:
    case = plant / "case.toml"
    case.write_text(f"{case.read_text()}\n[limits]\nnpsh-margin = {{ ratio = 9 }}\n")
    result = screener("report", case, "--format", "json")
    assert result.code == 1
    data = json.loads(result.out)
    assert data["shortlist"]["accepted"] == []
    assert [item["verdict"] for item in data["explanations"]] == ["rejected"]
    assert _differences(data) == []


def test_names_are_text_in_tables_and_charts(screener: Screener, plant: Path) -> None:
    title, tag, duty, pump = "=1+1 [/red]", '"><img src=x>', "two\nlines </text>", "<script>alert(1)</script>"
    case = tomllib.loads((plant / "case.toml").read_text())
    case["title"], case["installed"][0]["tag"], case["duty"][0]["name"] = title, tag, duty
    for item in case["duty"]:
        item["running"] = [tag if name == "P-1" else name for name in item["running"]]
    catalog = json.loads((plant / "pumps" / "pumps.json").read_text())
    catalog["pumps"][0]["id"] = pump
    (plant / "pumps" / "pumps.json").write_text(json.dumps(catalog))
    (plant / "case.json").write_text(json.dumps(case).replace('"A"', json.dumps(pump)))
    result = screener("report", plant / "case.json", "--pumps", 1, "--format", "html")
    assert result.code == 0
    assert "&lt;script&gt;alert(1)&lt;/script&gt;" in result.out
    assert "&lt;img src=x&gt;" in result.out
    assert len(re.findall(r"<script", result.out)) == len(re.findall(r"</script", result.out)) == 1
    assert "<img" not in result.out
    assert len(re.findall(r"<text", result.out)) == len(re.findall(r"</text", result.out))
    assert "two lines" in result.out
    assert not [c for c in result.out if not c.isprintable() and c != "\n"]


def test_charts_and_tables_have_names_of_their_own(plant: Path) -> None:
    screen = _report(plant / "case.toml")
    keys = [chart.key for chart in screen.charts()]
    assert keys[0].startswith("header-")
    assert len(keys) == len(set(keys)) > 3
    sheets = [name for name, _ in screen.sheets()]
    assert sheets == ["header", "shortlist", "pump-1", "pump-2"]


def test_cautions_are_said_once_and_titles_do_not_repeat(plant: Path) -> None:
    screen = _report(plant / "case.toml")
    text = markdown.render(screen)
    assert text.count("Screening only") == 1
    headings = [block.text for block in screen.blocks if isinstance(block, Heading)]
    assert headings.count(headings[0]) == 1


def _report(case: Path) -> Screen:
    from screener.case.load import load
    from screener.changes.report import report
    from screener.view import report as view
    from screener.view.data import Origin

    loaded = load(case)
    result = report(loaded.case, loaded.catalog)
    assert [int(one.explained.judged.candidates.verdict[0]) for one in result.explained] == [
        Verdict.ACCEPTED,
        Verdict.REJECTED,
    ]
    return view.screen(result, Origin(loaded.files))
