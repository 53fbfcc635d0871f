"""A header run with pumps and a system curve that differ from row to row.

The plain way prepares a header once for every candidate. Where the installed pumps differ too, nothing can be
prepared: `balance` finds the flows of every row, and from there it goes the ordinary way.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from screener.header import system
from screener.header.balance import balance
from screener.header.branch import BranchCurves, flow_at
from screener.header.branch import take as take_branches
from screener.header.held import Varying, hold
from screener.header.setting import Setting, branches_at, pumps_at, ratio_at, setting_of, speed_limits
from screener.model.arrays import Floats, Ints
from screener.model.case import Branch, Case, Drive
from screener.model.curves import Pumps
from screener.model.run import Kind, Run, Speed
from screener.screening.figures import Group, figures
from screener.screening.header import Header
from screener.screening.ratings import summits, thermal_power
from screener.screening.states import curve_of

Flows = Mapping[tuple[int, int], Floats]
"""(state, pump that stands still, -1 for none) -> flows delivered, (r, 1 + p)."""


@dataclass(frozen=True, slots=True)
class _Stand:
    """Every pump at one setting, new first, of r rows each or of one.

    ratio : (r, 1 + p) [-] speed over that at load;  bypass : (1 + p,) [m3/s]
    """

    pumps: tuple[Pumps, ...]
    branches: tuple[BranchCurves, ...]
    ratio: Floats
    bypass: Floats


@dataclass(frozen=True, slots=True)
class _Drawn:
    """r rows of a header: pumps at load, new first, and factors on the friction of the system, (r,)."""

    header: Header
    pumps: tuple[Pumps, ...]
    friction: Floats
    known: dict[Setting, _Stand]

    def stand(self, column: int, speed: Speed | None = None) -> _Stand:
        """The pumps as they stand in a state; at their highest speed where speed holds the flow."""
        state = self.header.states[column]
        chosen = state.speed if speed is None else speed
        return self.at(setting_of(self.header.case, state, Speed.HIGHEST if chosen == Speed.HELD else chosen))

    def at(self, setting: Setting) -> _Stand:
        """The pumps at a setting."""
        if setting not in self.known:
            case, count = self.header.case, len(self.friction)
            ratio = np.ones((len(self.pumps), count)).T
            bypass = np.array(setting.bypass or np.zeros(len(self.pumps)))
            pumps, branches = [], []
            for place, (pump, drive, branch) in enumerate(
                zip(self.pumps, _drives(case), _branches(case), strict=True)
            ):
                own = ratio_at(pump, [drive], setting.speed)
                ratio[:, place] = own
                pumps.append(pumps_at(pump, ratio=own, viscosity=setting.viscosity))
                branches.append(branches_at(pumps[-1], [branch], bypass[place : place + 1]))
            self.known[setting] = _Stand(tuple(pumps), tuple(branches), ratio, bypass)
        return self.known[setting]

    def number(self, column: int, without: int) -> list[int]:
        """How many of each pump run in a state, new first. without : one that stands still, -1 for none."""
        state = self.header.states[column]
        number = [state.new, *(int(row in state.running) for row in range(len(self.pumps) - 1))]
        return [0 if place == without else of for place, of in enumerate(number)]


def _drives(case: Case) -> list[Drive]:
    return [case.new_pump.drive, *(pump.drive for pump in case.installed)]


def _branches(case: Case) -> list[Branch]:
    return [case.new_pump.branch, *(pump.branch for pump in case.installed)]


def flows_of(header: Header, pumps: tuple[Pumps, ...], friction: Floats) -> Flows:
    """Flows from which the same header, a little different, may start."""
    found: dict[tuple[int, int], Floats] = {}
    _solved(_Drawn(header, pumps, friction, {}), {}, found)
    return found


def run_each(header: Header, pumps: tuple[Pumps, ...], friction: Floats, starts: Flows) -> Run:
    """Run r rows through every state: what `evaluate.run` would give for each on its own header.

    pumps    : at load, new first; r rows each, or one for all but of the new
    friction : (r,) what the friction of the system is multiplied with;  starts : flows near the answer

    Spare heads and how curves match, which only ever make a caution, are not worked out: they stay NaN.
    """
    drawn = _Drawn(header, pumps, friction, {})
    head, flow, start_header, speeds = _solved(drawn, starts, {})
    base = drawn.at(header.base.setting)
    result = figures(
        header,
        pumps[0],
        header.case.new_pump.branch,
        _groups(drawn, speeds),
        flow,
        head,
        base=(base.pumps[0], base.branches[0]),
    )
    unknown = np.full((len(friction), flow.shape[2]), np.nan)
    return replace(
        result,
        start_header=start_header,
        spare_head=unknown,
        shutoff_match=unknown[:, 1:],
        load_share=unknown[:, 1:],
    )


def _solved(
    drawn: _Drawn, starts: Flows, found: dict[tuple[int, int], Floats]
) -> tuple[Floats, Floats, Floats, dict[int, Floats]]:
    """Every operating point: `starts` is where to start from, `found` the same, filled in.

    Returns header heads (r, s), flows and start headers (r, s, 1 + p), and by state the speeds (r, 1 + p)
    that hold its flow.
    """
    count, width, states = len(drawn.friction), len(drawn.pumps), drawn.header.states
    head = np.full((len(states), count), np.nan).T
    flow, start_header = (np.full((width, len(states), count), np.nan).T for _ in range(2))
    speeds: dict[int, Floats] = {}

    def solve(column: int, without: int = -1) -> tuple[Floats, Floats]:
        key = (column, without)
        at, found[key] = _balanced(drawn, column, drawn.stand(column), without, starts.get(key))
        return at, found[key]

    for column, state in enumerate(states):
        stand = drawn.stand(column)
        starting = [0, *(1 + row for row in state.running)] if state.kind == Kind.DUTY else []
        if state.speed == Speed.HELD:
            head[:, column], flow[:, column], speeds[column] = _held(drawn, column)
            for place in starting:
                others, given, ratio = _held(drawn, column, place)
                if place > 0:
                    others = _at_most(stand, others, given, (ratio / stand.ratio) ** 2)
                elif np.isnan(others).any():
                    others = np.where(np.isnan(others), _at_most(stand, *solve(column, 0)), others)
                start_header[:, column, place] = others
        else:
            head[:, column], delivered = solve(column)
            flow[:, column] = delivered + stand.bypass
            for place in starting:
                start_header[:, column, place] = _at_most(stand, *solve(column, place))
    return head, flow, start_header, speeds


def _balanced(
    drawn: _Drawn,
    column: int,
    stand: _Stand,
    without: int,
    start: Floats | None = None,
    rows: Ints | None = None,
) -> tuple[Floats, Floats]:
    """Header head (r,) and flows delivered (r, 1 + p) in a state, of some rows only where `rows` says so."""
    state, friction, branches = drawn.header.states[column], drawn.friction, stand.branches
    if rows is not None:
        friction = friction[rows]
        branches = tuple(take_branches(b, rows) if len(b) > 1 else b for b in branches)
    return balance(
        branches,
        number=drawn.number(column, without),
        curve=curve_of(drawn.header.case, state),
        friction=friction,
        demand=state.asked if state.throttled else np.inf,
        start=np.full((len(friction), len(branches)), np.nan) if start is None else start,
    )


def _at_most(stand: _Stand, header: Floats, flow: Floats, turned: Floats | None = None) -> Floats:
    """Header head, or, where a pump is past its data, the head at its end: it is lower yet.

    turned : (r, 1 + p) what speed makes of a head, where the pumps do not run as they stand
    """
    ends = np.array([np.broadcast_to(branch.end_head, len(header)) for branch in stand.branches]).T
    past = np.where(np.isposinf(flow), ends if turned is None else ends * turned, np.inf).min(axis=1)
    return np.where(np.isfinite(past), past, header)


def _held(drawn: _Drawn, column: int, without: int = -1) -> tuple[Floats, Floats, Floats]:
    """Header head (r,), flows and speeds (r, 1 + p) of a state whose flow is held by speed; see `held`."""
    case, state, fast = drawn.header.case, drawn.header.states[column], drawn.stand(column)
    setting = setting_of(case, state, Speed.HIGHEST)
    count, number, curve = len(drawn.friction), drawn.number(column, without), curve_of(case, state)
    head = curve.static + (system.head(curve, state.asked) - curve.static) * drawn.friction
    flow, ratio = (np.full((count, len(number)), value) for value in (np.nan, 1.0))
    kinds, places, wanted = [], [], np.full(count, state.asked)
    for place, (pump, drive, branch) in enumerate(
        zip(drawn.pumps, _drives(case), _branches(case), strict=True)
    ):
        if number[place] and drive.varies:
            low, high = speed_limits(pump, [drive])
            bypass = float(fast.bypass[place])
            kinds.append(Varying(pump, branch, low, high, number[place], bypass, setting.viscosity))
            places.append(place)
        elif number[place]:
            rows = np.arange(count) if len(fast.branches[place]) > 1 else np.zeros(1, np.int64)
            flow[:, place] = flow_at(fast.branches[place], rows, head)
            wanted -= number[place] * flow[:, place]
    short, over = np.ones(count, bool), np.zeros(count, bool)
    if kinds:
        found = hold(kinds, head=head, wanted=np.where(np.isnan(wanted), -np.inf, wanted))
        short, over = found.short, found.over
        for kind, place, given in zip(kinds, places, found.flow.T, strict=True):
            flow[:, place], ratio[:, place] = given, np.clip(found.ratio, kind.low, kind.high)
    unknown = np.isinf(flow).any(axis=1)
    head = np.where(unknown, np.nan, head)
    flow = np.where(unknown[:, None] & ~np.isinf(flow), np.nan, flow)
    flow += np.where(np.isfinite(flow), fast.bypass, 0.0)
    for rows, speed in ((np.flatnonzero(short), Speed.HIGHEST), (np.flatnonzero(over), Speed.LOWEST)):
        if rows.size:
            stand = drawn.stand(column, speed)
            head[rows], delivered = _balanced(drawn, column, stand, without, rows=rows)
            flow[rows], ratio[rows] = delivered + stand.bypass, stand.ratio[rows]
    return head, flow, ratio


def _groups(drawn: _Drawn, speeds: Mapping[int, Floats]) -> list[Group]:
    """The states by what the pumps are like in them."""
    found: dict[int, Group] = {}
    result = []
    for column in range(len(drawn.header.states)):
        stand = drawn.stand(column)
        if column not in speeds and id(stand) in found:
            found[id(stand)].columns.append(column)
            continue
        ratio, pumps = speeds.get(column, stand.ratio), stand.pumps
        if column in speeds:
            viscosity = setting_of(drawn.header.case, drawn.header.states[column]).viscosity
            pumps = tuple(
                pumps_at(pump, ratio=own, viscosity=viscosity)
                for pump, own in zip(drawn.pumps, ratio.T, strict=True)
            )
        group = Group(
            [column],
            pumps,
            ratio,
            np.array([branch.shutoff for branch in stand.branches]).T,
            np.array([summits(pump) for pump in stand.pumps]).T,
            np.array([thermal_power(pump) for pump in pumps]).T,
        )
        result.append(group)
        if column not in speeds:
            found[id(stand)] = group
    return result
