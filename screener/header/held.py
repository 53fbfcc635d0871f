"""Pumps that vary their speed and hold the flow of a duty between them: the speed that does it.

While the speed holds the flow, nothing is throttled: the header stands where the system takes the whole
flow, and every pump gives what its curve at its speed gives there. The flow of each pump is read off its
curve at that speed, never scaled at constant head.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from screener.header.branch import flow_at
from screener.header.setting import branches_at, pumps_at
from screener.hydraulics.similarity import take
from screener.model.arrays import Bools, Floats, Ints
from screener.model.case import Branch
from screener.model.curves import Pumps

_TIMES = 80
_NEAR = 1e-13


@dataclass(frozen=True, slots=True)
class Varying:
    """Pumps of one kind that vary their speed: a row for each of c candidates, or one for all.

    low, high : (c,) or (1,) [-] speed over that at load;  number : how many of them run
    bypass    : [m3/s] of each;  viscosity : [m2/s], 0 where the curves hold as measured
    """

    pumps: Pumps
    branch: Branch
    low: Floats
    high: Floats
    number: int
    bypass: float
    viscosity: float


@dataclass(frozen=True, slots=True)
class Held:
    """What c candidates do at one header head.

    ratio : (c,) [-] common speed over that at load; each pump takes it as far as its own range allows
    flow  : (c, k) [m3/s] delivered by one pump of each kind; +inf past its data, -inf left of them
    short : (c,) even at the highest speeds they give less;  over : (c,) even at the lowest more
    """

    ratio: Floats
    flow: Floats
    short: Bools
    over: Bools


def hold(kinds: Sequence[Varying], *, head: float, wanted: Floats) -> Held:
    """Find the one speed at which pumps give a flow between them at a header head.

    kinds : k kinds of pumps;  head : [m] at the header;  wanted : (c,) [m3/s]
    """
    count = len(wanted)

    def delivered(ratio: Floats, rows: Ints) -> Floats:
        return np.stack([_flows(kind, ratio, rows, head) for kind in kinds], axis=1)

    def over(ratio: Floats, rows: Ints) -> Floats:
        flow = np.where(np.isnan(flow := delivered(ratio, rows)), 0.0, flow)
        return np.asarray((flow * number).sum(axis=1) - wanted[rows])

    number = np.array([kind.number for kind in kinds])
    everyone = np.arange(count)
    low = np.broadcast_to(np.min([_wide(kind.low, count) for kind in kinds], axis=0), count)
    high = np.broadcast_to(np.max([_wide(kind.high, count) for kind in kinds], axis=0), count)
    at_low, at_high = over(low, everyone), over(high, everyone)
    noise = 1e-12 * np.maximum(wanted, 1e-3)
    ratio, end = _root(over, low, high, at_low, at_high, noise)
    short, above = at_high < 0, at_low > 0
    ratio = np.where(short, high, np.where(above, low, ratio))
    flow = delivered(ratio, everyone)
    slack = 1e-6 * np.maximum(wanted, 1e-6)
    gap = ~short & ~above & (np.abs(over(ratio, everyone)) > slack)
    if gap.any():  # the flow jumps there: a curve ends, or has no falling side
        rows = np.flatnonzero(gap)
        past = np.isinf(delivered(end[rows], rows))
        flow[rows] = np.where(past, np.inf, flow[rows])
    return Held(ratio, np.where(np.isnan(flow), -np.inf, flow), short, above)


def _wide(values: Floats, count: int) -> Floats:
    return np.broadcast_to(values, count)


def _flows(kind: Varying, ratio: Floats, rows: Ints, head: float) -> Floats:
    """Flow delivered by one pump of a kind at a header head, (c,) [m3/s]."""
    one = len(kind.pumps) == 1
    pumps = kind.pumps if one else take(kind.pumps, rows)
    low, high = (values if len(values) == 1 else values[rows] for values in (kind.low, kind.high))
    turned = pumps_at(pumps, ratio=np.clip(ratio, low, high), viscosity=kind.viscosity)
    branches = branches_at(turned, [kind.branch], np.array([kind.bypass]))
    flow = flow_at(branches, np.arange(len(rows)), np.full(len(rows), head))
    return np.where(np.isnan(branches.low_head), np.nan, flow)


def _root(
    function: Callable[[Floats, Ints], Floats],
    low: Floats,
    high: Floats,
    at_low: Floats,
    at_high: Floats,
    noise: Floats,
) -> tuple[Floats, Floats]:
    """Where a rising function (of place and row) crosses zero, from below and from above, (c,) each.

    Source: T. R. Chandrupatla, Advances in Engineering Software 28(3), 1997: inverse quadratic interpolation
    where it can be trusted, else bisection.
    """
    below, above = low.copy(), high.copy()
    rows = np.flatnonzero((at_low < 0) & (at_high > 0))
    x1, x2, f1, f2 = low[rows], high[rows], at_low[rows], at_high[rows]
    share = np.full(len(rows), 0.5)
    for _ in range(_TIMES):
        if not rows.size:
            break
        place = x1 + share * (x2 - x1)
        value = function(place, rows)
        same = (value > 0) == (f1 > 0)
        x3, f3 = np.where(same, x1, x2), np.where(same, f1, f2)
        x2, f2 = np.where(same, x2, x1), np.where(same, f2, f1)
        x1, f1 = place, value
        up = value > 0
        below[rows], above[rows] = np.where(up, x2, x1), np.where(up, x1, x2)
        there = np.abs(value) <= noise[rows]
        below[rows[there]] = above[rows[there]] = place[there]
        with np.errstate(invalid="ignore", divide="ignore"):
            xi, phi = (x1 - x2) / (x3 - x2), (f1 - f2) / (f3 - f2)
            trusted = (phi**2 < xi) & ((1 - phi) ** 2 < 1 - xi)
            guess = f1 / (f2 - f1) * f3 / (f2 - f3) + (x3 - x1) / (x2 - x1) * f1 / (f3 - f1) * f2 / (f3 - f2)
        least = _NEAR / np.maximum(np.abs(x2 - x1), _NEAR)
        share = np.clip(np.where(trusted, guess, 0.5), np.minimum(least, 0.5), np.maximum(1 - least, 0.5))
        work = np.flatnonzero(~there & (np.abs(x2 - x1) > 2 * _NEAR))
        rows, share = rows[work], share[work]
        x1, x2, f1, f2 = x1[work], x2[work], f1[work], f2[work]
    return below, above
