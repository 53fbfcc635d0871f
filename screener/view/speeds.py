"""Speeds of pumps that vary them: to blocks and data."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from screener.header.setting import speed_limits
from screener.model.run import Kind, Run, in_state
from screener.screening.assess import Bench
from screener.screening.today import Usable
from screener.view import names
from screener.view.blocks import Block, Cell, Column, Heading, Table
from screener.view.display import percent, plain, tidy, word

NOTE = (
    "Nothing throttled. opens: the speed at which the check valve opens; minimum flow: at which the pump "
    "reaches its minimum flow; both beside the other pumps at load. usable: from there, or from the lowest "
    "speed of its drive, to the speed at load, in percent of that."
)


def of_new(bench: Bench, run: Run) -> list[Usable]:
    """The speeds of one candidate in every duty whose flow is held by speed."""
    case = bench.header.case
    if not case.new_pump.drive.varies:
        return []
    low, high = speed_limits(run.pumps, [case.new_pump.drive])
    return [
        Usable(
            place,
            -1,
            float(run.pumps.speed[0]),
            float(low[0]),
            float(high[0]),
            float(run.opening_speed[0, place]),
            float(run.least_speed[0, place]),
            float(in_state(run.bounds.speed, place)[0, 0]) if np.isfinite(run.header[0, place]) else np.nan,
        )
        for place, state in enumerate(bench.header.states)
        if run.conditions.held[place] and state.new and state.kind == Kind.DUTY
    ]


def speeds(bench: Bench, items: Sequence[Usable]) -> list[Block]:
    """One row for each duty, level and pump."""
    if not items:
        return []
    case = bench.header.case
    columns = [
        Column("duty", "duty", left=True),
        Column("level", "level", left=True, rank=0 if len(case.levels) > 1 else 9),
        Column("pump", "pump", left=True),
        Column("opens", "opens", "rpm"),
        Column("minimum_flow", "minimum flow", "rpm"),
        Column("holds", "holds", "rpm"),
        Column("at_load", "at load", "rpm", rank=2),
        Column("usable", "usable", "%"),
    ]
    rows = []
    for item in items:
        state = bench.header.states[item.state]
        rows.append(
            [
                word(names.situation(case, state)),
                word(names.level(case, state)),
                word(names.pump(case, item.pump + 1)),
                *(_rpm(item, ratio) for ratio in (item.opening, item.least, item.now, 1.0)),
                percent(_usable(item), 1),
            ]
        )
    return [Heading("SPEEDS", "rpm"), Table(columns, rows, [NOTE])]


def speeds_data(bench: Bench, items: Sequence[Usable]) -> list[dict[str, Any]]:
    """The same as data, speeds in rpm."""
    case = bench.header.case
    return [
        {
            "duty": case.duties[bench.header.states[item.state].duty].name,
            "level": names.level(case, bench.header.states[item.state]),
            "pump": names.pump(case, item.pump + 1),
            "opens": tidy(item.opening * item.speed),
            "minimum_flow": tidy(item.least * item.speed),
            "holds": tidy(item.now * item.speed),
            "at_load": tidy(item.speed),
            "lowest": tidy(item.lowest * item.speed),
            "highest": tidy(item.highest * item.speed),
            "usable": tidy(100 * _usable(item)),
        }
        for item in items
    ]


def _usable(item: Usable) -> float:
    return 1 - max(item.least, item.lowest)


def _rpm(item: Usable, ratio: float) -> Cell:
    return plain(ratio * item.speed, 0)
