"""Everything about a header that no candidate changes, worked out once."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from screener.header import system
from screener.header.branch import BranchCurves
from screener.header.left import CELLS, Left, flow_left, without_new
from screener.header.setting import Setting, setting_of
from screener.hydraulics.constants import GRAVITY
from screener.model.arrays import Bools, Floats, Ints, frozen
from screener.model.case import Case
from screener.model.run import Conditions, Kind, Ratings, Speed, State
from screener.screening.held import held
from screener.screening.ratings import ratings
from screener.screening.standing import Standing
from screener.screening.standing import stand as standing_at
from screener.screening.states import classes, curve_of, rated_state, states


@dataclass(frozen=True, slots=True)
class Alone:
    """One state while the new pump gives nothing.

    header : [m], NaN where a pump is past its data
    flow   : (p,) [m3/s] through each installed pump, with the marks of `Run.flow`
    ratio  : (p,) [-] speed over that at load
    """

    header: float
    flow: Floats
    ratio: Floats


@dataclass(frozen=True, slots=True)
class Header:
    """A case made ready for candidates: s states, p installed pumps.

    states     : s, those with a new pump running first in no particular order; see `State`
    standing   : for each state the installed pumps at its setting; at their highest speed where speed holds
                 the flow
    left       : for each state the flow left for the new pump, at that setting
    slowest    : where speed holds the flow, state -> the installed pumps at their lowest speed, the flow left
    alone      : for each state what the installed pumps do without the new one, one that it replaces included
    without    : for each state the same once the new pump has come and is lost
    starting   : (state, installed row) -> what is left while that pump stands still, for each duty whose flow
                 is not held by speed
    at_minimum : installed row -> what is left at the lowest common duty while that pump gives its minimum;
                 empty where that duty is not `usual`
    finely     : the lowest common duty itself, tabulated closely
    open_      : where speed holds the flow, state -> flow left with the system open, all others at load
    base       : the installed pumps at load, in the liquid of the rated duty
    lowest     : the state of the lowest common duty;  rated : the state of the rated duty
    ratings    : (p,) of the installed pumps
    alike      : (p,) for each installed pump the first identical one
    beside     : (p,) installed pumps that run in a duty together with the new one
    heat_capacity : [J/(kg K)] lowest of the liquids;  temperature_rise : [K] allowed in a pump
    """

    case: Case
    states: tuple[State, ...]
    standing: tuple[Standing, ...]
    left: tuple[Left, ...]
    slowest: Mapping[int, tuple[Standing, Left]]
    alone: tuple[Alone, ...]
    without: tuple[Alone, ...]
    starting: Mapping[tuple[int, int], Left]
    at_minimum: Mapping[int, Left]
    finely: Left
    open_: Mapping[int, Left]
    base: Standing
    lowest: int
    rated: int
    conditions: Conditions
    ratings: Ratings
    alike: Ints
    beside: Bools
    heat_capacity: float
    temperature_rise: float

    @property
    def branches(self) -> BranchCurves:
        """Branch curves of the installed pumps at load, in the liquid of the rated duty."""
        return self.base.branches

    @property
    def minimum(self) -> Floats:
        """Smallest flow of each installed pump there, (p,) [m3/s]."""
        return self.base.minimum


def prepare(case: Case, *, temperature_rise: float) -> Header:
    """Work out the states, and the flow left in each.

    temperature_rise : [K] allowed in a pump, for its thermal minimum flow
    """
    found = states(case)
    rated = rated_state(case, found)
    common = [place for place, state in enumerate(found) if state.kind == Kind.DUTY and state.new]
    lowest = min(common, key=lambda place: (found[place].asked, -found[place].static))
    heat_capacity = min(liquid.heat_capacity for liquid in case.liquids)
    known: dict[Setting, Standing] = {}
    alike = classes(case)

    def stand(setting: Setting) -> Standing:
        if setting not in known:
            known[setting] = standing_at(
                case, setting, heat_capacity=heat_capacity, temperature_rise=temperature_rise
            )
        return known[setting]

    def at(state: State, speed: Speed | None = None) -> Standing:
        chosen = state.speed if speed is None else speed
        return stand(setting_of(case, state, Speed.HIGHEST if chosen == Speed.HELD else chosen))

    def remains(
        state: State,
        standing: Standing,
        *,
        beside: tuple[int, ...] = (),
        without: int = -1,
        taken: float = 0.0,
        cells: int = CELLS,
        throttled: bool | None = None,
    ) -> Left:
        running = [row for row in (*state.running, *beside) if row != without]
        return left_of(case, state, standing, running, taken=taken, cells=cells, throttled=throttled)

    def alone(place: int, beside: tuple[int, ...] = ()) -> Alone:
        state = found[place]
        if state.speed == Speed.HELD:
            now = held(case, state, standing[place], alike, running=(*state.running, *beside))
            if not (now.short[0] or now.over[0]):
                return Alone(float(now.header[0]), now.flow[0, 1:], now.ratio[0, 1:])
            if now.over[0]:
                slow = at(state, Speed.LOWEST)
                return _alone(remains(state, slow, beside=beside), slow)
        rest = remains(state, standing[place], beside=beside) if beside else left[place]
        return _alone(rest, standing[place])

    base = stand(Setting(setting_of(case, found[rated]).viscosity, Speed.AT_LOAD))
    standing = tuple(at(state) for state in found)
    left = tuple(remains(state, there) for state, there in zip(found, standing, strict=True))
    by_speed = [place for place, state in enumerate(found) if state.speed == Speed.HELD]
    slow = {place: at(found[place], Speed.LOWEST) for place in by_speed}
    starting = {}
    for place, state in enumerate(found):
        if state.kind == Kind.DUTY and state.speed != Speed.HELD:
            for first in dict.fromkeys(int(alike[row]) for row in state.running):
                row = next(row for row in state.running if alike[row] == first)
                starting[place, row] = remains(state, standing[place], without=row)
    low_state = found[lowest]
    usual = [there is base for there in standing]
    without = tuple(alone(place) for place in range(len(found)))
    gone = case.new_pump.replaces
    return Header(
        case=case,
        states=found,
        standing=standing,
        left=left,
        slowest={place: (slow[place], remains(found[place], slow[place])) for place in by_speed},
        alone=without
        if gone < 0
        else tuple(alone(place, (gone,) if state.new else ()) for place, state in enumerate(found)),
        without=without,
        starting=starting,
        at_minimum={
            row: remains(low_state, base, without=row, taken=float(base.minimum[row]))
            for row in dict.fromkeys(low_state.running)
            if usual[lowest]
        },
        finely=remains(low_state, base, cells=400),
        open_={
            place: remains(found[place], at(found[place], Speed.AT_LOAD), cells=400, throttled=False)
            for place in by_speed
        },
        base=base,
        lowest=lowest,
        rated=rated,
        conditions=_conditions(case, found, rated, lowest, usual),
        ratings=ratings(base.pumps, base.branches, np.array([pump.motor for pump in case.installed])),
        alike=alike,
        beside=np.array(
            [any(row in found[place].running for place in common) for row in range(len(case.installed))]
        ),
        heat_capacity=heat_capacity,
        temperature_rise=temperature_rise,
    )


def left_of(
    case: Case,
    state: State,
    standing: Standing,
    running: Sequence[int],
    *,
    taken: float = 0.0,
    cells: int = CELLS,
    throttled: bool | None = None,
    count: int = 0,
) -> Left:
    """The flow left for the new pumps of a state, or for `count` pumps, some installed ones running."""
    return flow_left(
        standing.branches,
        running=running,
        curve=curve_of(case, state),
        asked=state.asked,
        throttled=state.throttled if throttled is None else throttled,
        count=count or max(state.new, 1),
        taken=taken,
        cells=cells,
    )


def _alone(left: Left, standing: Standing) -> Alone:
    head, flow = without_new(left, len(standing.pumps))
    return Alone(head, flow + np.where(np.isnan(flow), 0.0, standing.bypass), standing.ratio)


def _conditions(
    case: Case, found: tuple[State, ...], rated: int, lowest: int, usual: Sequence[bool]
) -> Conditions:
    liquids = [case.liquids[state.liquid] for state in found]
    levels = [case.levels[state.level] for state in found]
    curves = [curve_of(case, state) for state in found]
    runs = np.zeros((len(found), 1 + len(case.installed)), bool)
    for place, state in enumerate(found):
        runs[place, 0] = state.new > 0
        runs[place, [1 + row for row in state.running]] = True
    density = np.array([liquid.density for liquid in liquids])
    places = [case.new_pump.branch, *(pump.branch for pump in case.installed)]
    suction = [
        [lv.vessel_pressure + rho * GRAVITY * (lv.suction_head + branch.suction_head) for branch in places]
        for lv, rho in zip(levels, density, strict=True)
    ]
    return Conditions(
        duty=frozen([state.duty for state in found], np.int64),
        kind=frozen([state.kind for state in found], np.int8),
        rated=frozen(np.arange(len(found)) == rated, np.bool_),
        lowest=frozen(np.arange(len(found)) == lowest, np.bool_),
        usual=frozen(usual, np.bool_),
        open=frozen([not state.throttled for state in found], np.bool_),
        held=frozen([state.speed == Speed.HELD for state in found], np.bool_),
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
