"""The template: it is read as it is, shows every key, and every line it offers can be taken."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from screener.case import template
from screener.case.read import catalog_paths, read_case
from screener.catalog.compile import compile_table
from screener.catalog.read import read as read_catalogs
from screener.files import shipped
from screener.files.document import load
from screener.model.case import Case

TEXT = template.files()["case.toml"]
PROPERTIES = ("density", "viscosity", "vapour_pressure", "heat_capacity")
OPTIONAL = [line for line in TEXT.splitlines() if re.match(r"#[a-z_-]+ = ", line)]
ALTERNATIVES = [line for line in TEXT.splitlines() if line.startswith("#or ")]


def read(folder: Path, text: str) -> Case:
    for name, content in template.files().items():
        (folder / name).parent.mkdir(exist_ok=True)
        (folder / name).write_text(text if name == "case.toml" else content, encoding="utf-8")
    document = load(folder / "case.toml")
    entries, _ = read_catalogs(catalog_paths(document))
    return read_case(document, compile_table(entries))


def test_it_is_read_as_it_is(tmp_path: Path) -> None:
    case = read(tmp_path, TEXT)
    assert [duty.name for duty in case.duties] == ["summer peak", "day", "night"]
    assert [pump.tag for pump in case.installed] == ["P-1", "P-2"]


@pytest.mark.parametrize(
    "line", [line for line in OPTIONAL if not line.startswith(tuple(f"#{p} " for p in PROPERTIES))]
)
def test_every_optional_line_can_be_taken(tmp_path: Path, line: str) -> None:
    assert read(tmp_path, TEXT.replace(line, line[1:]))


@pytest.mark.parametrize("line", ALTERNATIVES)
def test_every_alternative_can_stand_in_place_of_the_line_above(tmp_path: Path, line: str) -> None:
    lines = TEXT.splitlines()
    at = lines.index(line)
    above = next(row for row in range(at, 0, -1) if not lines[row].startswith("#or "))
    lines[above] = line.removeprefix("#or ")
    assert read(tmp_path, "\n".join(lines))


def test_a_liquid_by_its_properties(tmp_path: Path) -> None:
    lines = [line for line in TEXT.splitlines() if not re.match('kind = |temperature = "10', line)]
    taken = [line[1:] if line.startswith(tuple(f"#{p} " for p in PROPERTIES)) else line for line in lines]
    assert read(tmp_path, "\n".join(taken)).liquids[0].density == 1025.0


def test_it_shows_every_key_of_the_format() -> None:
    schema = json.loads(shipped.path("catalog_schema", "case.schema.json").read_text(encoding="utf-8"))
    keys: set[str] = set()
    waiting = [schema]
    while waiting:
        node = waiting.pop()
        if isinstance(node, dict):
            keys |= set(node.get("properties", ()))
            waiting += node.values()
        elif isinstance(node, list):
            waiting += node
    assert len(keys) > 60
    assert [key for key in sorted(keys) if not re.search(rf"\b{key}\b", TEXT)] == []


def test_lines_are_of_a_readable_width() -> None:
    assert max(map(len, TEXT.splitlines())) <= 110
