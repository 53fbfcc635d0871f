"""The case as a whole: SI, defaults, units, every problem at once."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from screener import criteria
from screener.case.read import catalog_paths, read_case
from screener.errors import InputError
from screener.files.document import Document
from screener.model.case import Case, Loss, Tolerance
from screener.model.curves import PumpTable

Read = Callable[..., Case]


def test_figures_are_in_si(read: Read) -> None:
    case = read(("site = {}", 'date = "2024-05-14"\nsuction = { friction = { head = 0.5, at_flow = 360 } }'))
    assert (case.title, case.date) == ("Two pumps and a free place", "2024-05-14")
    # [D] 16 m at 0.1 m3/s, 0.5 m at 0.1 m3/s: coefficients 1600 and 50
    assert case.system.friction.coefficient == pytest.approx((1600.0,))
    assert case.system.friction.exponent == (2.0,)
    assert case.suction_friction.coefficient == pytest.approx((50.0,))
    assert [level.static_head for level in case.levels] == [28.0, 26.0]
    assert [duty.flow for duty in case.duties] == pytest.approx([0.1, 0.05])


def test_defaults(read: Read) -> None:
    case = read()
    assert case.date == ""
    assert case.atmospheric_pressure == 101325.0  # ISO 2533, sea level [V]
    assert (case.levels[0].suction_head, case.levels[0].vessel_pressure) == (0.0, 0.0)
    assert case.suction_friction == Loss()
    assert case.system.destination_pressure == 0.0
    assert math.isnan(case.system.allowable_pressure)
    assert case.weights == {"efficiency": 1.0, "shutoff_match": 0.1, "load_share": 0.1}


def test_units_are_shown_as_declared_npsh_like_head(read: Read) -> None:
    case = read(('head = "m"', 'head = "ft"'), ('power = "kW"', 'power = "HP"'))
    assert case.display == {
        "flow": "m3/h",
        "head": "ft",
        "npsh": "ft",
        "power": "hp",
        "length": "mm",
        "pressure": "bar",
        "temperature": "degC",
    }
    assert case.levels[0].static_head == pytest.approx(28 * 0.3048)


def test_weights_replace_the_defaults_one_by_one(read: Read) -> None:
    case = read(("site = {}", "score = { load_share = 1 }"))
    assert case.weights == {"efficiency": 1.0, "shutoff_match": 0.1, "load_share": 1.0}


def test_tolerances(read: Read, problems: Callable[..., list[str]]) -> None:
    assert read().tolerance == Tolerance(system_curve=0.05, trim=0.0005, reading=0.01)
    given = "tolerance = { system_curve = 8, trim = 0.2, reading = 0 }"
    assert read(("site = {}", given)).tolerance == Tolerance(0.08, pytest.approx(0.0002), 0.0)
    assert read(("site = {}", 'tolerance = { trim = "0 in" }')).tolerance.trim == 0.0
    assert problems(("site = {}", "tolerance = { trim = -0.1 }")) == ["trim is -0.1"]


def test_limits_are_read_against_the_criteria(read: Read, monkeypatch: pytest.MonkeyPatch) -> None:
    def read_limits(raw: Any) -> Any:
        wrong = [(("two", "least"), "no such limit", "one of most")] if "two" in raw else []
        return {"one": {"most": raw["one"]["most"] / 100}}, wrong

    monkeypatch.setattr(criteria, "read_limits", read_limits)
    assert read(("site = {}", "limits = { one = { most = 5 } }")).limits == {"one": {"most": 0.05}}
    with pytest.raises(InputError) as caught:
        read(("site = {}", "limits = { one = { most = 5 }, two = { least = 3 } }"))
    (problem,) = caught.value.problems
    assert (problem.line, problem.column) == (4, 48)
    assert (problem.what, problem.hint) == ("no such limit", "one of most")


def test_every_problem_at_once_in_the_order_of_the_file(
    document: Callable[..., Document], table: PumpTable
) -> None:
    wrong = document(
        ("static_head = 28", 'static_head = "28"'), ('"plain"', '"plan"'), ("flow = 180", "flow = 0")
    )
    with pytest.raises(InputError) as caught:
        read_case(wrong, table)
    assert [problem.line for problem in caught.value.problems] == [7, 10, 15]
    assert caught.value.problems[1].hint == "did you mean 'plain'?"


def test_catalogs_lie_beside_the_case(document: Callable[..., Document], tmp_path: Path) -> None:
    (tmp_path / "pumps").mkdir()
    assert catalog_paths(document(("site = {}", 'catalog = ["pumps"]'))) == [tmp_path / "pumps"]
    assert catalog_paths(document()) == []


def test_a_catalog_that_is_not_there(document: Callable[..., Document]) -> None:
    with pytest.raises(InputError, match=r"case\.toml:4:12  there is no .*pumps"):
        catalog_paths(document(("site = {}", 'catalog = ["pumps"]')))


def test_a_document_that_is_no_case_has_no_catalogs(document: Callable[..., Document]) -> None:
    with pytest.raises(InputError, match="pump-case/1"):
        catalog_paths(document(("pump-case/1", "pump-case/0")))
