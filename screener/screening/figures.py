"""What known flows mean for each pump: head, power, efficiency, NPSH, and what bounds it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields, replace

import numpy as np

from screener.header.branch import BranchCurves
from screener.hydraulics import interpolate
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.hydraulics.losses import loss_head
from screener.hydraulics.motor import smallest_nameplate
from screener.hydraulics.suction import npsh_available
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Branch
from screener.model.curves import Pumps
from screener.model.run import Bounds, Ratings, Run
from screener.screening.header import Header
from screener.screening.ratings import ratings

_LAST = STATIONS - 1


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


def unknown(count: int, *shape: int) -> Floats:
    """NaN in the shape (count, *shape). The candidates lie side by side, as everything is done along them."""
    return np.full((*reversed(shape), count), np.nan).T


def beside_one(new: Floats, installed: Floats) -> Floats:
    """A figure of c new and of p installed pumps, (c, 1 + p)."""
    both = unknown(len(new), 1 + len(installed))
    both[:, 0], both[:, 1:] = new, installed
    return both


def beside(new: Ratings, installed: Ratings) -> Ratings:
    """Join ratings (c,) and (p,) to (c, 1 + p)."""
    return Ratings(
        **{f.name: beside_one(getattr(new, f.name), getattr(installed, f.name)) for f in fields(Ratings)}
    )


def figures(
    header: Header,
    pumps: Pumps,
    place: Branch,
    groups: list[Group],
    flow: Floats,
    head: Floats,
    *,
    base: tuple[Pumps, BranchCurves],
) -> Run:
    """What known flows mean for each pump: the run but for start headers, spare heads and how curves match.

    flow : (c, s, 1 + p), marked as in `Run`;  head : (c, s)
    base : the new pumps and their branch curves, at load
    """
    result = bare_figures(header, pumps, place, groups, flow, head)
    own = ratings(*base, _nameplate(header, groups, result))
    return replace(result, ratings=beside(own, header.ratings))


def bare_figures(
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
        result = unknown(count, 1 if whole else states, width)
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
