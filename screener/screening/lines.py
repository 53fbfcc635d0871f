"""Curves as lines to be drawn, in SI: what pumps give over flow, read within their measured data only."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from screener.header import branch, system
from screener.header.branch import BranchCurves
from screener.header.setting import branches_at, pumps_at
from screener.header.system import system_curve
from screener.header.turndown import Band
from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.similarity import take, trimmed
from screener.model.arrays import STATIONS, Bools, Floats
from screener.model.curves import Pumps
from screener.model.run import Kind, Run, in_state
from screener.screening.assess import Bench
from screener.screening.evaluate import fit
from screener.screening.header import Header
from screener.screening.one import Explained
from screener.screening.ratings import station_power
from screener.screening.today import combined_band

POINTS = 65
"""Points of a line."""


@dataclass(frozen=True, slots=True)
class Line:
    """Header head [m] over flow [m3/s], (n,) each; NaN where nothing was measured."""

    flow: Floats
    head: Floats


@dataclass(frozen=True, slots=True)
class Own:
    """What one pump does by itself over its measured flows, (n,) each, NaN where that was not measured.

    flow [m3/s], efficiency [-], power [W] at 1000 kg/m3, npsh_required [m]
    """

    flow: Floats
    efficiency: Floats
    power: Floats
    npsh_required: Floats


@dataclass(frozen=True, slots=True)
class Shares:
    """How the pumps of the rated duty share the header flow between them, throttled.

    total   : (n,) [m3/s] header flow, falling
    share   : (n, 1 + p) [-] flow of each pump over that at the rated duty, new pump first; NaN where it does
              not run or is past its data
    running : rows of the installed pumps;  band : header flows that the combination may run at
    """

    total: Floats
    share: Floats
    running: tuple[int, ...]
    band: Band


Part = tuple[BranchCurves, int, int]
"""Branch curves, the row of them that runs, and how many of it."""


def branch_line(branches: BranchCurves, row: int, *, first: float) -> Line:
    """One branch curve, from the first flow [m3/s] that was measured to the last."""
    flow = np.linspace(first, branches.end[row], POINTS)
    return Line(flow, branch.head_and_slope(branches, np.full(POINTS, row), flow)[0])


def new_pumps(bench: Bench, pumps: Pumps) -> Pumps:
    """Candidates at load, in the liquid of the rated duty."""
    return fit(bench.header, pumps, bench.header.base.setting).pumps


def new_line(bench: Bench, pumps: Pumps, row: int = 0) -> Line:
    """Branch curve of one of the candidates there."""
    there = fit(bench.header, pumps, bench.header.base.setting)
    return branch_line(there.branches, row, first=float(there.pumps.curves.start[row]))


def restored_line(bench: Bench, row: int) -> Line | None:
    """Branch curve of a worn installed pump as it was new, there; None where it is not worn."""
    case, header = bench.header.case, bench.header
    if case.as_new is None or not case.installed[row].head_loss:
        return None
    one = take(case.as_new, np.array([row]))
    as_new = pumps_at(one, ratio=np.ones(1), viscosity=header.base.setting.viscosity)
    branches = branches_at(as_new, [case.installed[row].branch], np.zeros(1))
    return branch_line(branches, 0, first=float(as_new.curves.start[0]))


def own_lines(pumps: Pumps, row: int) -> Own:
    """Efficiency, shaft power and NPSH required of one pump, from its first measured flow to its last."""
    curves = pumps.curves
    flow = np.linspace(curves.start[row], curves.end[row], POINTS)

    def read(values: Floats, reach: Floats) -> Floats:
        station = flow / reach[row] * (STATIONS - 1)
        slope = interpolate.station_slopes(values[row : row + 1])
        at = np.minimum(station, STATIONS - 1)
        found = interpolate.value(values[row : row + 1], slope, np.zeros(POINTS, np.int64), at)
        return np.where(station <= (STATIONS - 1) * (1 + 1e-12), found, np.nan)

    power = read(station_power(pumps), curves.span)
    efficiency = read(curves.efficiency, curves.span)
    useful = REFERENCE_DENSITY * GRAVITY * flow * read(curves.head, curves.span)
    efficiency = np.where(np.isnan(efficiency), useful / power, efficiency)
    return Own(flow, efficiency, power, read(curves.npsh_required, curves.npsh_span))


def together(parts: Sequence[Part], *, most: float = np.inf) -> Line:
    """What pumps give together: their flows added at each header head, up to `most` [m3/s]."""
    lowest = max(float(b.end_head[row]) for b, row, _ in parts)
    tops = [float(b.low_head[row]) for b, row, _ in parts]
    known = [top for top, (b, row, _) in zip(tops, parts, strict=True) if not b.closes[row]]
    highest = min([max(tops), *known])
    head = np.unique([*np.linspace(lowest, highest, 2 * POINTS), *tops])
    head = head[(head >= lowest) & (head <= highest)]
    flow = np.sum([number * _flow(b, row, head) for b, row, number in parts], axis=0)
    keep = np.isfinite(flow) & (flow <= most)
    return Line(flow[keep], head[keep])


def _flow(branches: BranchCurves, row: int, head: Floats) -> Floats:
    return branch.flow_at(branches, np.full(len(head), row), head)


def new_in_state(header: Header, run: Run, place: int) -> BranchCurves:
    """Branch curve of the new pump at the speed, liquid and bypass of one state."""
    case, setting = header.case, header.standing[place].setting
    ratio = in_state(run.bounds.speed, place)[0, :1]
    turned = pumps_at(run.pumps, ratio=ratio, viscosity=setting.viscosity)
    return branches_at(turned, [case.new_pump.branch], np.array(setting.bypass[:1] or [0.0]))


def installed_in_state(header: Header, run: Run, place: int) -> BranchCurves:
    """Branch curves of the installed pumps there."""
    case, standing = header.case, header.standing[place]
    ratio = in_state(run.bounds.speed, place)[0, 1:]
    turned = pumps_at(case.pumps, ratio=ratio, viscosity=standing.setting.viscosity)
    return branches_at(turned, [pump.branch for pump in case.installed], standing.bypass)


def farthest(bench: Bench, run: Run) -> float:
    """A little more than the largest header flow of any state, asked or reached, [m3/s]."""
    asked = [state.asked for state in bench.header.states]
    return 1.05 * float(np.nanmax([*asked, *run.total[0]]))


def system_lines(bench: Bench, *, most: float) -> dict[int, Line]:
    """The system curve at every level that a duty names, in the liquid of the rated duty; lowest first."""
    case = bench.header.case
    liquid = case.liquids[bench.header.states[bench.header.rated].liquid]
    found = {}
    for row in sorted({row for duty in case.duties for row in duty.levels}):
        curve = system_curve(case.system, case.levels[row], liquid)
        flow = np.linspace(0, min(most, curve.end), POINTS)
        found[row] = Line(flow, system.head_and_slope(curve, flow)[0])
    return dict(sorted(found.items(), key=lambda item: float(item[1].head[0])))


def other_diameters(explained: Explained) -> Pumps:
    """The same pump at the ends of what passes and at its largest, without the diameter looked at.

    At its smallest and largest where nothing passes.
    """
    passing, steps = explained.passing, explained.steps
    ends = np.array([*(passing[:1] if passing.size else steps[:1]), *passing[-1:], steps[-1]])
    chosen = explained.judged.run.pumps.diameter[0]
    diameters = np.unique(ends[np.abs(ends - chosen) > 1e-6])
    rows = np.full(len(diameters), explained.model)
    ratio = explained.reach.speed_ratio[rows]
    return trimmed(explained.table, model=rows, diameter=diameters, speed_ratio=ratio)


def load_shares(bench: Bench, run: Run) -> Shares | None:
    """Shares of load from the largest to the smallest demand, and on to the lowest permitted header flow.

    None where the new pump gives nothing at the rated duty, or where that is not known or not run at load.
    """
    header = bench.header
    new = fit(header, run.pumps, header.base.setting).branches
    state = header.states[header.rated]
    rated = run.flow[0, header.rated]
    band = combined_band(header, state.running, run.pumps, state.new)
    runs = np.isfinite(rated[0]) and rated[0] > 0
    if not runs or not header.conditions.usual[header.rated]:
        return None
    heads = [*run.header[0, same_combination(header)], *band.lowest_head]
    head = np.linspace(np.nanmin(heads), np.nanmax(heads), POINTS)
    flow = np.full((POINTS, len(rated)), np.nan)
    flow[:, 0] = _flow(new, 0, head)
    for row in state.running:
        flow[:, 1 + row] = _flow(header.branches, row, head)
    flow[~np.isfinite(flow)] = np.nan
    total = state.new * flow[:, 0] + flow[:, [1 + row for row in state.running]].sum(axis=1)
    share = flow / np.where(rated > 0, rated, np.nan)
    return Shares(total, share, state.running, band)


def same_combination(header: Header) -> Bools:
    """The duties at load that are run with the pumps of the rated one, or with identical ones, (s,)."""
    alike = [sorted(header.alike[list(state.running)].tolist()) for state in header.states]
    return np.array(
        [
            state.kind == Kind.DUTY
            and state.new > 0
            and bool(header.conditions.usual[place])
            and alike[place] == alike[header.rated]
            for place, state in enumerate(header.states)
        ]
    )
