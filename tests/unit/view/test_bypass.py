"""Bypasses and heating in words: what a reader sees of each figure, on the demo's names and units."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import screener
from screener.changes.bypass import Governs, Need, Warming
from screener.model.finding import Verdict
from screener.screening.assess import Bench, set_up
from screener.view import bypass
from screener.view.blocks import Heading, Lines, Table, Tone
from screener.view.display import Display

NAN = float("nan")
NEED = {
    "flow": 50 / 3600,
    "minimum": 120 / 3600,
    "governs": Governs.THERMAL,
    "bypass": 70 / 3600,
    "idle": False,
    "head": 42.123,
    "power": 12_340.0,
    "energy": 7.2e9,
    "pipe": 0.0908,
    "bore": 0.0412,
}
WARM = {"flow": 50 / 3600, "share": 0.4167, "rise": 1.26, "eye": NAN, "casing": NAN, "needs": ()}


@pytest.fixture(scope="module")
def bench() -> Bench:
    return set_up(screener.load(screener.demo("osier-bank", "case.toml")).case)


@pytest.fixture(scope="module")
def display(bench: Bench) -> Display:
    return Display(bench.header.case.display)


@pytest.fixture(scope="module")
def night(bench: Bench) -> int:
    """The first state of the demo's night, at river mid."""
    duties = [duty.name for duty in bench.header.case.duties]
    return next(row for row, state in enumerate(bench.header.states) if duties[state.duty] == "night")


def need(night: int, pump: int = 0, **changes: Any) -> Need:
    return Need(night, pump, **NEED | changes)


def cells(table: Any, row: int = 0) -> dict[str, str]:
    assert isinstance(table, Table)
    return {column.key: cell.text for column, cell in zip(table.columns, table.rows[row], strict=True)}


def test_nothing_is_said_where_nothing_is_needed(bench, display) -> None:
    assert bypass.bypasses(bench, display, [], Verdict.ACCEPTED) == []
    assert bypass.heating(bench, display, []) == []


def test_a_row_in_the_units_of_the_case(bench, display, night) -> None:
    heading, table = bypass.bypasses(bench, display, [need(night, 1)], None)
    assert isinstance(heading, Heading)
    assert cells(table) == {
        "state": "night",
        "level": "river mid",
        "pump": "P-1",
        "flow": "50",
        "minimum": "120",
        "governs": "thermal",
        "bypass": "70",
        "head": "42.12",
        "power": "12.3",
        "energy": "2.0",
        "bore": "41.2",
    }
    note = " ".join(table.note)
    assert "upstream of its check valve" in note
    assert "counts in NPSH available" in note
    assert "pipe of 90.8 mm" in note
    assert "cavitation in the plate are not checked" in note


def test_a_pump_that_would_deliver_nothing_and_the_verdict(bench, display, night) -> None:
    idle = need(night, flow=0.0, idle=True, bore=NAN, governs=Governs.CURVE)
    _, table, lines = bypass.bypasses(bench, display, [idle], Verdict.CONDITIONAL)
    shown = cells(table)
    assert (shown["flow"], shown["bore"], shown["governs"]) == ("shut", "-", "curve")
    assert table.rows[0][6].tone == Tone.WARNING
    assert isinstance(lines, Lines)
    first, last = lines.lines
    assert first == "new would deliver nothing at night, river mid: better run fewer pumps there."
    assert last == "With these bypasses, run again in full, it is conditional."


def test_without_the_extra_the_column_gives_way_to_a_hint(bench, display, night) -> None:
    _, table = bypass.bypasses(bench, display, [need(night, bore=None)], None)
    assert "bore" not in cells(table)
    assert "pump-header-screener[orifice]" in table.note[-1]


def test_a_size_that_is_not_known_is_no_number(bench, display, night) -> None:
    unknown = dict.fromkeys(("minimum", "bypass", "head", "power", "energy", "pipe"), NAN)
    item = need(night, **unknown, flow=0.0, bore=None)
    _, table = bypass.bypasses(bench, display, [item], None)
    shown = cells(table)
    assert shown["governs"] == "not stated"
    assert [shown[key] for key in ("minimum", "bypass", "head", "power", "energy")] == ["-"] * 5
    assert "orifice" not in " ".join(table.note)
    (row,) = bypass.bypasses_data(bench, display, [item], None)["pumps"]
    numbers = ("kept_at", "governs", "bypass", "head", "power", "energy_mwh_per_year", "pipe", "bore")
    assert [row[key] for key in numbers] == [None] * 8


def test_bypasses_as_data(bench, display, night) -> None:
    data = bypass.bypasses_data(bench, display, [need(night)], Verdict.REJECTED)
    assert data["verdict"] == "rejected"
    assert data["pumps"] == [
        {
            "state": "night, river mid",
            "duty": "night",
            "level": "river mid",
            "pump": "new",
            "flow": 50.0,
            "kept_at": 120.0,
            "governs": "thermal",
            "bypass": 70.0,
            "delivers_nothing": False,
            "head": 42.123,
            "power": 12.34,
            "energy_mwh_per_year": 2.0,
            "pipe": 90.8,
            "bore": 41.2,
        }
    ]


def test_how_warm_in_words(bench, display, night) -> None:
    low = Warming(night, 0, **WARM)
    shut = Warming(night, 1, **WARM | {"flow": 0.0, "share": 0.0, "rise": NAN, "eye": 510.0, "casing": 891.0})
    blind = Warming(night, 2, **WARM | {"flow": 0.0, "share": NAN, "rise": NAN, "needs": ("casing volume",)})
    _, table = bypass.heating(bench, display, [low, shut, blind])
    keys = ("pump", "flow", "share", "rise", "eye", "casing", "needs")
    assert [[cells(table, row)[key] for key in keys] for row in range(3)] == [
        ["new", "50", "42", "1.3", "-", "-", ""],
        ["P-1", "shut", "0", "-", "8.5", "14.8", ""],
        ["P-2", "shut", "-", "-", "-", "-", "needs casing volume"],
    ]


def test_how_warm_as_data(bench, display, night) -> None:
    item = Warming(night, 1, 0.0, 0.0, np.nan, 510.0, np.nan, ("casing volume",))
    assert bypass.heating_data(bench, display, [item]) == [
        {
            "state": "night, river mid",
            "pump": "P-1",
            "flow": 0.0,
            "flow_of_minimum": 0.0,
            "temperature_rise_k": None,
            "boils_at_suction_pressure_s": 510.0,
            "boils_at_shutoff_pressure_s": None,
            "needs": ["casing volume"],
        }
    ]
