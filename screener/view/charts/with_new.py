"""The header with one candidate: its pumps, what they give together, the system, and where states lie."""

from __future__ import annotations

import numpy as np

from screener.screening import lines
from screener.screening.one import Explained
from screener.view.blocks import Axis, Chart, Panel, Role
from screener.view.charts import parts
from screener.view.display import Display


def name_of(result: Explained, display: Display) -> str:
    """A pump and its impeller: "200-400-4 M, 398 mm"."""
    diameter = float(result.judged.run.pumps.diameter[0])
    impeller = f", {display.full('length', diameter)}" if np.isfinite(diameter) else ""
    return f"{result.table.ids[result.model]}{impeller}"


def chart(result: Explained) -> Chart:
    """Head at the header over flow, of single pumps, of combinations and of the system."""
    bench, run = result.bench, result.judged.run
    display = Display(bench.header.case.display)
    most = lines.farthest(bench, run)
    x, y = parts.axis(display, "flow", "flow"), parts.axis(display, "head at the header", "head")
    together, left_out = parts.combined(bench, display, run, most, new=True)
    points = parts.points(bench, display, run.total[0], run.header[0], "head")
    series = [
        parts.system(bench, display, most),
        *parts.installed(bench, display),
        parts.curve(display, f"new {name_of(result, display)}", Role.NEW, lines.new_line(bench, run.pumps)),
        *together,
        *points,
    ]
    note = [parts.basis(bench), *parts.others(bench), *parts.unknown(bench, run)]
    if left_out:
        note.append(f"{left_out} more combined curves are not drawn.")
    return Chart(
        key="header",
        title=f"The header with {name_of(result, display)}",
        x=Axis("flow, of one pump or of the header", x.unit),
        panels=[Panel(y, series)],
        note=" ".join(note),
        told=f"Head at the header in each state: {parts.told(points, x, y)}.",
    )
