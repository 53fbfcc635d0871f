"""The header as it is today: how it runs, what it allows, and what it asks of a new pump."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np

from screener.header import branch
from screener.header.branch import branch_curves, take
from screener.header.left import flow_left, without_new
from screener.header.requirement import Requirement
from screener.header.setting import speed_limits
from screener.header.system import system_curve
from screener.header.turndown import Band, band
from screener.header.usable import usable_speeds
from screener.hydraulics.similarity import take as take_pumps
from screener.model.arrays import Floats
from screener.model.case import Case
from screener.model.curves import Pumps
from screener.model.finding import Findings
from screener.model.run import Speed
from screener.screening.assess import Bench, set_up
from screener.screening.header import Header, left_of
from screener.screening.judge import inherited
from screener.screening.ratings import smallest_flow
from screener.screening.shortlist import requirements
from screener.screening.standing import stand


@dataclass(frozen=True, slots=True)
class Naive:
    """Two common ways to take the new pump's duty, each [m3/s] and [m] at the header; both miss the header.

    missing : the flow missing today, at today's header head
    rated   : the duty less the rated flows of the installed pumps, at the highest of their rated heads
    """

    missing_flow: float
    missing_head: float
    rated_flow: float
    rated_head: float


@dataclass(frozen=True, slots=True)
class Permitted:
    """Permitted header flows of one combination of installed pumps.

    running : rows of the installed pumps;  band : the closed form
    wide_open : [m3/s] the combination gives at the highest static head of the levels, NaN past the data
    """

    running: tuple[int, ...]
    band: Band
    wide_open: float


@dataclass(frozen=True, slots=True)
class Usable:
    """Speeds of one installed pump that varies its speed, in a state whose flow is held by speed.

    state, pump : rows;  speed : [rpm] at load;  lowest, highest : [-] of its range, over that
    opening, least : [-] at which its check valve opens and it reaches its minimum flow, the system open and
                     the other installed pumps at load; NaN where not known
    now : [-] at which it holds the flow without the new pump
    """

    state: int
    pump: int
    speed: float
    lowest: float
    highest: float
    opening: float
    least: float
    now: float


@dataclass(frozen=True, slots=True)
class HeaderReport:
    """The header today. needs, naive : by state, for every duty with a new pump."""

    bench: Bench
    needs: Mapping[int, Requirement]
    naive: Mapping[int, Naive]
    permitted: tuple[Permitted, ...]
    inherited: Findings
    highest_header: float
    usable: tuple[Usable, ...]


def header_report(case: Case) -> HeaderReport:
    """Work out how the installed pumps run today, and what the header asks of a new pump.

    `highest_header` is the highest header head [m] without the new pump in any duty that it shares. Where the
    new pump replaces one, what it must do is told beside the others alone.
    """
    bench = set_up(case)
    needs = requirements(bench)
    heads = [float(bench.without.header[0, place]) for place in needs]
    return HeaderReport(
        bench=bench,
        needs=needs,
        naive={place: naive(bench, place) for place in needs},
        permitted=tuple(permitted(bench.header, running) for running in _combinations(bench.header)),
        inherited=inherited(bench.today, bench.limits),
        highest_header=float(np.nanmax(heads)) if np.isfinite(heads).any() else np.nan,
        usable=tuple(usable(bench.header)),
    )


def usable(header: Header) -> Iterator[Usable]:
    """The speeds of every installed pump that holds a flow by its speed, identical ones once."""
    case = header.case
    for place in header.open_:
        state = header.states[place]
        setting = replace(header.standing[place].setting, speed=Speed.AT_LOAD)
        there = stand(
            case, setting, heat_capacity=header.heat_capacity, temperature_rise=header.temperature_rise
        )
        for first in dict.fromkeys(int(header.alike[row]) for row in state.running):
            pump = case.installed[first]
            if not pump.drive.varies:
                continue
            row = next(row for row in state.running if header.alike[row] == first)
            rest = [other for other in state.running if other != row]
            beside = left_of(case, state, there, rest, cells=400, throttled=False, count=1)
            one = take_pumps(there.pumps, np.array([row]))
            opening, least = usable_speeds(
                one,
                pump.branch,
                beside,
                minimum=there.minimum[row : row + 1],
                bypass=float(there.bypass[row]),
            )
            low, high = speed_limits(one, [pump.drive])
            now = float(header.alone[place].ratio[row])
            yield Usable(
                place,
                row,
                float(one.speed[0]),
                float(low[0]),
                float(high[0]),
                float(opening[0]),
                float(least[0]),
                now if np.isfinite(header.alone[place].header) else np.nan,
            )


def _combinations(header: Header) -> list[tuple[int, ...]]:
    """Combinations of installed pumps that occur, those that only swap identical pumps once."""
    found: dict[tuple[int, ...], tuple[int, ...]] = {}
    for state in header.states:
        if state.running:
            found.setdefault(tuple(sorted(int(header.alike[row]) for row in state.running)), state.running)
    return list(found.values())


def naive(bench: Bench, place: int) -> Naive:
    """What the new pump's duty is commonly taken for in one state."""
    header, today = bench.header, bench.without
    state = header.states[place]
    rows = np.array(state.running, np.int64)
    rated = np.array([header.case.installed[row].rated_flow for row in rows])
    given = float(today.total[0, place])
    heads = branch.head_and_slope(header.branches, rows, np.nan_to_num(rated))[0]
    return Naive(
        missing_flow=float(np.maximum(state.asked - given, 0.0)) / state.new,
        missing_head=float(today.header[0, place]),
        rated_flow=float(np.maximum(state.asked - rated.sum(), 0.0)) / state.new,
        rated_head=float(np.where(np.isnan(rated), np.nan, heads).max()) if rows.size else np.nan,
    )


def permitted(header: Header, running: tuple[int, ...]) -> Permitted:
    """Permitted band of a combination of installed pumps."""
    case = header.case
    levels = [
        system_curve(case.system, level, case.liquids[duty.liquid])
        for duty in case.duties
        for level in (case.levels[row] for row in duty.levels)
    ]
    curve = max(levels, key=lambda curve: curve.static)
    largest = max(duty.flow for duty in case.duties)
    open_ = flow_left(header.branches, running=running, curve=curve, asked=largest, throttled=False, count=1)
    head, flows = without_new(open_, len(case.installed))
    total = float(np.nansum(flows)) if np.isfinite(head) else np.nan
    return Permitted(running, combined_band(header, running), total)


def combined_band(header: Header, running: tuple[int, ...], new: Pumps | None = None, count: int = 0) -> Band:
    """Permitted band of installed pumps, and of `count` new ones with each of c candidates; (c,) each."""
    parts = [(take(header.branches, np.array([row])), 1) for row in running]
    smallest = [header.minimum[row : row + 1] for row in running]
    largest = [largest_flow(take_pumps(header.case.pumps, np.array([row]))) for row in running]
    if new is not None:
        parts.append((branch_curves(new.curves, [header.case.new_pump.branch]), count))
        smallest.append(
            smallest_flow(new, heat_capacity=header.heat_capacity, temperature_rise=header.temperature_rise)
        )
        largest.append(largest_flow(new))
    return band(parts, minimum=smallest, maximum=largest)


def largest_flow(pumps: Pumps) -> Floats:
    """Largest allowed flow of pumps, (c,) [m3/s]: as stated, the allowable region, or the end of the data."""
    return np.fmin(np.fmin(pumps.maximum_flow, pumps.region_high * pumps.bep_flow), pumps.curves.end)
