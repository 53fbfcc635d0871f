"""One candidate by itself: its head with trims, tolerance and regions; efficiency, power and NPSH beneath."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from screener.changes.tolerance import scaled
from screener.hydraulics.constants import REFERENCE_DENSITY
from screener.model.arrays import Floats
from screener.model.run import Run, Speed, in_state
from screener.screening import lines
from screener.screening.lines import Line
from screener.screening.one import Explained
from screener.screening.ratings import smallest_flow
from screener.view.blocks import Axis, Chart, Mark, Panel, Role, Series
from screener.view.charts import parts
from screener.view.charts.with_new import name_of
from screener.view.display import Display


def chart(result: Explained) -> Chart:
    """Head at the header, efficiency, shaft power and NPSH of the new pump over its own flow."""
    bench, run = result.bench, result.judged.run
    display = Display(bench.header.case.display)
    x = parts.axis(display, "flow of one pump", "flow")
    head = parts.axis(display, "head at the header", "head")
    line = lines.new_line(bench, run.pumps)
    points = parts.points(bench, display, run.flow[0, :, 0], run.header[0], "head")
    regions, said = _regions(result, display, line)
    series = [
        *regions,
        _tolerance(result, display, line),
        *parts.installed(bench, display),
        *_trims(result, display),
        parts.curve(display, name_of(result, display), Role.NEW, line),
        *_held(result, display),
        *points,
    ]
    note = [
        parts.basis(bench),
        *said,
        "Tolerance: taken to hold for the whole curve. The lower curves are those at load; points under NPSH "
        "are what is available.",
        *parts.others(bench),
        *parts.unknown(bench, run),
    ]
    return Chart(
        key="pump",
        title=f"{name_of(result, display)} at the header",
        x=x,
        panels=[Panel(head, series, 3.0), *_beneath(result, display)],
        note=" ".join(note),
        told=f"Flow of the new pump and head at the header: {parts.told(points, x, head)}.",
    )


def _trims(result: Explained, display: Display) -> list[Series]:
    """The ends of what passes and of what is on offer."""
    pumps = lines.other_diameters(result)
    found = []
    for row, diameter in enumerate(pumps.diameter):
        passes = np.isclose(diameter, result.passing, rtol=0, atol=1e-6).any()
        label = f"{display.full('length', diameter)}{', passes' if passes else ''}"
        found.append(parts.curve(display, label, Role.NEW_ASIDE, lines.new_line(result.bench, pumps, row)))
    return found


def _tolerance(result: Explained, display: Display, line: Line) -> Series:
    """The head that the pump may have within its tolerance, taken to hold for the whole curve."""
    pumps, limits = result.judged.run.pumps, result.bench.limits
    own = np.where(np.isnan(pumps.head_tolerance), limits["start"]["unknown_tolerance"], pumps.head_tolerance)
    low = lines.new_line(result.bench, scaled(pumps, 1 - own - pumps.trim_uncertainty))
    high = lines.new_line(result.bench, scaled(pumps, 1 + own))
    return Series(
        "tolerance",
        Role.NEW,
        Mark.AREA,
        parts.numbers(display, "flow", line.flow),
        parts.numbers(display, "head", high.head),
        parts.numbers(display, "head", low.head),
    )


def _regions(result: Explained, display: Display, line: Line) -> tuple[list[Series], list[str]]:
    """Below its minimum flow, and around best efficiency, as areas under its curve; and what they are."""
    bench = result.bench
    header, limits = bench.header, bench.limits["region"]
    pumps = lines.new_pumps(bench, result.judged.run.pumps)
    steep = "_above_87" if pumps.specific_speed[0] > 87 else ""
    low, high = limits[f"caution_below{steep}"], limits[f"caution_above{steep}"]
    smallest = smallest_flow(
        pumps, heat_capacity=header.heat_capacity, temperature_rise=header.temperature_rise
    )
    best = float(pumps.bep_flow[0])
    found, said = [], []
    if smallest[0] > 0:
        found.append(_under(display, "below minimum flow", Role.LIMIT, line, 0.0, float(smallest[0])))
        said.append(f"Minimum flow {display.full('flow', smallest[0])}.")
    if np.isfinite(best):
        label = f"{100 * low:.0f} to {100 * high:.0f} % of best efficiency"
        found.append(_under(display, label, Role.BAND, line, low * best, high * best))
        said.append(f"Best efficiency at {display.full('flow', best)}.")
    return found, said


def _under(display: Display, label: str, role: Role, line: Line, low: float, high: float) -> Series:
    """The area under a curve between two flows, down to its lowest head."""
    inside = (line.flow > low) & (line.flow < high)
    ends = np.clip([low, high], line.flow[0], line.flow[-1])
    flow = np.concatenate([ends[:1], line.flow[inside], ends[1:]])
    head = np.interp(flow, line.flow, line.head)
    return Series(
        label,
        role,
        Mark.AREA,
        parts.numbers(display, "flow", flow),
        parts.numbers(display, "head", head),
        parts.numbers(display, "head", np.full(len(flow), line.head.min())),
    )


def _held(result: Explained, display: Display) -> list[Series]:
    """Its curve at each speed that holds the flow of a duty."""
    header, run = result.bench.header, result.judged.run
    found: dict[str, Series] = {}
    for place, state in enumerate(header.states):
        ratio = float(in_state(run.bounds.speed, place)[0, 0])
        if state.speed == Speed.HELD and state.new and abs(ratio - 1) > parts.LIKE_LOAD and ratio > 0:
            label = f"at {100 * ratio:.0f} % speed"
            own = lines.new_in_state(header, run, place)
            line = lines.branch_line(own, 0, first=float(own.low[0]))
            found.setdefault(label, parts.curve(display, label, Role.NEW_ASIDE, line))
    return list(found.values())[: parts.COMBINATIONS]


def _beneath(result: Explained, display: Display) -> list[Panel]:
    """Efficiency, shaft power and NPSH."""
    run, header = result.judged.run, result.bench.header
    own = lines.own_lines(lines.new_pumps(result.bench, run.pumps), 0)
    density = header.case.liquids[header.states[header.rated].liquid].density
    power = own.power * density / REFERENCE_DENSITY
    flow = parts.numbers(display, "flow", own.flow)

    def line(label: str, role: Role, values: Sequence[float | None]) -> Series:
        return Series(label, role, Mark.LINE, flow, values)

    def points(values: Floats, quantity: str) -> list[Series]:
        return parts.points(result.bench, display, run.flow[0, :, 0], values[0, :, 0], quantity, named=False)

    panels = []
    if np.isfinite(own.efficiency).any():
        curve = line("efficiency", Role.NEW, parts.percents(own.efficiency))
        panels.append(Panel(Axis("efficiency", "%"), [curve, *points(run.efficiency, "%")]))
    if np.isfinite(power).any():
        curve = line("shaft power", Role.NEW, parts.numbers(display, "power", power))
        panels.append(
            Panel(
                parts.axis(display, "shaft power", "power"),
                [curve, *_motor(run, display), *points(run.power, "power")],
            )
        )
    if np.isfinite(own.npsh_required).any():
        curve = line("required", Role.NEW, parts.numbers(display, "npsh", own.npsh_required))
        needed = line(
            "with its margin",
            Role.LIMIT,
            parts.numbers(display, "npsh", _with_margin(result, own.npsh_required)),
        )
        panels.append(
            Panel(parts.axis(display, "NPSH", "npsh"), [curve, needed, *points(run.npsh_available, "npsh")])
        )
    return panels


def _with_margin(result: Explained, required: Floats) -> Floats:
    """The least NPSH that must be available, by the criterion npsh-margin."""
    limits, speed = result.bench.limits["npsh-margin"], result.judged.run.pumps.suction_specific_speed[0]
    which = "_when_high" if speed > limits["high_suction_specific_speed"] else ""
    return np.fmax(limits[f"ratio{which}"] * required, required + limits[f"difference{which}"])


def _motor(run: Run, display: Display) -> list[Series]:
    """The nameplate of the motor chosen, over the flows of the pump."""
    motor, end = float(run.ratings.motor[0, 0]), float(run.pumps.curves.end[0])
    if not np.isfinite(motor):
        return []
    label = f"motor {display.nameplate(motor).text} {display.unit('power')}"
    return [
        Series(
            label,
            Role.LIMIT,
            Mark.LINE,
            parts.numbers(display, "flow", [0.0, end]),
            parts.numbers(display, "power", [motor, motor]),
        )
    ]
