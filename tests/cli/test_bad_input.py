"""Bad files on the command line: exit code 3, every problem at its place, and nothing written."""

from __future__ import annotations

import json
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

Screener = Callable[..., Any]

CASE, PUMPS = "case.toml", "pumps/pumps.json"
FLOW = '"flow": [0, 20, 40,'
HEAD = '"head": [50.0, 49.52, 48.08,'
"""The first lines of columns of pump A."""

BAD = {
    # name: file, text in it, what stands there instead, text at which the problem is, what is said of it
    "wrong type in a case": (CASE, "flow = 210", "flow = [210]", "[210]", "must be a number or text"),
    "wrong type in a catalog": (PUMPS, '"id": "A"', '"id": 7', "7,", "must be text, not 7"),
    "nan in a case": (CASE, "static_head = 20", "static_head = nan", "nan", "NaN is not a value"),
    "infinity in a case": (CASE, "static_head = 20", "static_head = inf", "inf", "too large"),
    "nan in a catalog": (PUMPS, HEAD, '"head": [NaN, 49.52, 48.08,', "NaN", "NaN is not a value"),
    "infinity in a catalog": (PUMPS, HEAD, '"head": [Infinity, 49.52, 48.08,', "Infinity", "too large"),
    "1e999 in a catalog": (PUMPS, HEAD, '"head": [1e999, 49.52, 48.08,', "1e999", "too large"),
    "1e999 in a case": (CASE, "static_head = 20", "static_head = 1e999", "1e999", "too large"),
    "unequal lengths": (PUMPS, HEAD, '"head": [50.0, 48.08,', "[50.0, 48.08,", "8 values"),
    "flows that do not rise": (PUMPS, FLOW, '"flow": [0, 20, 20,', "20, 60", "20"),
    "a head below 0": (PUMPS, HEAD, '"head": [50.0, -49.52, 48.08,', "-49.52", "-49.52"),
    "an unknown unit in a catalog": (PUMPS, '"m3/h"', '"m3/hour"', '"m3/hour"', "did you mean"),
    "an unknown unit in a case": (CASE, 'head = "m"', 'head = "metre"', '"metre"', "'metre'"),
    "an unknown unit of a value": (CASE, '"15 degC"', '"15 degX"', '"15 degX"', "degX"),
    "a case without units": (CASE, 'flow = "m3/h"\n', "", "200 }", "has no unit"),
    "an unknown pump": (CASE, 'pump = "A"', 'pump = "AA"', '"AA"', "AA"),
    "a duty without pumps": (CASE, '["P-1", "new"]\nhours = 4000', "[]\nhours = 4000", "[]", "1"),
    "an unknown pump in a duty": (CASE, '["P-1", "new"]', '["P-2", "new"]', '"P-2"', "P-2"),
    "a level that does not exist": (CASE, "hours = 2000", 'levels = ["sea"]', '"sea"', "sea"),
    "a system curve that falls": (
        CASE,
        "friction = { head = 12, at_flow = 200 }",
        "table = { flow = [0, 100, 200], head = [0, 12, 9] }",
        "9]",
        "head goes from 12 to 9",
    ),
    "an unknown key": (CASE, "trim_step", "trimstep", '"1 mm"', "did you mean 'trim_step'?"),
    "bad TOML": (CASE, "flow = 210", "flow = = 210", "= 210", "not TOML"),
    "bad JSON": (PUMPS, '"pumps": [', '"pumps": [,', ",", "not JSON"),
}  # fmt: skip


def _place(text: str, at: str, after: str) -> tuple[int, int]:
    """Line and column of the first `at` from the first `after` on."""
    offset = text.index(at, text.index(after))
    return text.count("\n", 0, offset) + 1, offset - text.rfind("\n", 0, offset)


@pytest.mark.parametrize("name", BAD)
def test_bad_input_is_3_at_its_place_and_nothing_is_written(
    name: str, screener: Screener, plant: Path
) -> None:
    file, old, new, at, said = BAD[name]
    path = plant / file
    text = path.read_text()
    assert old in text
    path.write_text(text.replace(old, new, 1))
    before = sorted(plant.rglob("*"))
    outputs = ("--output", plant / "new.json", "--output", plant / "new.csv")
    result = screener("shortlist", plant / "case.toml", *outputs)
    assert (result.code, result.out) == (3, "")
    assert sorted(plant.rglob("*")) == before
    problems = result.err.splitlines()
    line, column = _place(path.read_text(), at, new or "friction")
    here = [problem for problem in problems if problem.startswith(f"{path}:{line}:{column}  ")]
    assert here, f"nothing at {line}:{column}\n{result.err}"
    assert any(said in problem for problem in here)
    assert all(re.match(rf"{re.escape(str(plant))}/\S+:\d+:\d+  \S", problem) for problem in problems)


@pytest.mark.parametrize(
    ("old", "new", "line", "column", "said"),
    [('"id": "B"', '"id": "A"', 24, 13, "pump 'A'"), ('"units"', '"notes"', 1, 1, "'units' is missing")],
)
def test_a_catalog_names_each_pump_once_and_its_units(
    old: str, new: str, line: int, column: int, said: str, screener: Screener, plant: Path
) -> None:
    path = plant / PUMPS
    path.write_text(path.read_text().replace(old, new))
    result = screener("catalog", "check", path)
    assert (result.code, result.out) == (3, "")
    assert result.err.startswith(f"{path}:{line}:{column}  {said}")


@pytest.mark.parametrize("file", [CASE, PUMPS])
def test_an_empty_file_is_3(file: str, screener: Screener, plant: Path) -> None:
    (plant / file).write_text("")
    result = screener("header", plant / "case.toml", "--output", plant / "new.json")
    assert (result.code, result.out) == (3, "")
    assert not (plant / "new.json").exists()
    if file == CASE:
        assert result.err == f"{plant / file}  is empty\n"
    else:
        assert f"{plant / file}" in result.err


def test_every_command_refuses_the_same_file_in_the_same_words(screener: Screener, plant: Path) -> None:
    case = plant / "case.toml"
    case.write_text(case.read_text().replace('curve = { pump = "A"', 'curve = { pump = "AA"'))
    words = (("shortlist", case), ("header", case), ("explain", case, "A"), ("case", "check", case))
    results = [screener(*command) for command in words]
    assert {result.code for result in results} == {3}
    assert len({result.err for result in results}) == 1


def test_all_problems_of_a_file_come_at_once(screener: Screener, plant: Path) -> None:
    data = json.loads((plant / PUMPS).read_text())
    data["pumps"][0]["curves"][0]["head"].append(1)
    data["pumps"][1]["curves"][0]["flow"][2] = 5
    data["pumps"][2]["id"] = "D"
    (plant / PUMPS).write_text(json.dumps(data, indent=1))
    result = screener("catalog", "check", plant / "pumps")
    assert result.code == 3
    lines = [int(line.split(":")[1]) for line in result.err.splitlines()]
    assert len(lines) >= 3
    assert lines == sorted(lines)


def test_a_case_may_be_json_too(screener: Screener, plant: Path) -> None:
    import tomllib

    data = tomllib.loads((plant / "case.toml").read_text())
    (plant / "case.json").write_text(json.dumps(data, indent=1))
    good = screener("header", plant / "case.json")
    assert (good.code, good.out) == (0, screener("header", plant / "case.toml").out)
    data["duty"][1]["running"] = ["P-1", "mew"]
    text = json.dumps(data, indent=1)
    (plant / "case.json").write_text(text)
    bad = screener("header", plant / "case.json")
    line, column = _place(text, '"mew"', '"night"')
    assert bad.code == 3
    assert bad.err.startswith(f"{plant / 'case.json'}:{line}:{column}  ")
