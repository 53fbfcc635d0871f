"""Which combination may run at which header flow, as bars."""

from __future__ import annotations

from screener.changes.operation import Operation
from screener.view import operating_map as words
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Series
from screener.view.charts import parts
from screener.view.display import Display

HALF = 0.28
"""Half of the height of a bar, where rows are 1 apart."""


def chart(result: Operation) -> Chart:
    """One row for each combination, its allowed header flows as bars, duties as uprights."""
    case = result.bench.header.case
    display = Display(case.display)
    found, ends, told = [], [], []
    for place, ranges in enumerate(result.map.ranges):
        row = float(len(result.map.ranges) - place)
        name = words.running(result, place)
        role = Role.NEW if result.map.combinations[place][1] else Role.INSTALLED
        bars = [(display.number("flow", item.low), display.number("flow", item.high)) for item in ranges]
        told.append(f"{name}: {', '.join(f'{low:g} to {high:g}' for low, high in bars) or 'never'}")
        if not bars:
            found.append(Series("never", role, Mark.POINTS, [0.0], [row], labels=[f"{name}: never"]))
            continue
        x = [flow for low, high in bars for flow in (low, high, None)][:-1]
        edges = [1.0, 1.0, None] * len(bars)
        found.append(
            Series(
                name,
                role,
                Mark.AREA,
                x,
                [None if edge is None else row + HALF for edge in edges[:-1]],
                [None if edge is None else row - HALF for edge in edges[:-1]],
            )
        )
        for item, (low, high) in zip(ranges, bars, strict=True):
            for flow, spot in ((low, item.below), (high, item.above)):
                if spot is not None and not spot.ran.within:
                    ends.append((flow, row, words.why(result, spot.ran)))
    duties = Series(
        "",
        Role.DUTY,
        Mark.UPRIGHT,
        parts.numbers(display, "flow", [duty.flow for duty in case.duties]),
        labels=[duty.name for duty in case.duties],
    )
    stops = Series(
        "what stops it there",
        Role.LIMIT,
        Mark.POINTS,
        [flow for flow, _, _ in ends],
        [row for _, row, _ in ends],
        labels=[text for *_, text in ends],
    )
    x_axis = parts.axis(display, "header flow, throttled", "flow")
    return Chart(
        key="operating-map",
        title="Header flows at which each combination may run",
        x=x_axis,
        panels=[Panel(Axis(""), [*found, duties, *([stops] if ends else [])])],
        note="Ends are found to about 1 %, on the safe side, at the highest and the lowest static head. "
        + " ".join(
            words.meanings(
                {
                    spot.ran.breach
                    for ranges in result.map.ranges
                    for item in ranges
                    for spot in (item.below, item.above)
                    if spot is not None
                }
            )
        ),
        told=f"Allowed header flows, {x_axis.unit}: {'; '.join(told)}.",
    )
