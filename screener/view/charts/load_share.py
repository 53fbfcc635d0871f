"""How the pumps share the load as demand falls, down to the lowest header flow that is safe."""

from __future__ import annotations

import numpy as np

from screener.screening import lines
from screener.screening.lines import Shares
from screener.screening.one import Explained
from screener.view import names
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Series
from screener.view.charts import parts
from screener.view.charts.with_new import name_of
from screener.view.display import Display


def chart(result: Explained) -> Chart | None:
    """Flow of each pump over that at the rated duty, over header flow; None where that is not known."""
    bench, run = result.bench, result.judged.run
    header = bench.header
    case, display = header.case, Display(header.case.display)
    shares = lines.load_shares(bench, run)
    if shares is None:
        return None
    state = header.states[header.rated]
    x = parts.axis(display, "header flow, throttled", "flow")
    y = Axis("flow of each pump, of that at the rated duty", "%")
    series = [_pump(shares, display, 0, f"new {name_of(result, display)}", Role.NEW)]
    alike = [int(header.alike[row]) for row in shares.running]
    for kind in dict.fromkeys(alike):
        rows = [row for row, one in zip(shares.running, alike, strict=True) if one == kind]
        if np.isnan(shares.share[:, 1 + rows[0]]).all():
            continue
        tags = ", ".join(case.installed[row].tag for row in rows)
        series.append(_pump(shares, display, 1 + rows[0], tags, Role.INSTALLED))
    limit, by = _lowest(result, shares, display)
    points = _duties(result, display)
    together = names.combination(case, shares.running, state.new)
    return Chart(
        key="load-share",
        title=f"How {together} share the load",
        x=x,
        panels=[Panel(y, [*series, *limit, *points])],
        note=f"Rated duty: {names.where(case, state)}. Curves for its liquid, pumps at load, the users "
        f"throttling. {by}",
        told=f"Share of the new pump: {parts.told(points, x, Axis('', '%'))}. {by}",
    )


def _pump(shares: Shares, display: Display, column: int, label: str, role: Role) -> Series:
    return Series(
        label,
        role,
        Mark.LINE,
        parts.numbers(display, "flow", shares.total),
        parts.percents(shares.share[:, column]),
    )


def _lowest(result: Explained, shares: Shares, display: Display) -> tuple[list[Series], str]:
    """The lowest header flow at which every pump keeps its minimum flow, and which pump sets it."""
    header, lowest = result.bench.header, float(shares.band.lowest[0])
    if not np.isfinite(lowest):
        return [], ""
    place = int(shares.band.lowest_by[0])
    pump = header.case.installed[shares.running[place]].tag if place < len(shares.running) else names.NEW
    flow = display.full("flow", lowest)
    text = f"The lowest safe header flow is {flow}, where {pump} comes to its minimum flow."
    x = parts.numbers(display, "flow", [lowest])
    return [Series(f"lowest safe, {pump}: {flow}", Role.LIMIT, Mark.UPRIGHT, x)], text


def _duties(result: Explained, display: Display) -> list[Series]:
    """The new pump in the duties of this combination."""
    header, run = result.bench.header, result.judged.run
    total = np.where(lines.same_combination(header), run.total[0], np.nan)
    share = run.flow[0, :, 0] / run.flow[0, header.rated, 0]
    found = parts.points(result.bench, display, total, share, "%")
    return [item for item in found if item.role == Role.DUTY]
