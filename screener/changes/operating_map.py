"""Which combination of pumps may run at which header flow, throttled."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from screener import units
from screener.changes.combination import Combination, Plant, Ran, every_run, key_of, run_as
from screener.header.system import system_curve
from screener.model.case import Control, Duty
from screener.screening.assess import Bench
from screener.screening.states import classes
from screener.screening.today import combined_band

MAPPED = 8
"""Combinations shown over the header flow."""

ROWS = 12
"""Round header flows of the map, about."""

FINENESS = 0.01
"""How closely the ends of allowed ranges are sought, relative to the flow there."""


@dataclass(frozen=True, slots=True)
class Spot:
    """A combination at one header flow, at the level that rules. level : -1 where all say the same."""

    ran: Ran
    level: int


@dataclass(frozen=True, slots=True)
class Range:
    """Header flows [m3/s] over which a combination may run, and what stops it there (None: nothing found)."""

    low: float
    high: float
    below: Spot | None
    above: Spot | None


@dataclass(frozen=True, slots=True)
class OperatingMap:
    """Which combination may run at which header flow, throttled.

    flows  : (f,) [m3/s] rising;  combinations : k;  left_out : combinations not shown
    levels : rows of the case, of highest and of lowest static head;  liquids : those of the duties, the
             worst of which rules
    spots  : f rows of k;  ranges : for each combination, rising
    """

    flows: tuple[float, ...]
    combinations: tuple[Combination, ...]
    left_out: int
    levels: tuple[int, ...]
    liquids: tuple[int, ...]
    spots: tuple[tuple[Spot, ...], ...]
    ranges: tuple[tuple[Range, ...], ...]


def operating_map(
    plant: Plant, bench: Bench, tried: Sequence[Sequence[Combination]], chosen: Sequence[Combination]
) -> OperatingMap:
    """Run combinations at round header flows, throttled, at both extremes of static head, in every liquid.

    tried : in each duty;  chosen : those that must be shown, the rest as far as there is room
    """
    case = plant.case
    rated = next(duty for duty in case.duties if duty.rated)
    static = {
        row: system_curve(case.system, case.levels[row], case.liquids[rated.liquid]).static
        for duty in case.duties
        for row in duty.levels
    }
    low = min(static, key=lambda row: (static[row], case.levels[row].suction_head))
    high = max(static, key=lambda row: (static[row], -case.levels[row].suction_head))
    levels = tuple(dict.fromkeys([high, low]))
    alike = [int(row) for row in classes(case)]
    every = {key_of(alike, combination): combination for found in tried for combination in found}
    shown = list(dict.fromkeys([*(key_of(alike, item) for item in chosen), *every]))[:MAPPED]
    combinations = sorted((every[key] for key in shown), key=lambda item: (item[1], len(item[0]), item[0]))
    like = replace(rated, levels=levels, bypass=(), hours=np.nan, control=Control.THROTTLED)
    liquids = tuple(dict.fromkeys(duty.liquid for duty in case.duties))
    most, probes = _reach(plant, bench, replace(like, levels=(low,)), combinations)
    flows = round_flows(max(most), case.display["flow"], [duty.flow for duty in case.duties])
    tested: list[dict[float, Spot]] = [{} for _ in combinations]

    def test(wanted: Iterable[tuple[int, float]]) -> None:
        places = [(place, flow) for place, flow in wanted if flow not in tested[place]]
        duties = [
            replace(run_as(like, combinations[place]), flow=flow, liquid=liquid)
            for place, flow in places
            for liquid in liquids
        ]
        found = every_run(plant, duties) if duties else []
        for number, (place, flow) in enumerate(places):
            rans = found[number * len(liquids) : (number + 1) * len(liquids)]
            tested[place][flow] = _ruling([ran for one in rans for ran in one])

    everywhere = range(len(combinations))
    test([(place, flow) for place in everywhere for flow in (*flows, *probes[place])])
    while middles := [
        (place, middle) for place in everywhere for middle in _between(tested[place], max(most))
    ]:
        test(middles)
    return OperatingMap(
        flows=flows,
        combinations=tuple(combinations),
        left_out=len(every) - len(combinations),
        levels=levels,
        liquids=liquids,
        spots=tuple(tuple(tested[place][flow] for place in everywhere) for flow in flows),
        ranges=tuple(tuple(_ranges(spots)) for spots in tested),
    )


def _reach(
    plant: Plant, bench: Bench, like: Duty, combinations: Sequence[Combination]
) -> tuple[list[float], list[list[float]]]:
    """The largest header flow of each combination, and flows close to the ends of its permitted band."""
    wide_open = every_run(
        plant, [run_as(replace(like, control=Control.OPEN), combination) for combination in combinations]
    )
    most, probes = [], []
    for (running, new), (ran,) in zip(combinations, wide_open, strict=True):
        count = plant.case.new_pump.count if new else 0
        band = combined_band(bench.header, running, plant.pumps if new else None, count)
        low, high = float(band.lowest[0]), float(band.highest[0])
        largest = ran.total if np.isfinite(ran.total) else high
        top = min(high, largest)
        near = [low * 0.996, low * 1.004, (low + top) / 2, top * 0.996, top * 1.004]
        most.append(largest)
        probes.append([flow for flow in near if np.isfinite(flow) and flow > 0])
    return most, probes


def round_flows(largest: float, unit: str, also: Sequence[float]) -> tuple[float, ...]:
    """About a dozen header flows [m3/s], round in the unit, up to the largest, and some others; rising.

    >>> [round(3600 * flow) for flow in round_flows(5300 / 3600, "m3/h", [2300 / 3600])]
    [500, 1000, 1500, 2000, 2300, 2500, 3000, 3500, 4000, 4500, 5000]
    """
    most = float(units.from_si(largest, unit))
    size = 10.0 ** np.floor(np.log10(most / ROWS))
    step = min((size * figure for figure in (1, 2, 2.5, 5, 10)), key=lambda step: abs(most / step - ROWS))
    figures = [step * number for number in range(1, int(most / step + 1e-9) + 1)]
    flows = {f"{flow:.9g}": flow for flow in (float(units.to_si(x, unit, "flow")) for x in figures)}
    flows.update({f"{flow:.9g}": flow for flow in also})
    return tuple(sorted(flows.values()))


def _ruling(rans: Sequence[Ran]) -> Spot:
    """The level that rules a spot: the one that breaks a limit, and of several the first in order."""
    broken = [ran for ran in rans if not ran.within]
    if not broken:
        return Spot(rans[0], -1)
    worst = min(broken, key=lambda ran: (ran.breach, -ran.shortfall))
    return Spot(worst, worst.level if len(broken) < len(rans) else -1)


def _between(spots: Mapping[float, Spot], largest: float) -> list[float]:
    """Flows half way between neighbours of which one may run and the other may not, where still far apart."""
    flows = [0.0, *sorted(spots)]
    allowed = [False, *(spots[flow].ran.within for flow in flows[1:])]
    return [
        (low + high) / 2
        for (low, high), (one, other) in zip(pairwise(flows), pairwise(allowed), strict=True)
        if one != other and high - low > max(FINENESS * high, FINENESS / 5 * largest)
    ]


def _ranges(spots: Mapping[float, Spot]) -> Iterator[Range]:
    """Flows next to each other at which a combination may run, as ranges."""
    flows = sorted(spots)
    allowed = [False, *(spots[flow].ran.within for flow in flows), False]
    firsts = [place for place in range(len(flows)) if allowed[place + 1] and not allowed[place]]
    for first in firsts:
        last = first
        while allowed[last + 2]:
            last += 1
        yield Range(
            low=flows[first],
            high=flows[last],
            below=spots[flows[first - 1]] if first else None,
            above=spots[flows[last + 1]] if last + 1 < len(flows) else None,
        )
