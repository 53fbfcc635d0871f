"""Duties whose flow is held by the speed of the pumps that vary it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from screener.header import system
from screener.header.branch import BranchCurves, flow_at
from screener.header.held import Varying, hold
from screener.header.setting import speed_limits
from screener.hydraulics.similarity import take
from screener.model.arrays import Bools, Floats, Ints
from screener.model.case import Branch, Case
from screener.model.curves import Pumps
from screener.model.run import State
from screener.screening.standing import Standing
from screener.screening.states import curve_of


@dataclass(frozen=True, slots=True)
class NewPumps:
    """c new pumps at load, with their branch; `branches` are theirs at the setting of the state."""

    pumps: Pumps
    place: Branch
    branches: BranchCurves
    bypass: float


@dataclass(frozen=True, slots=True)
class Holding:
    """What c candidates and p installed pumps do while speed holds the flow.

    header : (c,) [m];  flow : (c, 1 + p) [m3/s] through each pump, with the marks of `Run.flow`
    ratio  : (c, 1 + p) [-] speed over that at load
    short  : (c,) even at their highest speed they give less;  over : (c,) even at their lowest more: in
             both the rest of the row says nothing, and the users hold what there is
    """

    header: Floats
    flow: Floats
    ratio: Floats
    short: Bools
    over: Bools


def held(
    case: Case,
    state: State,
    standing: Standing,
    alike: Ints,
    *,
    running: Sequence[int],
    new: NewPumps | None = None,
) -> Holding:
    """Find the speed at which the pumps that vary it give what the others leave of the flow asked.

    standing : the installed pumps, those of fixed speed at load;  running : the rows that run
    new      : the candidates, None while the new pump stands still
    """
    count = 1 if new is None else len(new.pumps)
    head = system.head(curve_of(case, state), state.asked)
    kinds, rows = _varying(case, standing, running, alike)
    fixed = np.array([row for row in running if not case.installed[row].drive.varies], np.int64)
    fixed_flow = flow_at(standing.branches, fixed, np.full(len(fixed), head))
    wanted = np.full(count, state.asked - fixed_flow.sum())
    flow, ratio = np.full((count, 1 + len(alike)), np.nan), np.ones((count, 1 + len(alike)))
    flow[:, 1 + fixed] = fixed_flow
    new_varies = new is not None and case.new_pump.drive.varies
    if new is not None and new_varies:
        low, high = speed_limits(new.pumps, [case.new_pump.drive])
        kinds.insert(
            0,
            Varying(new.pumps, new.place, low, high, state.new, new.bypass, standing.setting.viscosity),
        )
    elif new is not None:
        flow[:, 0] = flow_at(new.branches, np.arange(count), np.full(count, head))
        wanted = wanted - state.new * flow[:, 0]
    if not kinds or not np.isfinite(head):
        nothing = np.full(count, np.nan)
        return Holding(nothing, flow, ratio, np.ones(count, bool), np.zeros(count, bool))
    found = hold(kinds, head=head, wanted=np.where(np.isnan(wanted), -np.inf, wanted))
    for place, kind in enumerate(kinds):
        columns = [0] if new_varies and place == 0 else [1 + row for row in rows[place - new_varies]]
        for column in columns:
            flow[:, column] = found.flow[:, place]
            ratio[:, column] = np.clip(found.ratio, kind.low, kind.high)
    unknown = np.isinf(flow).any(axis=1)
    flow = np.where(unknown[:, None] & ~np.isinf(flow), np.nan, flow)
    flow[:, 1:] += np.where(np.isfinite(flow[:, 1:]), standing.bypass, 0.0)
    if new is not None:
        flow[:, 0] += np.where(np.isfinite(flow[:, 0]), new.bypass, 0.0)
    return Holding(np.where(unknown, np.nan, head), flow, ratio, found.short, found.over)


def _varying(
    case: Case, standing: Standing, running: Sequence[int], alike: Ints
) -> tuple[list[Varying], list[list[int]]]:
    """The running installed pumps that vary their speed, by kind, and the rows of each kind."""
    kinds: dict[int, list[int]] = {}
    for row in running:
        if case.installed[row].drive.varies:
            kinds.setdefault(int(alike[row]), []).append(row)
    found = []
    for rows in kinds.values():
        pump, installed = take(case.pumps, np.array(rows[:1])), case.installed[rows[0]]
        low, high = speed_limits(pump, [installed.drive])
        bypass = float(standing.bypass[rows[0]])
        found.append(
            Varying(pump, installed.branch, low, high, len(rows), bypass, standing.setting.viscosity)
        )
    return found, list(kinds.values())
