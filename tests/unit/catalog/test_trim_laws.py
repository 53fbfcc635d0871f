"""Trim laws in a catalog: read by name or by exponents, and put on from outside."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from screener.catalog.entry import Entry, with_law
from screener.catalog.load import load_catalog
from screener.catalog.read import read
from screener.files import shipped
from screener.model.tables.trim_laws import NAMES

AFFINITY, EQUAL, ISO = "affinity", "equal exponents", "ISO 9906 inlet diameter"


@pytest.fixture
def write(tmp_path: Path) -> Callable[..., Path]:
    """A catalog of pumps with the impellers given."""

    def written(*impellers: dict) -> Path:
        curve = {"diameter": 260, "flow": [0, 50, 100], "head": [34, 32, 26]}
        pumps = [
            {"id": f"P{row}", "speed": 1450, "impeller": {"maximum": 260, **impeller}, "curves": [curve]}
            for row, impeller in enumerate(impellers)
        ]
        units = {"flow": "m3/h", "head": "m", "length": "mm"}
        path = tmp_path / "pumps.json"
        path.write_text(json.dumps({"format": "pump-catalog/1", "units": units, "pumps": pumps}))
        return path

    return written


@pytest.mark.parametrize(
    ("law", "name", "flow", "head"),
    [
        (None, AFFINITY, 1, 2),
        ({"efficiency_loss": 0.2}, AFFINITY, 1, 2),
        ({"name": AFFINITY}, AFFINITY, 1, 2),
        ({"name": EQUAL}, EQUAL, 2.5, 2.5),
        ({"name": EQUAL, "exponent": 2.2}, EQUAL, 2.2, 2.2),
        ({"name": ISO}, ISO, 1, 2),
        ({"head_exponent": 2.3}, "", 1, 2.3),
        ({"flow_exponent": 1.1}, "", 1.1, 2),
    ],
)
def test_a_law_as_read(write, law: dict | None, name: str, flow: float, head: float) -> None:
    impeller = {"inlet_diameter": "13 cm"} | ({} if law is None else {"trim_law": law})
    ((entry,), _) = read([write(impeller)])
    assert (entry.trim_law, entry.flow_exponent, entry.head_exponent) == (name, flow, head)
    assert entry.inlet_diameter == pytest.approx(0.13)
    assert entry.law_inlet == (pytest.approx(0.13) if name == ISO else 0)


def test_the_schemas_know_the_laws() -> None:
    def schema(name: str) -> dict:
        return json.loads(shipped.path("catalog_schema", f"{name}.schema.json").read_text(encoding="utf-8"))

    impeller = schema("pump-catalog")["$defs"]["pump"]["properties"]["impeller"]["properties"]
    assert tuple(impeller["trim_law"]["properties"]["name"]["enum"]) == NAMES == (AFFINITY, EQUAL, ISO)
    case = schema("case")["properties"]["new_pump"]["properties"]["trim_law"]
    assert tuple(case["enum"]) == NAMES
    assert tuple(schema("trims")["$defs"]["law"]["properties"]["law"]["enum"]) == (*NAMES, None)


def entry(**figures: object) -> Entry:
    return Entry("p", "", "", "", 1450.0, (), **figures)


def test_another_law_replaces_the_pump_s_own() -> None:
    own = entry(flow_exponent=1.1, head_exponent=2.2, efficiency_loss=0.3, inlet_diameter=0.1)
    for name, flow, head, inlet in ((AFFINITY, 1, 2, 0), (EQUAL, 2.5, 2.5, 0), (ISO, 1, 2, 0.1)):
        found = with_law(own, name)
        assert (found.trim_law, found.flow_exponent, found.head_exponent) == (name, flow, head)
        assert (found.law_inlet, found.efficiency_loss) == (inlet, 0.3)


def test_a_pump_without_inlet_diameter_keeps_its_law_and_equal_exponents_keep_theirs() -> None:
    own = entry(flow_exponent=1.1, head_exponent=2.2)
    assert with_law(own, ISO) is own
    equal = entry(trim_law=EQUAL, flow_exponent=2.2, head_exponent=2.2)
    assert with_law(equal, EQUAL) is equal


def test_a_law_that_there_is_none_of(write) -> None:
    with pytest.raises(
        ValueError, match="no trim law 'afinity'; the laws are affinity, equal exponents, ISO"
    ):
        load_catalog(write({}), trim_law="afinity")


def test_a_catalog_under_another_law(write) -> None:
    path = write({"inlet_diameter": 130}, {}, {"trim_law": {"head_exponent": 2.3}})
    own, under = load_catalog(path), load_catalog(path, trim_law=ISO)
    assert (own.trim_law, under.trim_law) == ("", ISO)
    assert own.law_inlet.tolist() == [0, 0, 0]
    assert under.law_inlet == pytest.approx([0.13, 0, 0])
    assert under.head_exponent.tolist() == own.head_exponent.tolist() == [2, 2, 2.3]
    np.testing.assert_array_equal(own.tested.head, under.tested.head)
