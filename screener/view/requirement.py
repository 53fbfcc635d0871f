"""What the header asks of the new pump: in words for the rated duty, in a table for every one."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from screener.header.requirement import Requirement
from screener.screening.assess import Bench
from screener.screening.today import HeaderReport, Naive
from screener.view import names
from screener.view.blocks import Block, Column, Heading, Pairs, Table
from screener.view.display import Display, word


def blocks(report: HeaderReport, display: Display) -> list[Block]:
    """What the new pump must do in every duty, and in words for the rated one."""
    bench = report.bench
    case, header = bench.header.case, bench.header
    rated = header.rated
    columns = [
        Column("duty", "duty", left=True),
        Column("level", "level", left=True, rank=0 if len(case.levels) > 1 else 9),
        Column("flow", "new pump", display.unit("flow")),
        Column("head", "at head", display.unit("head")),
        Column("header_head", "system", display.unit("head")),
        Column("supplied", "others give", display.unit("flow"), rank=1),
        Column("missing_flow", "missing", display.unit("flow"), rank=2),
        Column("rated_flow_left", "by rated flows", display.unit("flow"), rank=3),
    ]
    rows = []
    for place, need in report.needs.items():
        state, simple = header.states[place], report.naive[place]
        flow = word("not known") if np.isnan(need.flow) else display.cell("flow", need.flow)
        head = display.cell("head", need.head) if need.flow > 0 else word("-")
        rows.append(
            [
                word(names.situation(case, state)),
                word(names.level(case, state)),
                flow,
                head,
                display.cell("head", need.header),
                display.cell("flow", need.supplied),
                display.cell("flow", simple.missing_flow),
                display.cell("flow", simple.rated_flow),
            ]
        )
    note = [
        "new pump: what is left when the header stands at the head that the system takes for the duty; 0 "
        "where the others suffice.",
        "missing: flow short today. by rated flows: the duty less the rated flows. Neither sees that the "
        "installed pumps move.",
    ]
    return [
        Heading("WHAT THE NEW PUMP MUST DO", f"rated duty: {names.where(case, header.states[rated])}"),
        Pairs(_in_words(report, display, rated)),
        Table(columns, rows, note),
    ]


def _in_words(report: HeaderReport, display: Display, rated: int) -> list[tuple[str, str]]:
    """The true duty of the rated state, what is commonly taken for it, and the shutoff head it takes."""
    need, simple, header = report.needs[rated], report.naive[rated], report.bench.header
    pairs: list[tuple[str, str]] = []
    if np.isnan(need.flow):
        tag = header.case.installed[need.past].tag
        reason = f"at {display.full('head', need.header)} {tag} would run past its last measured point"
        pairs.append(("not known", reason))
    else:
        through = display.full("head", need.head - need.header)
        reason = f"header at {display.full('head', need.header)}, and {through} through its own branch"
        pairs.append((_duty(display, need.flow, need.head), reason))
        if np.isfinite(simple.missing_flow):
            runs = float(np.nansum(report.bench.without.flow[0, rated, 1:])) > 0
            reason = "the flow missing today" + (f": {_fall_back(report, display, rated)}" if runs else "")
            pairs.append((f"not {_duty(display, simple.missing_flow, simple.missing_head)}", reason))
    if np.isfinite(simple.rated_flow):
        reason = "the duty less the rated flows of the installed pumps"
        pairs.append((f"not {_duty(display, simple.rated_flow, simple.rated_head)}", reason))
    if report.highest_header > np.nan_to_num(need.head):
        heads = report.bench.without.header[0]
        highest = max(report.needs, key=lambda place: float(np.nan_to_num(heads[place])))
        reason = f"or its check valve stays shut: {names.where(header.case, header.states[highest])}"
        pairs.append((f"shutoff above {display.full('head', report.highest_header)}", reason))
    return pairs


def _duty(display: Display, flow: float, head: float) -> str:
    return f"{display.text('flow', flow)} at {display.full('head', head)}"


def _fall_back(report: HeaderReport, display: Display, rated: int) -> str:
    """How far the installed pumps fall back when the header is lifted to what the duty needs."""
    header, need = report.bench.header, report.needs[rated]
    tags = names.combination(header.case, header.states[rated].running).replace(" + ", ", ")
    today = float(np.nansum(report.bench.without.flow[0, rated, 1:]))
    low = display.text("head", report.naive[rated].missing_head)
    if not need.supplied < today:
        return f"the header stands at {low} without it"
    falls = "falls" if len(header.states[rated].running) == 1 else "fall"
    return (
        f"to lift the header from {low} to {display.full('head', need.header)}, {tags} {falls} back from "
        f"{display.text('flow', today)} to {display.full('flow', need.supplied)}"
        + (" together" if falls == "fall" else "")
    )


def rows(
    bench: Bench, display: Display, needs: Mapping[int, Requirement], naive: Mapping[int, Naive]
) -> list[dict[str, Any]]:
    """What every duty asks of the new pump."""
    case = bench.header.case
    return [
        {
            "duty": case.duties[bench.header.states[place].duty].name,
            "level": names.level(case, bench.header.states[place]),
            "running": names.combination(
                case, bench.header.states[place].running, bench.header.states[place].new
            ),
            "rated": place == bench.header.rated,
            "asked": display.number("flow", bench.header.states[place].asked),
            "header_head": display.number("head", need.header),
            "supplied": display.number("flow", need.supplied),
            "flow": display.number("flow", need.flow),
            "head": display.number("head", need.head),
            "missing_flow_today": display.number("flow", naive[place].missing_flow),
            "header_head_today": display.number("head", naive[place].missing_head),
            "flow_by_rated": display.number("flow", naive[place].rated_flow),
            "head_by_rated": display.number("head", naive[place].rated_head),
        }
        for place, need in needs.items()
    ]
