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
from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.losses import loss_head
from screener.hydraulics.motor import smallest_nameplate
from screener.hydraulics.similarity import take as take_pumps
from screener.hydraulics.suction import npsh_available
from screener.model.arrays import STATIONS, Floats, Ints
from screener.model.case import Branch, Case
from screener.model.curves import Curves, Pumps
from screener.model.run import Bounds, Kind, Ratings, Run, Speed
from screener.screening.header import Header, left_of
from screener.screening.held import NewPumps, held
from screener.screening.ratings import ratings, smallest_flow, summits, thermal_power
from screener.screening.standing import Standing

_LAST = STATIONS - 1


@dataclass(frozen=True, slots=True)
class Fitted:
    """The new pumps at one setting: c rows, and their branch curves over what they deliver.

    ratio : (c,) [-] speed over that at load;  bypass : [m3/s]
    """

    pumps: Pumps
    branches: BranchCurves
    ratio: Floats
    bypass: float


@dataclass(frozen=True, slots=True)
class Group:
    """States in which every pump has the same curves: c rows of new pumps, c rows or one of each installed.

    columns : the states;  ratio, opening, summit, thermal_power : (c, 1 + p) or (1, 1 + p), see `Bounds`
    """

    columns: list[int]
    pumps: tuple[Pumps, ...]
    ratio: Floats
    opening: Floats
    summit: Floats
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
    flow, head = _unknown(count, states, width), _unknown(count, states)
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
    result = figures(header, pumps, place, groups, flow, head, base)
    opening, least = _own_speeds(header, pumps, place, fitted)
    return replace(
        result,
        start_header=_start_headers(header, pumps, place, fitted, states, width),
        spare_head=_spare_heads(header, base, result.ratings),
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
    result = _figures(header, nobody, header.case.new_pump.branch, groups, flow, head)
    unknown = np.full((1, installed), np.nan)
    own = Ratings(**{f.name: np.full(1, np.nan) for f in fields(Ratings)})
    gone = header.case.new_pump.replaces
    runs = header.conditions.runs.copy()
    if replaced and gone >= 0:
        runs[:, 1 + gone] |= runs[:, 0]
    return replace(
        result,
        conditions=replace(header.conditions, runs=runs),
        ratings=_beside(own, header.ratings),
        start_header=np.full_like(flow, np.nan),
        spare_head=np.full((1, 1 + installed), np.nan),
        shutoff_match=unknown,
        load_share=unknown,
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
    return Fitted(turned, branches_at(turned, [place], np.array([bypass])), ratio, bypass)


def _unknown(count: int, *shape: int) -> Floats:
    """NaN in the shape (count, *shape). The candidates lie side by side, as everything is done along them."""
    return np.full((*reversed(shape), count), np.nan).T


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
                _beside_one(there.ratio, standing.ratio),
                _beside_one(there.branches.shutoff, standing.branches.shutoff),
                _beside_one(summits(there.pumps), summits(standing.pumps)),
                _beside_one(thermal_power(there.pumps), standing.thermal_power),
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
    power = _unknown(len(pumps), len(parts))
    for place, part in enumerate(parts):
        power[:, place] = thermal_power(part)
    return Group(
        [column],
        tuple(parts),
        ratio,
        _beside_one(fast.branches.shutoff, standing.branches.shutoff),
        _beside_one(summits(fast.pumps), summits(standing.pumps)),
        power,
    )


def _beside_one(new: Floats, installed: Floats) -> Floats:
    """A figure of c new and of p installed pumps, (c, 1 + p)."""
    both = _unknown(len(new), 1 + len(installed))
    both[:, 0], both[:, 1:] = new, installed
    return both


def figures(
    header: Header,
    pumps: Pumps,
    place: Branch,
    groups: list[Group],
    flow: Floats,
    head: Floats,
    base: Fitted,
) -> Run:
    """What known flows mean for each pump: the run but for start headers, spare heads and how curves match.

    flow : (c, s, 1 + p), marked as in `Run`;  head : (c, s);  base : the new pumps at load
    """
    result = _figures(header, pumps, place, groups, flow, head)
    own = ratings(base.pumps, base.branches, _nameplate(header, groups, result))
    return replace(result, ratings=_beside(own, header.ratings))


def _figures(
    header: Header, pumps: Pumps, place: Branch, groups: list[Group], flow: Floats, head: Floats
) -> Run:
    """Head, power, efficiency and NPSH of every pump at its flow. flow : (c, s, 1 + p); head : (c, s)."""
    case, conditions = header.case, header.conditions
    bypass = np.array([state.bypass or (0.0,) * flow.shape[2] for state in header.states])
    delivers = np.isfinite(flow) & (flow > 0)
    at = np.where(delivers, flow, 0.0)
    given = np.where(delivers, np.maximum(flow - bypass, 0.0), 0.0) if bypass.any() else at
    new_count = np.array([state.new for state in header.states])
    total = given[:, :, 0] * new_count + given[:, :, 1:].sum(axis=2)
    total = np.where(np.isnan(head), np.nan, total)
    branches = (place, *(pump.branch for pump in case.installed))
    suction_loss, discharge_loss = np.empty_like(at), np.empty_like(at)
    for column, branch in enumerate(branches):
        suction_loss[:, :, column] = loss_head(branch.suction, flow=at[:, :, column])
        discharge_loss[:, :, column] = loss_head(branch.discharge, flow=given[:, :, column])
    lift = np.array([b.suction_head for b in branches])
    pump_head = head[:, :, None] - lift + suction_loss + discharge_loss
    if bypass.any():  # behind a shut check valve a pump stands where its bypass puts it
        behind = (at > 0) & (given <= 0)
        pump_head = np.where(behind, _read(groups, "head", "span", at), pump_head)
    efficiency = _read(groups, "efficiency", "span", at)
    power = _read(groups, "power", "span", at)
    npsh_required = _read(groups, "npsh_required", "npsh_span", at)
    useful = REFERENCE_DENSITY * GRAVITY * at * pump_head
    with np.errstate(divide="ignore", invalid="ignore"):
        power = np.where(np.isnan(power) & (efficiency > 0) & delivers, useful / efficiency, power)
        efficiency = np.where(np.isnan(efficiency), useful / power, efficiency)
    power = power * (conditions.density / REFERENCE_DENSITY)[:, None]
    drawn = np.nan_to_num(total)  # what a bypass takes back comes through the common line again
    if bypass.any():
        drawn = drawn + (at - given)[:, :, 0] * new_count + (at - given)[:, :, 1:].sum(axis=2)
    common = loss_head(case.suction_friction, flow=drawn)
    liquids = [case.liquids[state.liquid] for state in header.states]
    levels = [case.levels[state.level] for state in header.states]
    available = npsh_available(
        surface_pressure=case.atmospheric_pressure + np.array([lv.vessel_pressure for lv in levels])[:, None],
        vapour_pressure=np.array([liquid.vapour_pressure for liquid in liquids])[:, None],
        density=conditions.density[:, None],
        suction_head=np.array([level.suction_head for level in levels])[:, None] + lift,
        loss=common[:, :, None] + suction_loss,
    )
    shown = np.where(delivers, 1.0, np.nan)
    return Run(
        pumps=pumps,
        ratings=header.ratings,
        bounds=_bounds(groups, flow.shape),
        conditions=conditions,
        header=head,
        total=total,
        flow=flow,
        head=pump_head * shown,
        power=np.where(np.isfinite(flow), power, np.nan),
        efficiency=efficiency * shown,
        npsh_available=available * shown,
        npsh_required=npsh_required * shown,
        start_header=flow,
        spare_head=head,
        shutoff_match=head,
        load_share=head,
        opening_speed=np.full_like(head, np.nan),
        least_speed=np.full_like(head, np.nan),
    )


def _bounds(groups: list[Group], shape: tuple[int, ...]) -> Bounds:
    """What bounds each pump in each state; one state for all where they are alike."""
    count, states, width = shape
    whole = len(groups) == 1

    def filled(of: Callable[[Group, int], Floats]) -> Floats:
        result = _unknown(count, 1 if whole else states, width)
        for group in groups:
            for pump in range(width):
                result[:, [0] if whole else group.columns, pump] = np.reshape(of(group, pump), (-1, 1))
        return result

    return Bounds(
        speed=filled(lambda group, pump: group.ratio[:, pump]),
        start=filled(lambda group, pump: group.pumps[pump].curves.start),
        end=filled(lambda group, pump: group.pumps[pump].curves.end),
        best=filled(lambda group, pump: group.pumps[pump].bep_flow),
        minimum=filled(lambda group, pump: group.pumps[pump].minimum_flow),
        largest=filled(lambda group, pump: group.pumps[pump].maximum_flow),
        summit=filled(lambda group, pump: group.summit[:, pump]),
        opening=filled(lambda group, pump: group.opening[:, pump]),
        thermal_power=filled(lambda group, pump: group.thermal_power[:, pump]),
    )


def _read(groups: list[Group], column: str, axis: str, flow: Floats) -> Floats:
    """One column of the new and of the installed pumps' curves at flows (c, s, 1 + p)."""
    result = np.full_like(flow, np.nan)
    for group in groups:
        every = len(group.columns) == flow.shape[1]
        for place, pumps in enumerate(group.pumps):
            values, reach = getattr(pumps.curves, column), getattr(pumps.curves, axis)
            known = np.flatnonzero(~np.isnan(values).all(axis=1))
            if not known.size:
                continue
            at = flow[:, :, place].T
            read = result[:, :, place].T
            if not every:
                at, read = at[group.columns], np.full((len(group.columns), len(flow)), np.nan)
            if known.size < len(values) / 2:
                read[:, known] = _stations(values[known], reach[known], at[:, known])
            else:
                read[:] = _stations(values, reach, at)
            if not every:
                result[:, group.columns, place] = read.T
    return result


def _stations(values: Floats, reach: Floats, flow: Floats) -> Floats:
    """Curves (c, k), or one for all, at flows (s, c); NaN beyond their last station, which is at `reach`."""
    station = flow / reach * _LAST
    rows, slope = np.arange(len(values)), interpolate.station_slopes(values)
    read = interpolate.value(values, slope, rows, np.minimum(station, _LAST))
    return np.where(station <= _LAST * (1 + 1e-12), read, np.nan)


def _nameplate(header: Header, groups: list[Group], figures: Run) -> Floats:
    """Smallest standard motor for each candidate, (c,) [W]: +inf where none is large enough.

    NaN where the shaft power is not known in every state; a pump held shut counts where it was measured.
    """
    runs = header.conditions.runs[:, 0]
    power = np.where(figures.flow[:, :, 0] == 0, 0.0, figures.power[:, :, 0])
    density = header.conditions.density / REFERENCE_DENSITY
    largest = power[:, runs].max(axis=1)
    for group in groups:
        shut = group.pumps[0].curves.power[:, 0] * density[group.columns].max()
        largest = np.fmax(largest, shut) if runs[group.columns].any() else largest
    largest = np.where(np.isnan(power[:, runs]).any(axis=1), np.nan, largest)
    return smallest_nameplate(
        rated_power=power[:, header.rated], largest_power=largest, series=header.case.new_pump.motor_series
    )


def _beside(new: Ratings, installed: Ratings) -> Ratings:
    """Join ratings (c,) and (p,) to (c, 1 + p)."""
    return Ratings(
        **{f.name: _beside_one(getattr(new, f.name), getattr(installed, f.name)) for f in fields(Ratings)}
    )


def _at_most(met: Meeting, new: BranchCurves, installed: BranchCurves) -> Floats:
    """Header head of a meeting, or, where a pump is past its data, the head at its end: it is lower yet."""
    head = np.where(met.mark == Mark.NEW_PAST_END, new.end_head, met.header)
    return np.where(met.mark == Mark.INSTALLED_PAST_END, installed.end_head[met.culprit], head)


def _start_headers(
    header: Header, pumps: Pumps, place: Branch, fitted: Callable[[Setting], Fitted], states: int, width: int
) -> Floats:
    """Header head that the others hold while one pump starts, (c, s, 1 + p); duties only."""
    result = _unknown(len(pumps), states, width)
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
    slower = speed / _beside_one(fast.ratio, standing.ratio)
    ends = _beside_one(fast.branches.end_head, standing.branches.end_head) * slower**2
    past = np.where(np.isposinf(flow), ends, np.inf).min(axis=1)
    return np.where(np.isnan(head) & np.isfinite(past), past, head)


def _of_kind(header: Header, column: int, row: int, others: Floats, result: Floats) -> None:
    """Note a figure for every running pump of the same kind as an installed one."""
    for other in header.states[column].running:
        if header.alike[other] == header.alike[row]:
            result[:, column, 1 + other] = others


def _spare_heads(header: Header, base: Fitted, own: Ratings) -> Floats:
    """Head that each pump may lose at the lowest common duty, (c, 1 + p) [m]; NaN where that is unusual."""
    installed, new = header.branches, base.branches
    result = _unknown(len(new), 1 + len(installed))
    if not header.at_minimum and not header.conditions.usual[header.lowest]:
        return result
    allowed = smallest_flow(
        base.pumps, heat_capacity=header.heat_capacity, temperature_rise=header.temperature_rise
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
    opening, least = (_unknown(len(pumps), len(header.states)) for _ in range(2))
    varies = header.case.new_pump.drive.varies
    for column, left in header.open_.items() if varies else ():
        setting = replace(header.standing[column].setting, speed=Speed.AT_LOAD)
        there = fitted(setting)
        smallest = smallest_flow(
            there.pumps, heat_capacity=header.heat_capacity, temperature_rise=header.temperature_rise
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
    result = _unknown(len(new), len(header.alike))
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
