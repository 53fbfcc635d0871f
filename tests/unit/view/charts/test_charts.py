"""Charts of the demo plant by what they hold: series, labels, units, and nothing beyond measured data."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

import screener
from screener.changes.operation import Operation, operation
from screener.screening.one import Explained, explain, trims
from screener.screening.shortlist import Shortlist, shortlist
from screener.screening.today import HeaderReport, header_report
from screener.view.blocks import Chart, Mark, Role, Series
from screener.view.charts import load_share, operating_map, pump, today, trade_off, with_new
from screener.view.charts import trims as trims_chart

M3H = 3600.0


@pytest.fixture(scope="module")
def catalog() -> Any:
    return screener.load_catalog(screener.demo("osier-bank", "pumps"))


@pytest.fixture(scope="module")
def case(catalog: Any) -> Any:
    return screener.load_case(screener.demo("osier-bank", "case.toml"), catalog)


@pytest.fixture(scope="module")
def accepted(case: Any, catalog: Any) -> Explained:
    return explain(case, catalog, catalog.ids.index("200-400-4 M"))


@pytest.fixture(scope="module")
def shut(case: Any, catalog: Any) -> Explained:
    """The pump that its check valve holds shut at night."""
    return explain(case, catalog, catalog.ids.index("200-400-4 K"))


@pytest.fixture(scope="module")
def report(case: Any) -> HeaderReport:
    return header_report(case)


@pytest.fixture(scope="module")
def ranked(case: Any, catalog: Any) -> Shortlist:
    return shortlist(case, catalog)


@pytest.fixture(scope="module")
def operated(case: Any, catalog: Any) -> Operation:
    return operation(case, catalog, catalog.ids.index("200-400-4 M"))


def every(chart: Chart) -> Iterator[Series]:
    for panel in chart.panels:
        yield from panel.series


def named(chart: Chart, label: str, panel: int = 0) -> Series:
    return next(item for item in chart.panels[panel].series if item.label == label)


def point(series: Series, label: str) -> tuple[float, float]:
    """The point of one label."""
    place = list(series.labels).index(label)
    x, y = series.x[place], series.y[place]
    assert x is not None
    assert y is not None
    return x, y


def test_series_are_whole_and_axes_have_units(
    accepted, shut, report, ranked, operated, case, catalog
) -> None:
    charts = [with_new.chart(one) for one in (accepted, shut)]
    charts += [pump.chart(accepted), today.chart(report), operating_map.chart(operated)]
    charts += [
        load_share.chart(accepted),
        trade_off.chart(ranked),
        trims_chart.chart(trims(case, catalog, accepted.model)),
    ]
    for chart in charts:
        assert chart is not None
        assert chart.title
        assert chart.told.endswith(".")
        assert chart.x.unit in ("m3/h", "%", "mm")
        for panel in chart.panels:
            assert panel.y.unit in ("m", "kW", "%", "m3/h") or not panel.y.title
        for series in every(chart):
            assert series.x
            if series.mark != Mark.UPRIGHT:
                assert len(series.x) == len(series.y)
            if series.mark == Mark.AREA:
                assert len(series.low) == len(series.x)
            assert len(series.labels) in (0, len(series.x))


def test_the_header_with_a_new_pump(accepted: Explained) -> None:
    chart = with_new.chart(accepted)
    labels = [series.label for series in chart.panels[0].series]
    assert labels == [
        "system, river high to river low",
        "P-1, P-2",
        "new 200-400-4 M, 398 mm",
        "P-1 + P-2 + new",
        "duty",
        "wide open, or with one pump lost",
    ]
    system = named(chart, labels[0])
    assert (system.low[0], system.y[0]) == (11.0, 14.0)  # static heads of the case
    at = system.x.index(0.0)
    assert at == 0
    duty = named(chart, "duty")
    assert list(duty.labels) == ["peak", "normal", "night"]  # both levels of the night are one point
    assert point(duty, "normal")[0] == 2300.0
    trips = named(chart, "wide open, or with one pump lost")
    assert "peak, P-1 lost" in trips.labels
    assert "night: 1700 m3/h" in chart.told


def test_every_point_lies_where_the_run_says(accepted: Explained) -> None:
    run, header = accepted.judged.run, accepted.bench.header
    duty = named(with_new.chart(accepted), "duty")
    assert point(duty, "peak") == pytest.approx(
        (run.total[0, header.rated] * M3H, run.header[0, header.rated]), rel=1e-6
    )
    own = named(pump.chart(accepted), "duty")
    assert point(own, "peak")[0] == pytest.approx(run.flow[0, header.rated, 0] * M3H, rel=1e-6)


def test_throttled_duties_lie_on_the_combined_curve(accepted: Explained) -> None:
    chart = with_new.chart(accepted)
    together, duty = named(chart, "P-1 + P-2 + new"), named(chart, "duty")
    x, y = np.array(together.x, float), np.array(together.y, float)
    order = np.argsort(x)
    for label in duty.labels:
        flow, head = point(duty, label)
        assert np.interp(flow, x[order], y[order]) == pytest.approx(head, abs=0.02)


def test_no_curve_leaves_its_measured_data(accepted: Explained, shut: Explained) -> None:
    for one in (accepted, shut):
        pumps, installed = one.judged.run.pumps, one.bench.header.case.pumps
        chart = pump.chart(one)
        for series, curves in (
            (named(chart, with_new.name_of(one, _display(one))), pumps.curves),
            (named(chart, "P-1, P-2"), installed.curves),
            (named(chart, "required", len(chart.panels) - 1), pumps.curves),
        ):
            assert min(series.x) == pytest.approx(curves.start[0] * M3H, abs=1e-4)  # type: ignore[type-var]
            assert max(series.x) == pytest.approx(curves.end[0] * M3H, rel=1e-6)  # type: ignore[type-var]


def _display(one: Explained) -> Any:
    from screener.view.display import Display

    return Display(one.bench.header.case.display)


def test_a_curve_without_shutoff_starts_where_it_was_measured(case: Any, catalog: Any) -> None:
    one = explain(case, catalog, catalog.ids.index("200-400-4 B"))  # no point at shutoff
    start = float(one.judged.run.pumps.curves.start[0]) * M3H
    assert start > 10
    chart = with_new.chart(one)
    own = next(series for series in chart.panels[0].series if series.role == Role.NEW)
    assert own.x[0] == pytest.approx(start)
    together = named(chart, "P-1 + P-2 + new")
    assert min(together.x) >= round(start, 3)  # type: ignore[type-var, operator]


def test_a_pump_that_gives_nothing_is_told_so(shut: Explained) -> None:
    chart = pump.chart(shut)
    flow, head = point(named(chart, "duty"), "night (gives nothing)")
    own = named(chart, "200-400-4 K, 387 mm")
    assert flow == 0
    assert own.x[0] == 0
    assert own.y[0] is not None
    assert head > own.y[0]
    assert "No figures, a pump being past its data: peak, P-1 lost, river low" in chart.note


def test_the_pump_by_itself(accepted: Explained) -> None:
    chart = pump.chart(accepted)
    assert [panel.y.title for panel in chart.panels] == [
        "head at the header",
        "efficiency",
        "shaft power",
        "NPSH",
    ]
    assert [panel.y.unit for panel in chart.panels] == ["m", "%", "kW", "m"]
    aside = [series.label for series in chart.panels[0].series if series.role == Role.NEW_ASIDE]
    assert aside == ["408 mm, passes"]
    areas = {series.label: series for series in chart.panels[0].series if series.mark == Mark.AREA}
    assert list(areas) == ["below minimum flow", "70 to 120 % of best efficiency", "tolerance"]
    best = accepted.judged.run.pumps.bep_flow[0] * M3H
    region = areas["70 to 120 % of best efficiency"]
    assert (region.x[0], region.x[-1]) == pytest.approx((0.7 * best, 1.2 * best), rel=1e-6)
    band, middle = areas["tolerance"], named(chart, "200-400-4 M, 398 mm")
    for high, head, low in zip(band.y, middle.y, band.low, strict=True):
        assert low < head < high  # type: ignore[operator]
    assert named(chart, "motor 110 kW", 2).y == [110.0, 110.0]


def test_npsh_margin_is_the_greater_of_ratio_and_difference(accepted: Explained) -> None:
    chart = pump.chart(accepted)
    required = np.array(named(chart, "required", 3).y, float)
    margin = np.array(named(chart, "with its margin", 3).y, float)
    # ANSI/HI 9.6.1, water, high suction specific speed: 1.2 times, or 1 m more
    assert margin == pytest.approx(np.maximum(1.2 * required, required + 1.0), rel=1e-6)


def test_where_nothing_passes_the_ends_on_offer_are_shown(shut: Explained) -> None:
    aside = [series.label for series in pump.chart(shut).panels[0].series if series.role == Role.NEW_ASIDE]
    assert aside == ["340 mm", "405 mm"]


def test_a_pump_without_power_has_no_panel_for_it(accepted: Explained) -> None:
    run = accepted.judged.run
    curves = replace(
        run.pumps.curves,
        power=np.full_like(run.pumps.curves.power, np.nan),
        efficiency=np.full_like(run.pumps.curves.efficiency, np.nan),
    )
    blind = replace(run, pumps=replace(run.pumps, curves=curves))
    chart = pump.chart(replace(accepted, judged=replace(accepted.judged, run=blind)))
    assert [panel.y.title for panel in chart.panels] == ["head at the header", "NPSH"]


def test_shares_of_load(accepted: Explained) -> None:
    chart = load_share.chart(accepted)
    assert chart is not None
    new, beside = named(chart, "new 200-400-4 M, 398 mm"), named(chart, "P-1, P-2")
    largest = np.argmax(np.array(new.x, float))
    assert new.x[largest] == pytest.approx(3000.0, rel=1e-6)
    assert (new.y[largest], beside.y[largest]) == pytest.approx((100.0, 100.0), abs=1e-3)
    flows = accepted.judged.run.flow[0]
    rated = accepted.bench.header.rated
    night = next(
        p for p, s in enumerate(accepted.bench.header.states) if s.asked * M3H == pytest.approx(1700)
    )
    share = 100 * flows[night, 0] / flows[rated, 0]
    assert point(named(chart, "duty"), "night") == pytest.approx((1700.0, share), rel=1e-4)
    x, y = np.array(new.x, float), np.array(new.y, float)
    assert np.interp(1700.0, x[::-1] if x[0] > x[-1] else x, y[::-1] if x[0] > x[-1] else y) == pytest.approx(
        share, abs=0.05
    )
    limit = next(series for series in every(chart) if series.mark == Mark.UPRIGHT)
    assert limit.role == Role.LIMIT
    assert limit.label == "lowest safe, P-1: 933 m3/h"


def test_shares_are_not_drawn_where_the_rated_duty_has_no_figures(accepted: Explained) -> None:
    run = accepted.judged.run
    lost = replace(run, flow=np.full_like(run.flow, np.nan), header=np.full_like(run.header, np.nan))
    assert load_share.chart(replace(accepted, judged=replace(accepted.judged, run=lost))) is None


def test_the_header_today_and_the_true_duty(report: HeaderReport) -> None:
    chart = today.chart(report)
    assert "new" not in " ".join(series.label for series in every(chart) if series.role == Role.COMBINED)
    need, simple = report.needs[report.bench.header.rated], report.naive[report.bench.header.rated]
    true = named(chart, "duty of the new pump")
    assert (true.x[0], true.y[0]) == pytest.approx((need.flow * M3H, need.header), rel=1e-6)
    assert list(true.labels) == ["true duty: 870 m3/h"]
    other = named(chart, "commonly taken for it")
    assert list(other.labels) == ["flow missing today: 379 m3/h", "duty less rated flows: 800 m3/h"]
    assert other.x[0] == pytest.approx(simple.missing_flow * M3H, rel=1e-6)
    level = named(chart, "system at peak: 34.00 m")
    assert (level.x, level.y) == ([0.0, 3000.0], [34.0, 34.0])


def test_worn_pumps_are_drawn_as_they_are_and_restored() -> None:
    demo = screener.load(screener.demo("bracken-quarry", "case.toml"))
    chart = today.chart(header_report(demo.case))
    roles = {series.label: series.role for series in every(chart)}
    assert roles["P-1"] == roles["P-2"] == Role.INSTALLED
    assert roles["P-1, P-2 restored"] == Role.RESTORED
    assert named(chart, "P-2").y[0] < named(chart, "P-1").y[0] < named(chart, "P-1, P-2 restored").y[0]  # type: ignore[operator]


def test_a_duty_held_by_speed_has_its_curve_at_that_speed() -> None:
    demo = screener.load(screener.demo("teasel-hill", "case.toml"))
    one = explain(demo.case, demo.catalog, demo.catalog.ids.index("200-450-4 M"))
    chart = with_new.chart(one)
    rated = one.bench.header.rated
    speed = 100 * one.judged.run.bounds.speed[0, rated, 0]
    together = named(chart, f"P-1 + P-2 + new at {speed:.0f} %")
    flow, head = one.judged.run.total[0, rated] * M3H, one.judged.run.header[0, rated]
    x, y = np.array(together.x, float), np.array(together.y, float)
    order = np.argsort(x)
    assert np.interp(flow, x[order], y[order]) == pytest.approx(head, abs=0.05)
    assert f"at {speed:.0f} % speed" in [series.label for series in every(pump.chart(one))]
    assert "Where speed holds the flow" in chart.note


def test_the_trade_off_names_the_best(ranked: Shortlist) -> None:
    chart = trade_off.chart(ranked)
    assert chart is not None
    best = named(chart, "accepted")
    assert len(best.x) == 23
    assert list(best.labels)[:2] == ["250-500-6 M", "200-400-4 D"]
    assert [bool(label) for label in best.labels] == [True] * 10 + [False] * 13
    assert (best.x[0], best.y[0]) == pytest.approx((-0.6, 55.0), abs=0.05)
    assert not named(chart, "near miss").labels
    assert named(chart, "caution").x == [-5.0, 5.0]
    figures = ranked.best.figures
    known = np.isfinite(figures.shutoff) & np.isfinite(figures.efficiency)
    drawn = [series for series in every(chart) if series.role in (Role.NEW, Role.NEW_ASIDE, Role.LIMIT)]
    assert sum(len(series.x) for series in drawn if series.mark == Mark.POINTS) == known.sum()


def test_diameters_by_verdict(case: Any, catalog: Any) -> None:
    result = trims(case, catalog, catalog.ids.index("200-400-4 M"))
    chart = trims_chart.chart(result)
    assert chart is not None
    assert chart.x.unit == "mm"
    accepted = named(chart, "accepted", 1)
    assert accepted.x == [float(mm) for mm in range(398, 409)]
    rejected = named(chart, "rejected", 1)
    assert rejected.labels[list(rejected.x).index(397.0)] == "duty-flow"
    assert named(chart, "asked at night", 1).y == [1700.0, 1700.0]
    assert named(chart, "best: 398 mm").x == [398.0]
    assert "398 to 408 mm accepted" in chart.told


def test_the_operating_map_as_bars(operated: Operation) -> None:
    chart = operating_map.chart(operated)
    bars = [series for series in every(chart) if series.mark == Mark.AREA]
    assert [bar.label for bar in bars] == ["P-1", "P-1 + P-2", "new", "P-1 + new", "P-1 + P-2 + new"]
    for bar, ranges in zip(bars, operated.map.ranges, strict=True):
        assert (bar.x[0], bar.x[-1]) == pytest.approx((ranges[0].low * M3H, ranges[-1].high * M3H), rel=1e-6)
    rows = [bar.y[0] for bar in bars]
    assert rows == sorted(rows, reverse=True)  # type: ignore[type-var]
    duties = next(series for series in every(chart) if series.mark == Mark.UPRIGHT)
    assert dict(zip(duties.labels, duties.x, strict=True)) == {"peak": 3000, "normal": 2300, "night": 1700}
    stops = named(chart, "what stops it there")
    assert stops.labels[0] == "low P-1"


def test_a_combination_that_may_never_run_keeps_its_row(operated: Operation) -> None:
    ranges = ((), *operated.map.ranges[1:])
    chart = operating_map.chart(replace(operated, map=replace(operated.map, ranges=ranges)))
    never = named(chart, "never")
    assert list(never.labels) == ["P-1: never"]
    assert "P-1: never" in chart.told
