"""Everything about a header that no candidate changes, worked out once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from screener.header import system
from screener.header.branch import BranchCurves, branch_curves
from screener.header.left import Left, flow_left
from screener.header.system import SystemCurve, system_curve
from screener.hydraulics.constants import GRAVITY
from screener.model.arrays import Bools, Floats, Ints, frozen
from screener.model.case import Case
from screener.model.run import Conditions, Kind, Ratings, State
from screener.screening.ratings import ratings, smallest_flow
from screener.screening.states import classes, rated_state, states


@dataclass(frozen=True, slots=True)
class Header:
    """A case made ready for candidates: s states, p installed pumps.

    states     : s, those with a new pump running first in no particular order; see `State`
    left       : for each state the flow left for the new pump
    starting   : (state, installed row) -> what is left while that pump stands still, for each duty
    at_minimum : installed row -> what is left at the lowest common duty while that pump gives its minimum
    finely     : the lowest common duty itself, tabulated closely
    lowest     : the state of the lowest common duty;  rated : the state of the rated duty
    minimum    : (p,) [m3/s] smallest flow of each installed pump, stable or thermal; 0 where not known
    ratings    : (p,) of the installed pumps
    alike      : (p,) for each installed pump the first identical one
    beside     : (p,) installed pumps that run in a duty together with the new one
    heat_capacity : [J/(kg K)] lowest of the liquids;  temperature_rise : [K] allowed in a pump
    """

    case: Case
    branches: BranchCurves
    states: tuple[State, ...]
    left: tuple[Left, ...]
    starting: Mapping[tuple[int, int], Left]
    at_minimum: Mapping[int, Left]
    finely: Left
    lowest: int
    rated: int
    minimum: Floats
    conditions: Conditions
    ratings: Ratings
    alike: Ints
    beside: Bools
    heat_capacity: float
    temperature_rise: float


def prepare(case: Case, *, temperature_rise: float) -> Header:
    """Work out the states, and the flow left in each.

    temperature_rise : [K] allowed in a pump, for its thermal minimum flow
    """
    branches = branch_curves(case.pumps.curves, [pump.branch for pump in case.installed])
    found = states(case)
    rated = rated_state(case, found)
    common = [place for place, state in enumerate(found) if state.kind == Kind.DUTY and state.new]
    lowest = min(common, key=lambda place: (found[place].asked, -found[place].static))
    heat_capacity = min(liquid.heat_capacity for liquid in case.liquids)
    minimum = smallest_flow(case.pumps, heat_capacity=heat_capacity, temperature_rise=temperature_rise)

    def curve(state: State) -> SystemCurve:
        return system_curve(
            case.system, case.levels[state.level], case.liquids[case.duties[state.duty].liquid]
        )

    def remains(state: State, *, without: int = -1, taken: float = 0.0, cells: int = 24) -> Left:
        return flow_left(
            branches,
            running=[row for row in state.running if row != without],
            curve=curve(state),
            asked=state.asked,
            throttled=state.throttled,
            count=max(state.new, 1),
            taken=taken,
            cells=cells,
        )

    alike = classes(case)
    starting = {}
    for place, state in enumerate(found):
        if state.kind == Kind.DUTY:
            for first in dict.fromkeys(int(alike[row]) for row in state.running):
                row = next(row for row in state.running if alike[row] == first)
                starting[place, row] = remains(state, without=row)
    low_state = found[lowest]
    return Header(
        case=case,
        branches=branches,
        states=found,
        left=tuple(remains(state) for state in found),
        starting=starting,
        at_minimum={
            row: remains(low_state, without=row, taken=float(minimum[row]))
            for row in dict.fromkeys(low_state.running)
        },
        finely=remains(low_state, cells=400),
        lowest=lowest,
        rated=rated,
        minimum=minimum,
        conditions=_conditions(case, found, rated, lowest),
        ratings=ratings(case.pumps, branches, np.array([pump.motor for pump in case.installed])),
        alike=alike,
        beside=np.array(
            [any(row in found[place].running for place in common) for row in range(len(case.installed))]
        ),
        heat_capacity=heat_capacity,
        temperature_rise=temperature_rise,
    )


def _conditions(case: Case, found: tuple[State, ...], rated: int, lowest: int) -> Conditions:
    liquids = [case.liquids[case.duties[state.duty].liquid] for state in found]
    levels = [case.levels[state.level] for state in found]
    curves = [system_curve(case.system, level, liquid) for level, liquid in zip(levels, liquids, strict=True)]
    runs = np.zeros((len(found), 1 + len(case.installed)), bool)
    for place, state in enumerate(found):
        runs[place, 0] = state.new > 0
        runs[place, [1 + row for row in state.running]] = True
    density = np.array([liquid.density for liquid in liquids])
    suction = [
        lv.vessel_pressure + rho * GRAVITY * lv.suction_head for lv, rho in zip(levels, density, strict=True)
    ]
    return Conditions(
        duty=frozen([state.duty for state in found], np.int64),
        kind=frozen([state.kind for state in found], np.int8),
        rated=frozen(np.arange(len(found)) == rated, np.bool_),
        lowest=frozen(np.arange(len(found)) == lowest, np.bool_),
        open=frozen([not state.throttled for state in found], np.bool_),
        asked=frozen([state.asked for state in found]),
        wanted_head=frozen(
            [system.head(curve, state.asked) for curve, state in zip(curves, found, strict=True)]
        ),
        density=frozen(density),
        heat_capacity=frozen([liquid.heat_capacity for liquid in liquids]),
        suction_pressure=frozen(suction),
        share_of_hours=frozen([state.share for state in found]),
        hours=frozen([case.duties[state.duty].hours for state in found]),
        runs=frozen(runs, np.bool_),
    )
