"""The screen of `screener header`: how the header runs today, and what it asks of a new pump."""

from __future__ import annotations

from typing import Any

import numpy as np

from screener.model.case import Case
from screener.model.finding import Outcome
from screener.model.run import Kind, State, in_state
from screener.screening.assess import Bench
from screener.screening.today import HeaderReport
from screener.view import data, names, requirement
from screener.view import liquids as view_liquids
from screener.view import speeds as view_speeds
from screener.view.blocks import Block, Cell, Chart, Column, Heading, Lines, Screen, Table, Tone
from screener.view.data import Origin, head
from screener.view.display import DASH, Display, percent, plain, word
from screener.view.findings import Found, found
from screener.view.flows import flow_cell


def screen(report: HeaderReport, origin: Origin) -> Screen:
    """The header today as blocks, its table of states, and all of it as data."""
    bench = report.bench
    case = bench.header.case
    display = Display(case.display)
    table = _today(bench, display)
    already = _already(report, display)
    blocks: list[Block] = [
        Heading(case.title, _liquid(bench)),
        Lines([f"{_installed(bench)}    {_units(display)}"]),
        Heading("TODAY, WITHOUT THE NEW PUMP"),
        table,
        Lines(_nothing_flows(bench), Tone.WARNING),
        *_wear(case, display),
        *view_liquids.viscous(bench, None),
        *view_speeds.speeds(bench, report.usable),
        *requirement.blocks(report, display),
        Heading("PERMITTED HEADER FLOW TODAY"),
        _bands(report, display),
    ]
    if already:
        blocks += [
            Heading("OUTSIDE A LIMIT TODAY ALREADY", "holds no candidate back unless it makes it worse"),
            _table_of(already),
        ]
    blocks.append(Lines(data.CAUTIONS, Tone.QUIET))
    content = _data(report, display, origin, already)
    return Screen(blocks, table, content, charts=lambda: _charts(report))


def _charts(report: HeaderReport) -> list[Chart]:
    """The chart of the header, made only when asked for."""
    from screener.view.charts import today

    return [today.chart(report)]


def _liquid(bench: Bench) -> str:
    return "; ".join(
        liquid.name if np.isnan(liquid.temperature) else f"{liquid.name}, {liquid.temperature:.4g} degC"
        for liquid in bench.header.case.liquids
    )


def _installed(bench: Bench) -> str:
    tags = [pump.tag for pump in bench.header.case.installed]
    listed = tags[0] if len(tags) == 1 else f"{', '.join(tags[:-1])} and {tags[-1]}"
    count = bench.header.case.new_pump.count
    return f"{listed} installed, {'one place' if count == 1 else f'{count} places'} free."


def _nothing_flows(bench: Bench) -> list[str]:
    """Duties in which the static head lies above every shutoff head today."""
    states = [s for s, total in zip(bench.header.states, bench.today.total[0], strict=True) if total == 0]
    duties = dict.fromkeys(
        bench.header.case.duties[s.duty].name for s in states if s.kind == Kind.DUTY and s.running
    )
    if not duties:
        return []
    return [
        f"Nothing flows at {', '.join(duties)}: the static head lies above the shutoff head of every pump."
    ]


def _units(display: Display) -> str:
    return f"Flows {display.unit('flow')}; heads {display.unit('head')}, at the header."


def _today(bench: Bench, display: Display) -> Table:
    """One row for each state of the installed pumps; what several duties share is listed once."""
    case, run = bench.header.case, bench.today
    kinds = sorted({int(row) for row in bench.header.alike})
    columns = [
        Column("duty", "duty", left=True),
        Column("level", "level", left=True, rank=0 if len(case.levels) > 1 else 9),
        Column("liquid", "liquid", left=True, rank=3 if len(case.liquids) > 1 else 9),
        Column("asked", "asked", display.unit("flow")),
        Column("total_flow", "given", display.unit("flow")),
        Column("header_head", "header", display.unit("head")),
        *(
            Column(
                f"flow {names.alike(case, list(bench.header.alike), row)}",
                f"each {names.alike(case, list(bench.header.alike), row)}",
                display.unit("flow"),
                rank=2,
            )
            for row in kinds
        ),
        Column("flow_of_best", "% BEP", "%", rank=1),
        Column("npsh_ratio", "NPSHa/r", rank=1),
        Column("motor_load", "motor %", "%", rank=3),
    ]
    rows, seen = [], set()
    for place, state in enumerate(bench.header.states):
        gone = run.conditions.runs[place].tobytes()
        key = (state.kind, gone, state.level, state.liquid, state.asked if state.kind == Kind.DUTY else 0.0)
        running = [int(pump) for pump in np.flatnonzero(run.conditions.runs[place]) if pump]
        if key in seen or not running:
            continue
        seen.add(key)
        rows.append(
            [
                word(_name(bench, state)),
                word(names.level(case, state)),
                word(names.liquid(case, state)),
                display.cell("flow", state.asked if state.kind == Kind.DUTY else np.nan),
                display.cell("flow", run.total[0, place]),
                display.cell("head", run.header[0, place]),
                *(_flow(bench, display, place, row) for row in kinds),
                percent(
                    _worst(
                        run.flow[0, place] / in_state(run.bounds.best, place)[0], running, farthest_from=1.0
                    )
                ),
                plain(_worst(run.npsh_available[0, place] / run.npsh_required[0, place], running), 2),
                percent(-_worst(-run.power[0, place] / run.ratings.motor[0], running)),
            ]
        )
    note = [
        "Wide open and with a pump lost nothing is throttled. % BEP: flow over best-efficiency flow, the "
        "pump farthest off. NPSHa/r: available over required, the lowest."
    ]
    return Table(columns, rows, note)


def _name(bench: Bench, state: State) -> str:
    if state.kind == Kind.DUTY:
        return names.situation(bench.header.case, state)
    several = any(len(duty.running) > 1 for duty in bench.header.case.duties)
    if state.kind == Kind.WIDE_OPEN:
        return f"open: {names.combination(bench.header.case, state.running)}" if several else "wide open"
    return f"{names.lost(bench.header.case, state)} lost"


def _flow(bench: Bench, display: Display, place: int, kind: int) -> Cell:
    """Flow of one of the identical pumps that run; what is marked shows first."""
    running = [row for row in bench.header.states[place].running if bench.header.alike[row] == kind]
    if not running:
        return Cell(DASH)
    flow = bench.today.flow[0, place]
    marked = [row for row in running if not np.isfinite(flow[1 + row]) and not np.isnan(flow[1 + row])]
    return flow_cell(display, bench.today, place, 1 + (marked or running)[0])


def _worst(values: Any, columns: list[int], farthest_from: float | None = None) -> float:
    """The smallest finite value of some columns, or the one farthest from a figure; else NaN."""
    finite = [float(values[column]) for column in columns if np.isfinite(values[column])]
    if not finite:
        return np.nan
    return min(finite) if farthest_from is None else max(finite, key=lambda value: abs(value - farthest_from))


def _wear(case: Case, display: Display) -> list[Block]:
    """What was fitted to points measured in the field, and what those points leave open."""
    fitted = [(pump.tag, pump.wear) for pump in case.installed if pump.wear is not None]
    if not fitted:
        return []
    columns = [
        Column("pump", "pump", left=True),
        Column("points", "points"),
        Column("head_loss", "head lost", "%"),
        Column("head_loss_uncertainty", "+/-", "%", rank=1),
        Column("head_loss_residual", "off by", display.unit("head"), rank=2),
        Column("leakage", "or leakage", display.unit("flow")),
        Column("leakage_uncertainty", "+/-", display.unit("flow"), rank=1),
        Column("leakage_residual", "off by", display.unit("head"), rank=2),
        Column("nearer", "nearer", left=True),
    ]
    rows = [
        [
            word(tag),
            plain(fit.points, 0),
            percent(fit.loss, 1),
            percent(fit.loss_error, 1),
            display.cell("head", fit.loss_residual),
            display.cell("flow", fit.leak),
            display.cell("flow", fit.leak_error),
            display.cell("head", fit.leak_residual),
            word(data.WEAR_READINGS[fit.prefers]),
        ]
        for tag, fit in fitted
    ]
    reading = percent(fitted[0][1].reading, 1).text
    note = [
        "Two readings of the same points: the whole curve lower, or a flow that goes round inside the pump. "
        "+/-: standard uncertainty, by the scatter of the points and at least what an error of reading of "
        f"{reading} % of head allows. off by: root mean square distance of the points."
    ]
    told = [f"{tag}: {'; '.join(data.wear_cautions(fit))}." for tag, fit in fitted if fit.cautions]
    return [Heading("WEAR BY FIELD POINTS"), Table(columns, rows, note), Lines(told, Tone.WARNING)]


def _bands(report: HeaderReport, display: Display) -> Table:
    """Smallest and largest header flow of every combination of installed pumps."""
    header = report.bench.header
    columns = [
        Column("running", "running", left=True),
        Column("lowest", "from", display.unit("flow")),
        Column("lowest_by", "set by", left=True, rank=1),
        Column("lowest_head", "header", display.unit("head"), rank=2),
        Column("highest", "to", display.unit("flow")),
        Column("highest_by", "set by", left=True),
    ]
    rows = []
    for item in report.permitted:
        low, high = float(item.band.lowest[0]), float(item.band.highest[0])
        first = item.running[int(item.band.lowest_by[0])]
        last = item.running[int(item.band.highest_by[0])]
        never = low > item.wide_open
        limited = item.wide_open < high
        rows.append(
            [
                word(names.combination(header.case, item.running)),
                Cell("never", None, Tone.BAD) if never else display.cell("flow", low),
                word(("" if header.minimum[first] > 0 else "at least, ") + header.case.installed[first].tag),
                display.cell("head", float(item.band.lowest_head[0])),
                display.cell("flow", float(np.fmin(high, item.wide_open))),
                word("wide open" if limited else header.case.installed[last].tag),
            ]
        )
    note = [
        "from: the first pump comes to its minimum flow. to: the first leaves its region, or the system "
        "takes no more."
    ]
    return Table(columns, rows, note)


def _already(report: HeaderReport, display: Display) -> list[Found]:
    items = found(report.bench, display, report.inherited, 0)
    return [item for item in items if item.outcome in (Outcome.FAIL, Outcome.CAUTION)]


def _table_of(items: list[Found]) -> Table:
    columns = [
        Column("criterion", "criterion", left=True),
        Column("outcome", "", left=True),
        Column("pump", "pump", left=True),
        Column("observed", "is"),
        Column("limit", "limit"),
        Column("where", "where", left=True),
    ]
    rows = [
        [
            word(f"{item.criterion.name}"),
            item.verdict,
            word(item.pump),
            item.value,
            item.limit,
            word(item.where),
        ]
        for item in items
    ]
    return Table(columns, rows)


def _data(report: HeaderReport, display: Display, origin: Origin, already: list[Found]) -> dict[str, Any]:
    header = report.bench.header
    return {
        **head(report.bench, "pump-header", origin),
        "today": data.states(report.bench, display, report.bench.today, today=True),
        "installed": data.installed(header.case, display),
        "viscous": view_liquids.viscous_data(report.bench, None),
        "speeds": view_speeds.speeds_data(report.bench, report.usable),
        "requirement": requirement.rows(report.bench, display, report.needs, report.naive),
        "permitted": [
            {
                "running": names.combination(header.case, item.running),
                "lowest": display.number("flow", item.band.lowest[0]),
                "lowest_by": header.case.installed[item.running[int(item.band.lowest_by[0])]].tag,
                "highest": display.number("flow", np.fmin(item.band.highest[0], item.wide_open)),
                "wide_open": display.number("flow", item.wide_open),
            }
            for item in report.permitted
        ],
        "inherited": [data.finding(item, display) for item in already],
        "limits": data.limits(report.bench, display),
    }
