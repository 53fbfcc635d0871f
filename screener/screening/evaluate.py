"""Candidates in every state: flows from the network, then what those flows mean for each pump."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, fields, replace

import numpy as np

from screener.header import match
from screener.header.branch import BranchCurves, head_and_slope
from screener.header.branch import take as take_branches
from screener.header.left import Left
from screener.header.meet import Mark, Meeting, meet
from screener.header.setting import Setting, branches_at, pumps_at, ratio_at
from screener.header.usable import usable_speeds
from screener.hydraulics.similarity import take as take_pumps
from screener.model.arrays import STATIONS, Floats, Ints
from screener.model.case import Branch, Case
from screener.model.curves import Curves, Pumps
from screener.model.run import Kind, Ratings, Run, Speed
from screener.screening.figures import Group, bare_figures, beside, beside_one, figures, unknown
from screener.screening.header import Header, left_of
from screener.screening.held import NewPumps, held
from screener.screening.ratings import smallest_flow, summits, thermal_power
from screener.screening.standing import Standing

_LAST = STATIONS - 1


@dataclass(frozen=True, slots=True)
class Fitted:
    """The new pumps at one setting: c rows, and their branch curves over what they deliver.

    ratio : (c,) [-] speed over that at load;  bypass : [m3/s];  thermal_power : (c,) [W] see `Bounds`
    """

    pumps: Pumps
    branches: BranchCurves
    ratio: Floats
    bypass: float
    thermal_power: Floats


def run(header: Header, pumps: Pumps, branch: Branch | None = None) -> Run:
    """Run c candidates through every state. branch : of the new pump, as in the case by default."""
    case = header.case
    place = branch or case.new_pump.branch
    known: dict[Setting, Fitted] = {}

    def fitted(setting: Setting) -> Fitted:
        if setting not in known:
            known[setting] = _fitted(case, pumps, place, setting)
        return known[setting]

    count, states, width = len(pumps), len(header.states), 1 + len(case.installed)
    flow, head = unknown(count, states, width), unknown(count, states)
    speeds: dict[int, Floats] = {}
    for column, (state, left, standing) in enumerate(
        zip(header.states, header.left, header.standing, strict=True)
    ):
        if not state.new:
            head[:, column], flow[:, column, 1:] = header.without[column].header, header.without[column].flow
        elif state.speed == Speed.HELD:
            holds = _hold(header, column, pumps, place, fitted, state.running)
            head[:, column], flow[:, column], speeds[column] = holds
        else:
            there = fitted(standing.setting)
            head[:, column], flow[:, column] = _met(there, standing, left, np.arange(count))
    base = fitted(header.base.setting)
    groups = _groups(header, pumps, fitted, speeds)
    shut = match.shutoff_match(base.branches, header.branches, pump_shutoff=header.ratings.shutoff)
    result = figures(header, pumps, place, groups, flow, head, base=(base.pumps, base.branches))
    opening, least = _own_speeds(header, pumps, place, fitted)
    return replace(
        result,
        start_header=_start_headers(header, pumps, place, fitted, states, width),
        spare_head=_spare_heads(header, base),
        shutoff_match=np.where(header.beside, shut, np.nan),
        load_share=_load_share(header, base.branches, head),
        opening_speed=opening,
        least_speed=least,
    )


def today(header: Header, *, replaced: bool = True) -> Run:
    """The same states with the new pump standing still, as a run of one candidate that never runs.

    replaced : whether a pump that the new one replaces still runs
    """
    installed = len(header.case.installed)
    alone = header.alone if replaced else header.without
    flow = np.full((1, len(alone), 1 + installed), np.nan)
    flow[0, :, 1:] = [state.flow for state in alone]
    nobody = _nobody(header.case.pumps)
    same: dict[tuple[int, bytes], list[int]] = {}
    for column, standing in enumerate(header.standing):
        same.setdefault((id(standing), alone[column].ratio.tobytes()), []).append(column)
    groups = [_group_alone(header, columns, nobody, alone[columns[0]].ratio) for columns in same.values()]
    head = np.array([[state.header for state in alone]])
    result = bare_figures(header, nobody, header.case.new_pump.branch, groups, flow, head)
    nothing = np.full((1, installed), np.nan)
    own = Ratings(**{f.name: np.full(1, np.nan) for f in fields(Ratings)})
    gone = header.case.new_pump.replaces
    runs = header.conditions.runs.copy()
    if replaced and gone >= 0:
        runs[:, 1 + gone] |= runs[:, 0]
    return replace(
        result,
        conditions=replace(header.conditions, runs=runs),
        ratings=beside(own, header.ratings),
        start_header=np.full_like(flow, np.nan),
        spare_head=np.full((1, 1 + installed), np.nan),
        shutoff_match=nothing,
        load_share=nothing,
    )


def _group_alone(header: Header, columns: list[int], nobody: Pumps, ratio: Floats) -> Group:
    """States in which the installed pumps stand at the same setting and speeds, without the new one."""
    standing = header.standing[columns[0]]
    pumps = pumps_at(header.case.pumps, ratio=ratio, viscosity=standing.setting.viscosity)
    rows = (take_pumps(pumps, np.array([row])) for row in range(len(pumps)))
    return Group(
        columns,
        (nobody, *rows),
        np.append(1.0, ratio)[None],
        np.append(np.nan, standing.branches.shutoff)[None],
        np.append(np.nan, summits(standing.pumps))[None],
        np.append(np.nan, standing.thermal_power)[None],
    )


def fit(header: Header, pumps: Pumps, setting: Setting) -> Fitted:
    """Bring c new pumps to a setting, in the place of the case."""
    return _fitted(header.case, pumps, header.case.new_pump.branch, setting)


def _fitted(case: Case, pumps: Pumps, place: Branch, setting: Setting) -> Fitted:
    ratio = ratio_at(pumps, [case.new_pump.drive], setting.speed)
    turned = pumps_at(pumps, ratio=ratio, viscosity=setting.viscosity)
    bypass = setting.bypass[0] if setting.bypass else 0.0
    branches = branches_at(turned, [place], np.array([bypass]))
    return Fitted(turned, branches, ratio, bypass, thermal_power(turned))


def _met(there: Fitted, standing: Standing, left: Left, rows: Ints) -> tuple[Floats, Floats]:
    """Header head (r,) and flows through the pumps (r, 1 + p) of some candidates, with the marks of `Run`."""
    branches = there.branches if len(rows) == len(there.branches) else take_branches(there.branches, rows)
    met = meet(branches, left, standing.branches)
    flow = np.concatenate([met.flow[:, None], met.installed], axis=1)
    bypass = np.append(there.bypass, standing.bypass)
    if bypass.any():
        flow += bypass  # a pump held shut, or not running, is told apart by NaN alone
    flow[met.mark == Mark.NEW_PAST_END, 0] = np.inf
    flow[met.mark == Mark.NEW_NOT_MEASURED, 0] = -np.inf
    for mark, sign in ((Mark.INSTALLED_PAST_END, np.inf), (Mark.INSTALLED_NOT_MEASURED, -np.inf)):
        marked = np.flatnonzero(met.mark == mark)
        flow[marked, 1 + met.culprit[marked]] = sign
    return met.header, flow


def _hold(
    header: Header,
    column: int,
    pumps: Pumps,
    place: Branch,
    fitted: Callable[[Setting], Fitted],
    running: tuple[int, ...],
    without: int = -1,
) -> tuple[Floats, Floats, Floats]:
    """Header head (c,), flows and speeds (c, 1 + p) of a state whose flow is held by speed.

    without : row of an installed pump that stands still meanwhile, -1 for none
    """
    state, high = header.states[column], header.standing[column]
    fast = fitted(high.setting)
    new = NewPumps(pumps, place, fast.branches, fast.bypass)
    now = held(header.case, state, high, header.alike, running=running, new=new)
    head, flow, ratio = now.header.copy(), now.flow.copy(), now.ratio.copy()
    slow, slow_left = header.slowest[column]
    for rows, there, standing, left in (
        (np.flatnonzero(now.short), fast, high, header.left[column]),
        (np.flatnonzero(now.over), fitted(slow.setting), slow, slow_left),
    ):
        if rows.size:
            if without >= 0:
                left = left_of(header.case, state, standing, running)
            head[rows], flow[rows] = _met(there, standing, left, rows)
            ratio[rows, 0], ratio[rows, 1:] = there.ratio[rows], standing.ratio
    return head, flow, ratio


def _groups(
    header: Header, pumps: Pumps, fitted: Callable[[Setting], Fitted], speeds: Mapping[int, Floats]
) -> list[Group]:
    """The states by what the pumps are like in them."""
    case = header.case
    found: dict[int, Group] = {}
    result = []
    for column, standing in enumerate(header.standing):
        if column in speeds:
            result.append(_by_speed(header, column, pumps, fitted, speeds[column]))
        elif id(standing) in found:
            found[id(standing)].columns.append(column)
        else:
            there = fitted(standing.setting)
            rows = (take_pumps(standing.pumps, np.array([row])) for row in range(len(case.installed)))
            group = Group(
                [column],
                (there.pumps, *rows),
                beside_one(there.ratio, standing.ratio),
                beside_one(there.branches.shutoff, standing.branches.shutoff),
                beside_one(summits(there.pumps), summits(standing.pumps)),
                beside_one(there.thermal_power, standing.thermal_power),
            )
            found[id(standing)] = group
            result.append(group)
    return result


def _by_speed(
    header: Header, column: int, pumps: Pumps, fitted: Callable[[Setting], Fitted], ratio: Floats
) -> Group:
    """One state whose flow is held by speed: each pump at the speed found, c rows where that varies."""
    case, standing = header.case, header.standing[column]
    fast = fitted(standing.setting)
    viscosity = standing.setting.viscosity
    parts = [pumps_at(pumps, ratio=ratio[:, 0], viscosity=viscosity)]
    for row, pump in enumerate(case.installed):
        one = take_pumps(case.pumps, np.array([row]))
        turned = ratio[:, 1 + row] if pump.drive.varies else np.ones(1)
        parts.append(pumps_at(one, ratio=turned, viscosity=viscosity))
    power = unknown(len(pumps), len(parts))
    for place, part in enumerate(parts):
        power[:, place] = thermal_power(part)
    return Group(
        [column],
        tuple(parts),
        ratio,
        beside_one(fast.branches.shutoff, standing.branches.shutoff),
        beside_one(summits(fast.pumps), summits(standing.pumps)),
        power,
    )


def _at_most(met: Meeting, new: BranchCurves, installed: BranchCurves) -> Floats:
    """Header head of a meeting, or, where a pump is past its data, the head at its end: it is lower yet."""
    head = np.where(met.mark == Mark.NEW_PAST_END, new.end_head, met.header)
    return np.where(met.mark == Mark.INSTALLED_PAST_END, installed.end_head[met.culprit], head)


def _start_headers(
    header: Header, pumps: Pumps, place: Branch, fitted: Callable[[Setting], Fitted], states: int, width: int
) -> Floats:
    """Header head that the others hold while one pump starts, (c, s, 1 + p); duties only."""
    result = unknown(len(pumps), states, width)
    for column, (state, left) in enumerate(zip(header.states, header.left, strict=True)):
        if state.new and state.kind == Kind.DUTY and (left.settled or left.floor >= 0):
            head = header.without[column].header
            result[:, column, 0] = left.header[0] if np.isnan(head) else head
    for (column, row), left in header.starting.items():
        if header.states[column].new:
            standing = header.standing[column]
            new = fitted(standing.setting).branches
            others = _at_most(meet(new, left, standing.branches), new, standing.branches)
            _of_kind(header, column, row, others, result)
    for column in header.slowest:
        state = header.states[column]
        for first in dict.fromkeys(int(header.alike[row]) for row in state.running if state.new):
            row = next(row for row in state.running if header.alike[row] == first)
            rest = tuple(other for other in state.running if other != row)
            others = _held_at_most(
                header, column, fitted, *_hold(header, column, pumps, place, fitted, rest, row)
            )
            _of_kind(header, column, row, others, result)
    return result


def _held_at_most(
    header: Header,
    column: int,
    fitted: Callable[[Setting], Fitted],
    head: Floats,
    flow: Floats,
    speed: Floats,
) -> Floats:
    """Header head, or, where a pump is past its data, the head at its end: it is lower yet."""
    standing = header.standing[column]
    fast = fitted(standing.setting)
    slower = speed / beside_one(fast.ratio, standing.ratio)
    ends = beside_one(fast.branches.end_head, standing.branches.end_head) * slower**2
    past = np.where(np.isposinf(flow), ends, np.inf).min(axis=1)
    return np.where(np.isnan(head) & np.isfinite(past), past, head)


def _of_kind(header: Header, column: int, row: int, others: Floats, result: Floats) -> None:
    """Note a figure for every running pump of the same kind as an installed one."""
    for other in header.states[column].running:
        if header.alike[other] == header.alike[row]:
            result[:, column, 1 + other] = others


def _spare_heads(header: Header, base: Fitted) -> Floats:
    """Head that each pump may lose at the lowest common duty, (c, 1 + p) [m]; NaN where that is unusual."""
    installed, new = header.branches, base.branches
    result = unknown(len(new), 1 + len(installed))
    if not header.at_minimum and not header.conditions.usual[header.lowest]:
        return result
    allowed = smallest_flow(
        base.pumps,
        heat_capacity=header.heat_capacity,
        temperature_rise=header.temperature_rise,
        power=base.thermal_power,
    )
    smallest = np.clip(allowed, new.low, new.end)
    rest = np.interp(smallest, header.finely.left, header.finely.header, left=np.nan, right=np.nan)
    result[:, 0] = head_and_slope(new, np.arange(len(new)), smallest)[0] - rest
    for row, left in header.at_minimum.items():
        first = int(header.alike[row])
        if first != row and first in header.at_minimum:
            result[:, 1 + row] = result[:, 1 + first]
            continue
        flow = np.clip(header.minimum[row], installed.low[row], installed.end[row])
        own_head = head_and_slope(installed, np.full(1, row), flow)[0]
        result[:, 1 + row] = own_head - _at_most(meet(new, left, installed), new, installed)
    return result


def _own_speeds(
    header: Header, pumps: Pumps, place: Branch, fitted: Callable[[Setting], Fitted]
) -> tuple[Floats, Floats]:
    """Speeds at which the new pump opens its valve and reaches its minimum flow, with the system open."""
    opening, least = (unknown(len(pumps), len(header.states)) for _ in range(2))
    varies = header.case.new_pump.drive.varies
    for column, left in header.open_.items() if varies else ():
        setting = replace(header.standing[column].setting, speed=Speed.AT_LOAD)
        there = fitted(setting)
        smallest = smallest_flow(
            there.pumps,
            heat_capacity=header.heat_capacity,
            temperature_rise=header.temperature_rise,
            power=there.thermal_power,
        )
        opening[:, column], least[:, column] = usable_speeds(
            there.pumps, place, left, minimum=smallest, bypass=there.bypass
        )
    return opening, least


def _load_share(header: Header, new: BranchCurves, head: Floats) -> Floats:
    """Load-share difference over the duties that the new and an installed pump run together, (c, p)."""
    together: dict[tuple[int, ...], list[int]] = {}
    for kind in np.unique(header.alike[header.beside]):
        places = (
            place
            for place, state in enumerate(header.states)
            if header.conditions.usual[place]
            and state.kind == Kind.DUTY
            and state.new
            and kind in header.alike[list(state.running)]
        )
        together.setdefault(tuple(places), []).append(int(kind))
    result = unknown(len(new), len(header.alike))
    rated = header.conditions.usual[header.rated]
    for common, kinds in together.items() if rated else ():
        if not common:
            continue
        share = match.load_share(
            new,
            header.branches,
            low_head=head[:, common].min(axis=1),
            high_head=head[:, common].max(axis=1),
            rated_head=head[:, header.rated],
            beside=np.array(kinds),
        )
        result = np.fmax(result, share)
    return np.where(header.beside, result[:, header.alike], np.nan)


def _nobody(pumps: Pumps) -> Pumps:
    """One row of nothing, in the shape of pumps."""
    curves = Curves(
        **{f.name: np.full((1, *getattr(pumps.curves, f.name).shape[1:]), np.nan) for f in fields(Curves)}
    )
    columns = {f.name: np.full(1, np.nan) for f in fields(Pumps) if f.name not in ("curves", "model")}
    return Pumps(curves=curves, model=np.zeros(1, np.int64), **columns)
