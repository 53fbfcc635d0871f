"""How well the branch curve of a new pump matches those it runs beside."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.header import branch
from screener.header.branch import BranchCurves
from screener.hydraulics import interpolate
from screener.model.arrays import Floats, Ints

_HEADS = 33
_DENSE = 513


@dataclass(frozen=True, slots=True)
class Inverse:
    """Flow against header head of one installed pump, dense enough for linear reading; (n,), head rising."""

    head: Floats
    flow: Floats


def inverse(installed: BranchCurves, row: int) -> Inverse:
    """Tabulate the falling side of one installed branch, from its last measured point to shut."""
    flow = np.linspace(installed.end[row], installed.low[row], _DENSE)
    head = branch.head_and_slope(installed, np.full(_DENSE, row), flow)[0]
    if installed.closes[row]:
        flow, head = np.append(flow, 0.0), np.append(head, np.nextafter(head[-1], np.inf))
    return Inverse(np.maximum.accumulate(head), flow)


def _read(pump: Inverse, head: Floats, closes: bool) -> Floats:
    return np.interp(head, pump.head, pump.flow, left=np.nan, right=0.0 if closes else np.nan)


def shutoff_match(new: BranchCurves, installed: BranchCurves, *, pump_shutoff: Floats) -> Floats:
    """Shutoff head of the new pump at the header less that of each installed one, over the latter's own.

    pump_shutoff : (p,) [m] shutoff heads of the installed pumps themselves.  Returns (c, p) [-], signed.
    """
    return np.asarray((new.shutoff[:, None] - installed.shutoff) / pump_shutoff)


def load_share(
    new: BranchCurves,
    installed: BranchCurves,
    *,
    low_head: Floats,
    high_head: Floats,
    rated_head: Floats,
    beside: Ints,
) -> Floats:
    """Largest difference between the shares that the new and an installed pump keep of their rated flow.

    Over the header heads at which they run together, `low_head` at the largest demand to `high_head` at
    the smallest; each flow is taken relative to the pump's flow at `rated_head`. A pump held shut
    keeps 0. Equal shapes of branch curve give 0 whatever the sizes; more than 1 is told as 1.

    low_head, high_head, rated_head : (c,) [m];  beside : rows of the installed pumps it runs with
    Returns (c, p) [-], NaN where a rated flow is 0 or unknown or the heads are one.
    """
    result = np.full((len(new), len(installed)), np.nan)
    flows = branch.flow_at(new, np.arange(len(new)), np.stack([rated_head, low_head, high_head]))
    sound = np.isfinite(flows[0]) & (flows[0] > 0) & np.isfinite(flows[2])
    rows = np.flatnonzero((high_head > low_head * (1 + 1e-9)) & sound)
    own_rated, most, least = flows[:, rows]
    rated_head, low_head, high_head = rated_head[rows], low_head[rows], high_head[rows]
    flow = least[:, None] + (np.minimum(most, new.end[rows]) - least)[:, None] * np.linspace(0, 1, _HEADS)
    inside = np.minimum(np.fmax(flow, new.low[rows, None]), new.end[rows, None])
    stations = inside * ((new.head.shape[1] - 1) / new.span[rows])[:, None]
    head = interpolate.value(new.head, new.slope, rows[:, None], stations)
    head = np.minimum(np.maximum(head, low_head[:, None]), high_head[:, None])
    head = np.concatenate([head, high_head[:, None]], axis=1)
    own = np.concatenate([flow, least[:, None]], axis=1) / own_rated[:, None]
    for row in beside:
        pump, closes = inverse(installed, int(row)), bool(installed.closes[row])
        rated = _read(pump, rated_head, closes)
        with np.errstate(divide="ignore", invalid="ignore"):
            other = _read(pump, head, closes) / rated[:, None]
            difference = np.abs(own - other).max(axis=1)
            cut_in = np.clip(pump.head[-1], low_head, high_head)  # between the places, where a pump starts
            there = branch.flow_at(new, rows, cut_in) / own_rated - _read(pump, cut_in, closes) / rated
            difference = np.fmax(difference, np.abs(there))
        result[rows, row] = np.where(rated > 0, np.minimum(difference, 1.0), np.nan)
    return result
