"""Candidates in every state: flows from the network, then what those flows mean for each pump."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np

from screener.header import match
from screener.header.branch import BranchCurves, branch_curves, head_and_slope
from screener.header.left import without_new
from screener.header.meet import Mark, Meeting, meet
from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.losses import loss_head
from screener.hydraulics.motor import smallest_nameplate
from screener.hydraulics.suction import npsh_available
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Branch
from screener.model.curves import Curves, Pumps
from screener.model.run import Kind, Ratings, Run
from screener.screening.header import Header
from screener.screening.ratings import ratings, smallest_flow

_LAST = STATIONS - 1


def run(header: Header, pumps: Pumps, branch: Branch | None = None) -> Run:
    """Run c candidates through every state. branch : of the new pump, as in the case by default."""
    case = header.case
    place = branch or case.new_pump.branch
    new = branch_curves(pumps.curves, [place])
    count, states, width = len(pumps), len(header.states), 1 + len(case.installed)
    flow, head = _unknown(count, states, width), _unknown(count, states)
    for column, (state, left) in enumerate(zip(header.states, header.left, strict=True)):
        if state.new:
            met = meet(new, left, header.branches)
            head[:, column] = met.header
            _mark(flow[:, column], met)
        else:
            head[:, column], flow[:, column, 1:] = without_new(left, width - 1)
    shut = match.shutoff_match(new, header.branches, pump_shutoff=header.ratings.shutoff)
    result = _figures(header, pumps, place, flow, head)
    own = ratings(pumps, new, _nameplate(header, pumps, result))
    return replace(
        result,
        ratings=_beside(own, header.ratings),
        start_header=_start_headers(header, new, states, width),
        spare_head=_spare_heads(header, new, pumps, own),
        shutoff_match=np.where(header.beside, shut, np.nan),
        load_share=_load_share(header, new, head),
    )


def today(header: Header) -> Run:
    """The same states with the new pump standing still, as a run of one candidate that never runs."""
    states, installed = len(header.states), len(header.case.installed)
    flow, head = np.full((1, states, 1 + installed), np.nan), np.full((1, states), np.nan)
    for column, left in enumerate(header.left):
        head[0, column], flow[0, column, 1:] = without_new(left, installed)
    nobody = _nobody(header.case.pumps)
    result = _figures(header, nobody, header.case.new_pump.branch, flow, head)
    unknown = np.full((1, installed), np.nan)
    own = Ratings(**{f.name: np.full(1, np.nan) for f in fields(Ratings)})
    return replace(
        result,
        ratings=_beside(own, header.ratings),
        start_header=np.full_like(flow, np.nan),
        spare_head=np.full((1, 1 + installed), np.nan),
        shutoff_match=unknown,
        load_share=unknown,
    )


def _unknown(count: int, *shape: int) -> Floats:
    """NaN in the shape (count, *shape). The candidates lie side by side, as everything is done along them."""
    return np.full((*reversed(shape), count), np.nan).T


def _mark(flow: Floats, met: Meeting) -> None:
    """Fill in the flows (c, 1 + p) of one state, with the marks of `Run.flow`."""
    flow[:, 0], flow[:, 1:] = met.flow, met.installed
    flow[met.mark == Mark.NEW_PAST_END, 0] = np.inf
    flow[met.mark == Mark.NEW_NOT_MEASURED, 0] = -np.inf
    for mark, sign in ((Mark.INSTALLED_PAST_END, np.inf), (Mark.INSTALLED_NOT_MEASURED, -np.inf)):
        rows = np.flatnonzero(met.mark == mark)
        flow[rows, 1 + met.culprit[rows]] = sign


def _figures(header: Header, pumps: Pumps, place: Branch, flow: Floats, head: Floats) -> Run:
    """Head, power, efficiency and NPSH of every pump at its flow. flow : (c, s, 1 + p); head : (c, s)."""
    case, conditions = header.case, header.conditions
    delivers = np.isfinite(flow) & (flow > 0)
    at = np.where(delivers, flow, 0.0)
    new_count = np.array([state.new for state in header.states])
    total = at[:, :, 0] * new_count + at[:, :, 1:].sum(axis=2)
    total = np.where(np.isnan(head), np.nan, total)
    branches = (place, *(pump.branch for pump in case.installed))
    suction_loss, discharge_loss = np.empty_like(at), np.empty_like(at)
    for column, branch in enumerate(branches):
        suction_loss[:, :, column] = loss_head(branch.suction, flow=at[:, :, column])
        discharge_loss[:, :, column] = loss_head(branch.discharge, flow=at[:, :, column])
    lift = np.array([b.suction_head for b in branches])
    pump_head = head[:, :, None] - lift + suction_loss + discharge_loss
    everyone = (pumps.curves, case.pumps.curves)
    efficiency = _read(everyone, "efficiency", "span", at)
    power = _read(everyone, "power", "span", at)
    npsh_required = _read(everyone, "npsh_required", "npsh_span", at)
    useful = REFERENCE_DENSITY * GRAVITY * at * pump_head
    with np.errstate(divide="ignore", invalid="ignore"):
        power = np.where(np.isnan(power) & (efficiency > 0) & delivers, useful / efficiency, power)
        efficiency = np.where(np.isnan(efficiency), useful / power, efficiency)
    power = power * (conditions.density / REFERENCE_DENSITY)[:, None]
    common = loss_head(case.suction_friction, flow=np.nan_to_num(total))
    liquids = [case.liquids[case.duties[state.duty].liquid] for state in header.states]
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
    )


def _read(curves: tuple[Curves, Curves], column: str, axis: str, flow: Floats) -> Floats:
    """One column of the new and of the installed pumps' curves at flows (c, s, 1 + p)."""
    result = np.full_like(flow, np.nan)
    new, installed = curves
    for place in range(flow.shape[2]):
        pumps, part = (installed, slice(place - 1, place)) if place else (new, slice(None))
        values, reach = getattr(pumps, column)[part], getattr(pumps, axis)[part]
        at, read = flow[:, :, place].T, result[:, :, place].T
        known = np.flatnonzero(~np.isnan(values).all(axis=1))
        if 0 < known.size < len(values) / 2:
            read[:, known] = _stations(values[known], reach[known], at[:, known])
        elif known.size:
            read[:] = _stations(values, reach, at)
    return result


def _stations(values: Floats, reach: Floats, flow: Floats) -> Floats:
    """Curves (c, k), or one for all, at flows (s, c); NaN beyond their last station, which is at `reach`."""
    station = flow / reach * _LAST
    rows, slope = np.arange(len(values)), interpolate.station_slopes(values)
    read = interpolate.value(values, slope, rows, np.minimum(station, _LAST))
    return np.where(station <= _LAST * (1 + 1e-12), read, np.nan)


def _nameplate(header: Header, pumps: Pumps, figures: Run) -> Floats:
    """Smallest standard motor for each candidate, (c,) [W]: +inf where none is large enough.

    NaN where the shaft power is not known in every state; a pump held shut counts where it was measured.
    """
    runs = header.conditions.runs[:, 0]
    power = np.where(figures.flow[:, :, 0] == 0, 0.0, figures.power[:, :, 0])
    density = header.conditions.density.max() / REFERENCE_DENSITY
    largest = np.fmax(power[:, runs].max(axis=1), pumps.curves.power[:, 0] * density)
    largest = np.where(np.isnan(power[:, runs]).any(axis=1), np.nan, largest)
    return smallest_nameplate(
        rated_power=power[:, header.rated], largest_power=largest, series=header.case.new_pump.motor_series
    )


def _beside(new: Ratings, installed: Ratings) -> Ratings:
    """Join ratings (c,) and (p,) to (c, 1 + p)."""
    count = len(new.end)

    def join(name: str) -> Floats:
        both = _unknown(count, 1 + len(installed.end))
        both[:, 0], both[:, 1:] = getattr(new, name), getattr(installed, name)
        return both

    return Ratings(**{f.name: join(f.name) for f in fields(Ratings)})


def _at_most(met: Meeting, new: BranchCurves, installed: BranchCurves) -> Floats:
    """Header head of a meeting, or, where a pump is past its data, the head at its end: it is lower yet."""
    head = np.where(met.mark == Mark.NEW_PAST_END, new.end_head, met.header)
    return np.where(met.mark == Mark.INSTALLED_PAST_END, installed.end_head[met.culprit], head)


def _start_headers(header: Header, new: BranchCurves, states: int, width: int) -> Floats:
    """Header head that the others hold while one pump starts, (c, s, 1 + p); duties only."""
    result = _unknown(len(new), states, width)
    for column, (state, left) in enumerate(zip(header.states, header.left, strict=True)):
        if state.new and state.kind == Kind.DUTY and (left.settled or left.floor >= 0):
            head = without_new(left, width - 1)[0]
            result[:, column, 0] = left.header[0] if np.isnan(head) else head
    for (column, row), left in header.starting.items():
        if header.states[column].new:
            others = _at_most(meet(new, left, header.branches), new, header.branches)
            for other in header.states[column].running:
                if header.alike[other] == header.alike[row]:
                    result[:, column, 1 + other] = others
    return result


def _spare_heads(header: Header, new: BranchCurves, pumps: Pumps, own: Ratings) -> Floats:
    """Head that each pump may lose at the lowest common duty, (c, 1 + p) [m]."""
    installed = header.branches
    allowed = smallest_flow(
        pumps,
        heat_capacity=header.heat_capacity,
        temperature_rise=header.temperature_rise,
        power=own.thermal_power,
    )
    smallest = np.clip(allowed, new.low, new.end)
    rest = np.interp(smallest, header.finely.left, header.finely.header, left=np.nan, right=np.nan)
    result = _unknown(len(new), 1 + len(installed))
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


def _load_share(header: Header, new: BranchCurves, head: Floats) -> Floats:
    """Load-share difference over the duties that the new and an installed pump run together, (c, p)."""
    together: dict[tuple[int, ...], list[int]] = {}
    for kind in np.unique(header.alike[header.beside]):
        places = (
            place
            for place, state in enumerate(header.states)
            if state.kind == Kind.DUTY and state.new and kind in header.alike[list(state.running)]
        )
        together.setdefault(tuple(places), []).append(int(kind))
    result = _unknown(len(new), len(header.alike))
    for common, kinds in together.items():
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
