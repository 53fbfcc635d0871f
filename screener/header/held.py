"""Pumps that vary their speed and hold the flow of a duty between them: the speed that does it.

While the speed holds the flow, nothing is throttled: the header stands where the system takes the whole
flow, and every pump gives what its curve at its speed gives there. The flow of each pump is read off its
curve at that speed, never scaled at constant head.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from screener.header.branch import flow_at
from screener.header.root import crossing
from screener.header.setting import branches_at, pumps_at
from screener.hydraulics.similarity import take
from screener.model.arrays import Bools, Floats, Ints, Real
from screener.model.case import Branch
from screener.model.curves import Pumps


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


def hold(kinds: Sequence[Varying], *, head: Real, wanted: Floats) -> Held:
    """Find the one speed at which pumps give a flow between them at a header head.

    kinds : k kinds of pumps;  head : [m] at the header, one or (c,);  wanted : (c,) [m3/s]
    """
    count = len(wanted)
    heads = np.broadcast_to(head, count)

    def delivered(ratio: Floats, rows: Ints) -> Floats:
        return np.stack([_flows(kind, ratio, rows, heads[rows]) for kind in kinds], axis=1)

    def over(ratio: Floats, rows: Ints) -> Floats:
        flow = np.where(np.isnan(flow := delivered(ratio, rows)), 0.0, flow)
        return np.asarray((flow * number).sum(axis=1) - wanted[rows])

    number = np.array([kind.number for kind in kinds])
    everyone = np.arange(count)
    low = np.min([np.broadcast_to(kind.low, count) for kind in kinds], axis=0)
    high = np.max([np.broadcast_to(kind.high, count) for kind in kinds], axis=0)
    ends = over(low, everyone), over(high, everyone)
    above, short = ends[0] > 0, ends[1] < 0
    ratio, end = crossing(over, low, high, ends=ends, noise=1e-12 * np.maximum(wanted, 1e-3))
    ratio = np.where(short, high, np.where(above, low, ratio))
    flow = delivered(ratio, everyone)
    slack = 1e-6 * np.maximum(wanted, 1e-6)
    gap = ~short & ~above & (np.abs(over(ratio, everyone)) > slack)
    if gap.any():  # the flow jumps there: a curve ends, or has no falling side
        rows = np.flatnonzero(gap)
        past = np.isinf(delivered(end[rows], rows))
        flow[rows] = np.where(past, np.inf, flow[rows])
    return Held(ratio, np.where(np.isnan(flow), -np.inf, flow), short, above)


def _flows(kind: Varying, ratio: Floats, rows: Ints, head: Floats) -> Floats:
    """Flow delivered by one pump of a kind at a header head, (c,) [m3/s]."""
    one = len(kind.pumps) == 1
    pumps = kind.pumps if one else take(kind.pumps, rows)
    low, high = (values if len(values) == 1 else values[rows] for values in (kind.low, kind.high))
    turned = pumps_at(pumps, ratio=np.clip(ratio, low, high), viscosity=kind.viscosity)
    branches = branches_at(turned, [kind.branch], np.array([kind.bypass]))
    flow = flow_at(branches, np.arange(len(rows)), head)
    return np.where(np.isnan(branches.low_head), np.nan, flow)
