"""The comparison: what is asked, offered, off, and how that is marked."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

import screener
from screener.changes.datasheet import DataSheet, compare
from screener.criteria import criteria
from screener.view import compare as view
from screener.view.blocks import Cell, Heading, Screen, Table
from screener.view.data import Origin

PLANT = Path(__file__).parents[2] / "cli" / "plant"


def sheets_of(*picks: tuple[str, float | None]) -> tuple[DataSheet, ...]:
    loaded = screener.load(PLANT / "case.toml")
    rows = [(loaded.catalog.ids.index(name), diameter) for name, diameter in picks]
    return compare(loaded.case, loaded.catalog, rows)


@pytest.fixture(scope="module")
def sheets() -> tuple[DataSheet, ...]:
    """Whole impeller, best trim, one short of NPSH, one without NPSH or shutoff."""
    return sheets_of(("A", 0.21), ("A", None), ("C", None), ("E", None))


@pytest.fixture(scope="module")
def screen(sheets: tuple[DataSheet, ...]) -> Screen:
    return view.screen(sheets, Origin())


def rows(screen: Screen, key: str) -> list[dict[str, Any]]:
    return [row for row in screen.data["rows"] if row["key"] == key]  # type: ignore[attr-defined]


def tables(screen: Screen) -> dict[str, Table]:
    found, heading = {}, ""
    for block in screen.blocks:
        heading = block.text if isinstance(block, Heading) else heading
        if isinstance(block, Table):
            found[heading] = block
    return found


def lines(table: Table) -> dict[str, list[str]]:
    return {row[0].text: [cell.text for cell in row[1:]] for row in table.rows}


def test_every_criterion_is_a_requirement_of_every_candidate(screen: Screen) -> None:
    found = [row for row in screen.data["rows"] if row["part"] == "requirement"]  # type: ignore[attr-defined]
    names = {criterion.name for criterion in criteria()} | {"capacity_rated", "head_rated"}
    assert {(row["key"], row["candidate"]) for row in found} == {(n, c) for n in names for c in (1, 2, 3, 4)}
    assert len(found) == 4 * len(names)


def test_capacity_and_head_stand_beside_what_is_asked(screen: Screen) -> None:
    """By hand: both pumps give 105 m3/h at 36.77 m, asked are 91.784 at 33.23."""
    flow, head = rows(screen, "capacity_rated")[0], rows(screen, "head_rated")[0]
    assert (flow["offered"], flow["asked"]) == (pytest.approx(105), pytest.approx(91.784, abs=1e-3))
    assert flow["deviation"] == pytest.approx(105 - 91.784, abs=1e-3)
    assert (head["asked"], head["deviation"]) == (pytest.approx(33.23), pytest.approx(3.54))
    assert (flow["verdict"], flow["bound"], flow["unit"]) == (None, None, "m3/h")
    assert lines(tables(screen)["ASKED AND OFFERED"])["capacity, rated, m3/h"][:3] == ["92", "105", "+13"]


def test_a_limit_that_all_share_is_told_once(screen: Screen) -> None:
    table = lines(tables(screen)["ASKED AND OFFERED"])
    assert table["load share, points"][0] == "max 15.0"
    assert table["motor needed, kW"][0] == "max 500"
    shared = rows(screen, "load-share")
    assert {row["asked"] for row in shared} == {15.0}
    assert {row["bound"] for row in shared} == {"max"}


def test_limits_that_differ_stand_in_a_row_of_their_own(screen: Screen) -> None:
    """NPSH: A passes against the caution at 1.3, C fails against 1.1."""
    table = tables(screen)["ASKED AND OFFERED"]
    place = next(n for n, row in enumerate(table.rows) if row[0].text == "NPSHa/NPSHr")
    offered, limits = ([cell.text for cell in row] for row in table.rows[place : place + 2])
    assert limits[0] == "  held against"
    assert limits[2::2] == ["min 1.30", "min 1.30", "min 1.10", "min 1.30"]
    assert offered[1] == ""
    assert offered[6].startswith("x 1.0")
    assert [row["asked"] for row in rows(screen, "npsh-margin")] == [1.3, 1.3, 1.1, 1.3]


def test_what_is_off_is_marked_and_the_worst_comes_first(screen: Screen) -> None:
    table = lines(tables(screen)["ASKED AND OFFERED"])
    assert table["rise to shutoff, %"][-2:] == ["?", ""]  # E has no shutoff
    assert table["flow, % of BEP"][1].startswith("! ")
    order = [row["key"] for row in screen.data["rows"] if row["candidate"] == 1]  # type: ignore[attr-defined]
    assert order[2] == "npsh-margin"  # the only one that fails, before what is not known
    unknown = rows(screen, "rise-to-shutoff")[3]
    assert (unknown["offered"], unknown["asked"], unknown["deviation"]) == (None, None, None)
    assert (unknown["verdict"], unknown["where"]) == ("not assessed", "needs a curve measured at shutoff")
    failed = rows(screen, "npsh-margin")[2]
    assert (failed["verdict"], failed["of"], failed["where"]) == ("fail", "new", "day, P-1 lost")
    assert failed["deviation"] == pytest.approx(failed["offered"] - 1.1, abs=1e-6)


def test_what_applies_to_none_is_left_out_of_the_screen_alone(screen: Screen) -> None:
    titles = {c.title for c in criteria() if c.name in ("trim-law", "speed-range")}
    assert titles.isdisjoint(lines(tables(screen)["ASKED AND OFFERED"]))
    assert [row["verdict"] for row in rows(screen, "trim-law")] == ["pass"] * 4


def test_the_best_of_the_figures_is_marked(screen: Screen) -> None:
    """Cut to 196 mm, A and C take the same power, less than the others."""
    assert [row["verdict"] for row in rows(screen, "power_rated")] == [None, "best", "best", None]
    assert [row["verdict"] for row in rows(screen, "minimum_flow_stable")] == [None] * 4  # all alike
    figures = lines(tables(screen)["FIGURES"])
    assert figures["shaft power, rated, kW"][1].startswith("* ")
    energy = [row["offered"] for row in rows(screen, "energy_mwh_per_year")]
    assert energy == [item["energy_mwh_per_year"] for item in screen.data["candidates"]]  # type: ignore[attr-defined]
    assert rows(screen, "score")[0]["verdict"] is None


def test_what_reads_alike_is_marked_alike() -> None:
    offers = [view.Offer(Cell(f"{value:.0f}", value)) for value in (1861.2, 1861.4, 1900.0)]
    assert [offer.verdict for offer in view._marked(offers, min)] == ["best", "best", ""]
    assert [offer.verdict for offer in view._marked(offers[:2], min)] == ["", ""]
    assert [offer.verdict for offer in view._marked(offers, None)] == [""] * 3
    nothing = [view.Offer(Cell("")), view.Offer(Cell("5", 5.0)), view.Offer(Cell("6", 6.0))]
    assert [offer.verdict for offer in view._marked(nothing, max)] == ["", "", "best"]


def test_deviations_have_the_decimals_of_what_is_offered() -> None:
    assert view.Offer(Cell("2.16", 2.163), Cell("min 1.30", 1.3)).deviation.text == "+0.86"
    assert view.Offer(Cell("16", 16.0), Cell("max 16.4", 16.4)).deviation.text == "+0"
    assert view.Offer(Cell("past 120"), Cell("max 100", 100.0)).deviation.text == ""
    assert view.Offer(Cell("5", 5.0)).deviation.value is None


def test_firm_flow_is_of_what_the_duty_asks(screen: Screen) -> None:
    """P-1 lost by day leaves one whole A, wide open: 141.42 of 210 m3/h."""
    first = rows(screen, "firm_flow")[0]
    assert first["offered"] == pytest.approx(100 * 141.4214 / 210, rel=1e-4)
    assert (first["asked"], first["where"], first["requirement"]) == (100, "day, P-1 lost", "day, P-1 lost")
    assert first["deviation"] == pytest.approx(first["offered"] - 100)


def test_the_table_is_the_rows_of_the_data(screen: Screen) -> None:
    keys = [column.key for column in screen.table.columns]
    for row, cells in zip(screen.data["rows"], screen.table.rows, strict=True):  # type: ignore[call-overload]
        assert row == dict(zip(keys, (cell.value for cell in cells), strict=True))


def test_candidates_say_who_they_are(screen: Screen) -> None:
    first, second, third, last = screen.data["candidates"]  # type: ignore[misc]
    assert (first["pump"], first["diameter"], first["verdict"]) == ("A", 210.0, "rejected")
    assert (second["pump"], second["verdict"]) == ("A", "accepted")
    assert (third["verdict"], last["diameter"], last["verdict"]) == ("rejected", None, "conditional")
    shown = lines(tables(screen)["Second pump for a small plant"])
    assert shown["verdict"] == ["rejected", "accepted", "rejected", "conditional"]
    assert shown["criteria that fail"][1] == "0"
    titles = [c.title for c in tables(screen)["ASKED AND OFFERED"].columns if c.key.startswith("offered")]
    assert titles == ["A", "A", "C", "E"]


def test_where_nobody_knows_what_is_asked() -> None:
    """At 5 m of static head the header stands so low that P-1 runs past its last measured point."""
    loaded = screener.load(PLANT / "case.toml")
    low = replace(loaded.case, levels=(replace(loaded.case.levels[0], static_head=5.0),))
    found = view.screen(compare(low, loaded.catalog, [(0, None), (2, None)]), Origin())
    assert found.data["asked"] == {"where": "day", "flow": None, "head": None}
    assert "Required of the new pump: not known at day." in str(found.blocks[1])
    assert rows(found, "capacity_rated")[0]["deviation"] is None
