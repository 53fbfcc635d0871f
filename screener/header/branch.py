"""Branch curves: what a pump gives at the header, through its own suction and discharge branch."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np

from screener.hydraulics import interpolate
from screener.model.arrays import STATIONS, Bools, Floats, Ints
from screener.model.case import Branch
from screener.model.curves import Curves

DROOP = 0.001
"""A later point above an earlier one by more than this share of the head is a droop, not a reading error."""

_LAST = STATIONS - 1


@dataclass(frozen=True, slots=True)
class BranchCurves:
    """Branch curves of c pumps, ready to be met: head at the header = y + H(Q) - losses.

    Only the falling side is an operating range: from `low` (the flow of the peak, or the first measured
    flow if that is larger) to `end`. All (c,) but the stations.

    head, slope : (c, k) [m] on even stations of flow from 0 to `span`, falling from the peak on
    span, low, end : [m3/s]
    low_head, end_head : [m] at `low` and `end`
    shutoff  : [m] at zero flow, NaN where it was not measured
    closes   : above `low_head` the check valve is shut (else nothing is known there)
    tail     : [m per station] slope with which a solver looks past `end`; never read for a figure
    """

    head: Floats
    slope: Floats
    span: Floats
    low: Floats
    end: Floats
    low_head: Floats
    end_head: Floats
    shutoff: Floats
    closes: Bools
    tail: Floats

    def __len__(self) -> int:
        return len(self.end)


def branch_curves(curves: Curves, branches: Sequence[Branch]) -> BranchCurves:
    """Take the branch losses off c curves. `branches` holds c of them, or one for all."""
    count = len(curves)
    head = curves.head.copy()
    for row, branch in enumerate(branches):
        rows = slice(None) if len(branches) == 1 else slice(row, row + 1)
        head[rows] += branch.suction_head
        _take_off(head[rows], branch, curves.span[rows])
    first = np.ceil(curves.start / curves.span * _LAST - 1e-9).astype(np.int64)
    peak = first.copy()
    rising = np.flatnonzero((np.diff(head, axis=1) > 0).any(axis=1))
    if rising.size:
        peak[rising] = _peak_station(head[rising], first[rising], (curves.end / curves.span * _LAST)[rising])
        fall = np.where(np.arange(STATIONS) >= peak[rising, None], head[rising], np.inf)
        head[rising] = np.where(np.isinf(fall), head[rising], np.minimum.accumulate(fall, axis=1))
    slope = interpolate.station_slopes(head)
    rows_ = np.arange(count)
    low = curves.start.copy()
    later = np.flatnonzero(peak > first)
    if later.size:
        stations = np.broadcast_to(np.arange(STATIONS, dtype=np.float64), (len(later), STATIONS))
        summit, inside = interpolate.vertex(x=stations, y=head[later], best=peak[later])
        low[later] = np.where(inside, summit * curves.span[later] / _LAST, low[later])
    low_head = interpolate.value(head, slope, rows_, low / curves.span * _LAST)
    end_head, tail = interpolate.value_and_slope(head, slope, rows_, curves.end / curves.span * _LAST)
    closes = curves.start == 0
    steepness = np.abs(low_head - end_head) / _LAST
    return BranchCurves(
        head=head,
        slope=slope,
        span=curves.span,
        low=low,
        end=curves.end,
        low_head=low_head,
        end_head=end_head,
        shutoff=np.where(closes, head[:, 0], np.nan),
        closes=closes,
        tail=np.minimum(tail, -0.01 * steepness - 1e-9),
    )


def take(branches: BranchCurves, rows: Ints) -> BranchCurves:
    """Some of the branch curves."""
    return BranchCurves(**{field.name: getattr(branches, field.name)[rows] for field in fields(BranchCurves)})


def _take_off(head: Floats, branch: Branch, span: Floats) -> None:
    """Take the losses of one branch off the stations of heads (c, k), in place."""
    share = np.linspace(0, 1, STATIONS)
    for loss in (branch.suction, branch.discharge):
        for coefficient, exponent in zip(loss.coefficient, loss.exponent, strict=True):
            head -= np.multiply.outer(coefficient * span**exponent, share**exponent)


def _peak_station(head: Floats, first: Ints, last: Floats) -> Ints:
    """Station where the falling side begins: the highest after the last rise that is more than noise."""
    station = np.arange(STATIONS)
    measured = (station >= first[:, None]) & (station <= last[:, None])
    highest_later = np.maximum.accumulate(np.where(measured, head, -np.inf)[:, ::-1], axis=1)[:, ::-1]
    rises = measured & (highest_later > head + DROOP * np.abs(head[:, :1]))
    last_rise = np.where(rises.any(axis=1), _LAST - np.argmax(rises[:, ::-1], axis=1), first)
    return np.asarray(np.where(measured & (station >= last_rise[:, None]), head, -np.inf).argmax(axis=1))


def head_and_slope(branches: BranchCurves, rows: Ints, flow: Floats) -> tuple[Floats, Floats]:
    """Branch head [m] and its slope [m per m3/s] at flows between `low` and `end`; shapes broadcast."""
    per_flow = _LAST / branches.span[rows]
    head, slope = interpolate.value_and_slope(branches.head, branches.slope, rows, flow * per_flow)
    return head, slope * per_flow


def flow_at(branches: BranchCurves, rows: Ints, head: Floats) -> Floats:
    """The one flow on the falling side at which a branch stands at a head.

    rows, head : broadcast.  Returns [m3/s]: 0 where the check valve is shut, inf past the last measured
    point, NaN where the head lies above the first measured point and shutoff was not measured.
    """
    rows, head = np.broadcast_arrays(rows, head)
    base, per_flow = rows * STATIONS, _LAST / branches.span[rows]
    first, last = branches.low[rows] * per_flow, branches.end[rows] * per_flow
    stations, slopes = branches.head.ravel(), branches.slope.ravel()
    cell = first.astype(np.int64)
    for bit in reversed(range(_LAST.bit_length())):
        probe = np.minimum(cell + 2**bit, _LAST)
        cell = np.where(stations.take(base + probe) > head, probe, cell)
    cell = np.minimum(cell, np.minimum(np.ceil(last).astype(np.int64), _LAST) - 1)
    low, high = np.maximum(first - cell, 0.0), np.minimum(last - cell, 1.0)
    place = _in_cell(interpolate.polynomial(stations, slopes, base + cell), head, low, high)
    flow = (cell + place) / per_flow
    at_first = np.where(head == branches.low_head[rows], branches.low[rows], np.nan)
    shut = np.where(branches.closes[rows], 0.0, at_first)
    flow = np.where(head >= branches.low_head[rows], shut, flow)
    return np.where(head < branches.end_head[rows], np.inf, flow)


def _in_cell(cubic: tuple[Floats, Floats, Floats, Floats], head: Floats, low: Floats, high: Floats) -> Floats:
    """Where between `low` and `high` a falling cubic comes to a head: Newton's method within a bracket."""
    y0, c1, c2, c3 = cubic
    fall = np.maximum(-(c1 + c2 + c3), 1e-100)
    start = np.minimum(np.maximum((y0 - head) / fall, low), high)
    columns = np.stack([y0 - head, c1, c2, c3, low, high, start, 1e-15 * np.abs(head)]).reshape(8, -1)
    result, work = start.ravel(), np.arange(start.size)
    for _ in range(60):
        above, c1, c2, c3, low, high, place, noise = columns
        over = ((c3 * place + c2) * place + c1) * place + above
        low, high = np.where(over > 0, place, low), np.where(over > 0, high, place)
        newton = place - over / np.minimum((3 * c3 * place + 2 * c2) * place + c1, -1e-100)
        following = np.where((newton >= low) & (newton <= high), newton, (low + high) / 2)
        there = np.abs(over) <= noise
        result[work] = np.where(there, place, following)
        rest = np.flatnonzero((np.abs(following - place) > 1e-13) & ~there)
        if not rest.size:
            break
        columns[4:7] = low, high, following
        columns, work = columns[:, rest], work[rest]
    return result.reshape(start.shape)
