"""A case with its catalog: the trim law of the case is that of the new pump alone."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import pytest

from screener.case.load import load
from screener.errors import InputError

CASE = """
format = "pump-case/1"
title = "One more"
catalog = ["pumps.json"]
units = { flow = "m3/h", head = "m", length = "mm" }
liquid = [{ name = "water", kind = "water", temperature = "20 degC" }]
system = { friction = { head = 10, at_flow = 200 } }
level = [{ name = "sump", static_head = 20 }]
installed = [{ tag = "P-1", curve = { pump = "A", diameter = DIAMETER } }]
new_pump = { LAW }
duty = [{ name = "all", flow = 180, running = ["P-1", "new"] }]
"""
ISO = "ISO 9906 inlet diameter"


@pytest.fixture
def plant(tmp_path: Path) -> Callable[..., Path]:
    """A case beside a catalog of pump A, with an inlet of 130 mm, and pump B, that states none."""

    def make(law: str, *, diameter: float = 234, of_a: dict | None = None) -> Path:
        curve = {"diameter": 260, "flow": [0, 50, 100], "head": [40, 38, 30]}
        own = {"maximum": 260, "inlet_diameter": 130} | ({} if of_a is None else {"trim_law": of_a})
        pumps = [
            {"id": "A", "speed": 1450, "impeller": own, "curves": [curve]},
            {"id": "B", "speed": 1450, "impeller": {"maximum": 260}, "curves": [curve]},
        ]
        units = {"flow": "m3/h", "head": "m", "length": "mm"}
        catalog = {"format": "pump-catalog/1", "units": units, "pumps": pumps}
        (tmp_path / "pumps.json").write_text(json.dumps(catalog))
        path = tmp_path / "case.toml"
        path.write_text(CASE.replace("LAW", law).replace("DIAMETER", str(diameter)))
        return path

    return make


def test_each_model_keeps_its_own_law(plant) -> None:
    found = load(plant(""))
    assert found.case.new_pump.trim_law == found.catalog.trim_law == ""
    assert found.catalog.head_exponent.tolist() == [2, 2]
    assert [entry.id for entry in found.entries] == ["A", "B"]


def test_the_law_of_the_case_is_put_on_the_catalog_and_not_on_installed_pumps(plant) -> None:
    found = load(plant('trim_law = "equal exponents"'))
    assert found.case.new_pump.trim_law == found.catalog.trim_law == "equal exponents"
    assert found.catalog.flow_exponent.tolist() == found.catalog.head_exponent.tolist() == [2.5, 2.5]
    # 234 / 260 = 0.9 by the affinity law: 0.81 of 40 m, 0.9 of 100 m3/h
    assert found.case.pumps.curves.head[0, 0] == pytest.approx(32.4)
    assert found.case.pumps.curves.end[0] * 3600 == pytest.approx(90)
    assert [entry.trim_law for entry in found.entries] == ["affinity", "affinity"]


def test_a_model_without_inlet_diameter_keeps_its_own_law(plant) -> None:
    found = load(plant(f'trim_law = "{ISO}"'))
    assert found.catalog.law_inlet == pytest.approx([0.13, 0])


def test_an_installed_impeller_below_its_inlet(plant) -> None:
    assert load(plant("", diameter=131, of_a={"name": ISO}))
    with pytest.raises(InputError) as caught:
        load(plant("", diameter=130, of_a={"name": ISO}))
    (problem,) = caught.value.problems
    assert (problem.what, problem.hint) == ("diameter is 130", "above that of its inlet, 130 mm")
