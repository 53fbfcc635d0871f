"""The header as it is: its pumps, the system, where it runs, and the true duty of a new pump."""

from __future__ import annotations

import numpy as np

from screener.screening import lines
from screener.screening.today import HeaderReport
from screener.view import names
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Series
from screener.view.charts import parts
from screener.view.display import Display


def chart(report: HeaderReport) -> Chart:
    """Head at the header over flow without the new pump, and the two ways in which its duty is mistaken."""
    bench = report.bench
    header, today = bench.header, bench.today
    display = Display(header.case.display)
    most = lines.farthest(bench, today)
    x, y = parts.axis(display, "flow", "flow"), parts.axis(display, "head at the header", "head")
    together, left_out = parts.combined(bench, display, today, most, new=False)
    points = parts.points(bench, display, today.total[0], today.header[0], "head")
    asked = _asked(report, display)
    series = [
        parts.system(bench, display, most),
        *parts.installed(bench, display),
        *together,
        *points,
        *asked,
    ]
    note = [parts.basis(bench), *parts.others(bench), *parts.unknown(bench, today)]
    if left_out:
        note.append(f"{left_out} more combined curves are not drawn.")
    return Chart(
        key="header",
        title="The header today, and what it asks of a new pump",
        x=Axis("flow, of one pump or of the header", x.unit),
        panels=[Panel(y, series)],
        note=" ".join(note),
        told=f"Head at the header in each state: {parts.told([*points, *asked], x, y)}.",
    )


def _asked(report: HeaderReport, display: Display) -> list[Series]:
    """The head at which the system takes the rated duty, the true duty, and the two common ones."""
    header = report.bench.header
    need, simple = report.needs[header.rated], report.naive[header.rated]
    state = header.states[header.rated]
    level = parts.numbers(display, "head", [need.header, need.header])
    found = [
        Series(
            f"system at {names.situation(header.case, state)}: {display.full('head', need.header)}",
            Role.LIMIT,
            Mark.LINE,
            parts.numbers(display, "flow", [0.0, state.asked]),
            level,
        )
    ]
    for series, role, places in (
        ("duty of the new pump", Role.NEW, [("true duty", need.flow, need.header)]),
        (
            "commonly taken for it",
            Role.NEW_ASIDE,
            [
                ("flow missing today", simple.missing_flow, simple.missing_head),
                ("duty less rated flows", simple.rated_flow, simple.rated_head),
            ],
        ),
    ):
        known = [item for item in places if np.isfinite(item[1:]).all()]
        if known:
            found.append(
                Series(
                    series,
                    role,
                    Mark.POINTS,
                    parts.numbers(display, "flow", [flow for _, flow, _ in known]),
                    parts.numbers(display, "head", [head for *_, head in known]),
                    labels=[f"{text}: {display.full('flow', flow)}" for text, flow, _ in known],
                )
            )
    return found
